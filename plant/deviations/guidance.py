"""Short guidance: what to check, what to beware of, who to tell. Common practice of the trade, no source; it never replaces
the works' own procedures, the supplier's safety data sheet or the operator in charge.
"""

from __future__ import annotations

from dataclasses import dataclass

GOVERNS = (
    "The local regulator’s rules govern, and so do the works’ own procedures: this is a reminder for a licensed operator, not "
    "an instruction."
)


@dataclass(frozen=True)
class Guidance:
    """What to look at first, in order; what to beware of; who usually has to know."""

    check: tuple[str, ...]
    cautions: tuple[str, ...] = ()
    tell: str = ""


_OXIDANT_CAUTION = (
    "Never let an acid, or an acidic coagulant, meet hypochlorite or chlorite: poisonous gas forms at once.",
    "Wear the protection that the safety data sheet asks for; don’t enter a gas room alone.",
)
_CAUSTIC_CAUTION = ("Caustic and lime burn skin and eyes: goggles, gloves, and know where the shower is.",)
_ACID_CAUTION = ("Acid: goggles and gloves; acid into water, never water into acid; keep it from hypochlorite.",)
_RESIDUAL_LOW = Guidance(
    (
        "Take a second sample by hand and test it; compare it with the analyser.",
        "Is the pump feeding? Look at suction, stroke, air lock, day tank level, injector.",
        "Has the flow risen, or the demand: turbidity, ammonia, colour, temperature of the raw water?",
        "How old and how strong is what is in the tank?",
    ),
    _OXIDANT_CAUTION,
    "The supervisor at once; below the legal minimum, the authority within the time stated with the limit.",
)
_RESIDUAL_HIGH = Guidance(
    (
        "Take a second sample by hand; dilute it if it may be above the range of the test.",
        "Is the feeder still in step with the flow? Look at setting, stroke and siphoning.",
        "Has the flow fallen, or a filter been taken out, while the dose stayed?",
    ),
    _OXIDANT_CAUTION,
    "The supervisor; the authority where a legal maximum is exceeded.",
)
_BY_PARAMETER: dict[tuple[str, str], Guidance] = {
    ("pH", "low"): Guidance(
        (
            "Check the meter against a buffer and test a second sample.",
            "Is the alkali feeding, and is coagulant or CO2 dosed as set?",
            "Has the alkalinity of the raw water fallen?",
        ),
        _CAUSTIC_CAUTION,
        "The supervisor: corrosion control and disinfection both depend on it.",
    ),
    ("pH", "high"): Guidance(
        (
            "Check the meter against a buffer and test a second sample.",
            "Is lime or caustic overfeeding? Look at setting, siphoning, slaker.",
            "Is recarbonation working?",
        ),
        (
            *_CAUSTIC_CAUTION,
            "Ventilate and test the air before anyone leans into a recarbonation chamber: CO2 gathers there.",
        ),
        "The supervisor; disinfection by chlorine is weaker at high pH.",
    ),
    ("turbidity", "high"): Guidance(
        (
            "Look at the sample and clean the cell; take a grab sample beside the turbidimeter.",
            "Which filter? Look at run time, head loss, rate, last backwash.",
            "Is the coagulant feeding, and has the raw water changed?",
        ),
        (),
        "The supervisor; above the legal maximum, the authority within the time stated with the limit.",
    ),
    ("hardness", "high"): Guidance(
        (
            "Test a second sample.",
            "Are lime and soda ash feeding as set? Is the slaker making good slurry?",
            "For ion exchange: which vessel is exhausted, and did the last regeneration take its salt?",
        ),
        ("Quicklime and water get hot: keep the lid on the slaker, goggles on, and dust out of eyes.", *_CAUSTIC_CAUTION),
        "The supervisor.",
    ),
    ("fluoride", "high"): Guidance(
        (
            "Stop the fluoride feed first, then test a second sample.",
            "Look for siphoning, a wrong setting, a flow signal that is off.",
        ),
        ("Fluorosilicic acid: full protection; keep it away from everything else.", *_ACID_CAUTION),
        "The supervisor at once, and whoever the works’ procedure names for an overfeed.",
    ),
    ("e_coli", "high"): Guidance(
        ("Confirm the sample and its point with the laboratory.", "Check the residual at the point and upstream now."),
        (),
        "The supervisor and the authority at once.",
    ),
    ("hydrogen_peroxide", "high"): Guidance(
        ("Test a second sample.", "Is the feeder in step with the flow?", "Is what should quench it feeding?"),
        ("Peroxide under pressure: never close it in between two valves; keep metals and dirt out of it.",),
        "The supervisor.",
    ),
}
_RESIDUALS = ("free_chlorine", "total_chlorine", "combined_chlorine", "chlorine_dioxide", "ozone")
_DOSE_HIGH = Guidance(
    (
        "Catch the feed in the calibration column for a timed minute, at the running pressure.",
        "Compare the levels again; look for a leak from tank to injection point, and under the floor.",
        "Do other doses on the same meter move too? Then look at the meter.",
        "Has the water’s need risen? Then the design dose may be out of date.",
    ),
    ("A leak of chemical: isolate the feed, keep away, protect yourself, and keep it from drains that hold anything else.",),
    "The supervisor; the person who orders chemicals, if it lasts.",
)
_DOSE_LOW = Guidance(
    (
        "Catch the feed in the calibration column for a timed minute, at the running pressure.",
        "Look at suction, strainer, air lock, injector and stroke; is the tank at its outlet?",
        "Was something poured in and not booked?",
        "Do other doses on the same meter move too? Then look at the meter.",
    ),
    ("Release the pressure before a pump head or a line is opened.",),
    "The supervisor.",
)
_ANSWER = Guidance(
    (
        "Test the reading again with fresh reagents.",
        "Take a strength test of what is in the tank, and read the certificate of the last lot.",
        "What has changed in the raw water: ammonia, organics, iron, temperature?",
    ),
    _OXIDANT_CAUTION,
    "The supervisor.",
)
_BY_KIND: dict[str, Guidance] = {
    "missing": Guidance(
        (
            "Take the reading now, at its own time; don’t write it in for the time it was due.",
            "If it can’t be taken, enter “not taken” and say why.",
        ),
        (),
        "Whoever has the next shift; a missed legal sample goes to the authority.",
    ),
    "stuck": Guidance(
        (
            "Move the sensor or take a hand reading beside it.",
            "Has the signal been lost and the last value held? Look at power, cable, level of the cell.",
        ),
        (),
        "The supervisor, and whoever looks after the instruments.",
    ),
    "stock_loss": Guidance(
        (
            "Dip again by hand, and read the clock.",
            "Look for a delivery or a transfer that was not booked, or was booked to another tank.",
            "Walk the line from the tank to the feeder: leaks, drains, a valve left open.",
        ),
        ("If chemical has escaped: keep away, protect yourself, keep it from drains and from anything it must not meet.",),
        "The supervisor; a spill may have to be reported at once.",
    ),
    "days_of_supply": Guidance(
        ("Is a load on its way? Ask the supplier for the day.", "Does a whole load fit when it arrives?"),
        (),
        "Whoever orders.",
    ),
    "holding": Guidance(
        ("Add up all vessels and containers of it, here and in the store.",),
        (),
        "The manager: reporting duties begin with the quantity, not with the incident.",
    ),
    "lot_age": Guidance(
        ("Take a strength test.", "Use the oldest first; plan smaller or more frequent loads."), _OXIDANT_CAUTION
    ),
    "strength_low": Guidance(
        ("Repeat the strength test with a fresh sample.", "Compare with the certificate and the age of the lot."),
        (
            *_OXIDANT_CAUTION,
            "Peroxide that loses strength fast, or warms up, may be contaminated: stand back and call the supplier.",
        ),
        "The supervisor; the supplier, where the lot came weak.",
    ),
    "certified_maximum": Guidance(
        (
            "Check mass and volume of the days behind it.",
            "Lower the dose, or get approval in writing: the product is certified up to this dose.",
        ),
        (),
        "The supervisor and the manager.",
    ),
    "inactivation_ratio": Guidance(
        (
            "Check residual, pH and temperature at the end of contact, and the peak flow.",
            "Raise the residual or lower the flow, as the procedure allows.",
        ),
        _OXIDANT_CAUTION,
        "The supervisor at once; the authority within the time stated with the limit.",
    ),
    "suspicious_reading": Guidance(
        (
            "Look at the form and the instrument: decimal point, unit, two fields swapped, wrong tank.",
            "Correct it with a reason, or settle it: it stands, or it is set aside.",
        ),
    ),
}
_USUAL = Guidance(
    ("Repeat the reading.", "Look at what changed just before: settings, deliveries, flow, raw water."),
    (),
    "The supervisor.",
)


def guidance(kind: str, parameter: str, direction: str) -> Guidance:
    """For a kind of limit, a parameter and a direction (``low``, ``high`` or empty)."""
    if kind in ("drift", "dose_vs_design", "dose_vs_need"):
        if parameter:
            return _ANSWER
        return _DOSE_LOW if direction == "low" else _DOSE_HIGH
    if kind in _BY_KIND:
        return _BY_KIND[kind]
    if parameter in _RESIDUALS:
        return _RESIDUAL_HIGH if direction == "high" else _RESIDUAL_LOW
    return _BY_PARAMETER.get((parameter, direction), _USUAL)


def direction(kind: str, value: str, limit: str) -> str:
    """Which way it is off, from what is written of it."""
    if kind in ("held_below",) or limit.startswith("≥"):
        return "low"
    if kind in ("held_above", "share_of_month") or limit.startswith("≤"):
        return "high"
    if "(-" in value or value.startswith("-"):
        return "low"
    return "high" if "(+" in value or value.startswith("+") else ""
