"""Heath End Water Works: a small works of three chemicals for tests and trials. All invented."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from plant.demo import effects
from plant.demo.kestrel import KESTREL
from plant.demo.plan import Block, Feed, Incident, Line, Plan, Season

_HYPO, _CAUSTIC, _PEROXIDE = (
    next(feed for feed in KESTREL.feeds if feed.code == code) for code in ("HYPO-POST", "NAOH-PH", "PEROX-PRE")
)

_STANDING: Block = {
    "code": "HYPO-BULK", "name": "Hypochlorite tank", "product": "HYPO", "role": "bulk", "shape": "vertical_cylinder",
    "level_sd_m": 0.003, "heel_L": 60, "max_fill_pct": 92,
}  # fmt: skip


def _small(feed: Feed, tank: Block, load_kg: float, **changes: object) -> Feed:
    return replace(
        feed,
        tank=tank if "code" in tank else feed.tank | tank,
        load_kg=load_kg,
        product=feed.product | {"load_kg": load_kg},
        point=feed.point | {"meter": "FT-TREATED"},
        **changes,  # type: ignore[arg-type]
    )


HEATH = replace(
    KESTREL,
    code="HEW",
    name="Heath End Water Works",
    waters=replace(KESTREL.waters, flow_ml_d=Season(3.0, 0.5, 0.1, 1.0), filtered_ph=Season(7.35, 0.03, 0.02, 7.0)),
    raw_meter=None,
    target_hardness_mg_l=None,
    target_ph=7.9,
    coagulant_curve=(),
    feeds=(
        _small(_HYPO, _STANDING | {"diameter_m": 1.0, "height_m": 1.8}, 800, day_tank=None),
        replace(
            _small(_CAUSTIC, {"diameter_m": 1.3, "height_m": 2.6}, 2400),
            point=_CAUSTIC.point | {"need": {"model": "target_ph", "target_ph": 7.9}},
        ),
        _small(
            _PEROXIDE,
            {
                "code": "PEROX-TANK",
                "name": "Peroxide tank on a scale",
                "product": "PEROX",
                "role": "bulk",
                "shape": "scale",
                "capacity_kg": 1250,
                "tare_kg": 62.0,
                "weight_sd_kg": 0.5,
                "heel_kg": 20,
                "max_fill_pct": 95,
            },
            700,
        ),
    ),
    lines=(
        Line("RAW", "temperature", "°C", 1, 0.1),
        Line("RAW", "pH", "pH", 2, 0.02),
        Line("RAW", "alkalinity", "mg/L as CaCO3", 0, 1.5),
        Line("RAW", "hardness", "mg/L as CaCO3", 0, 2.0),
        Line("FILTERED", "temperature", "°C", 1, 0.1),
        Line("FILTERED", "pH", "pH", 2, 0.02),
        Line("FILTERED", "alkalinity", "mg/L as CaCO3", 0, 1.5),
        Line("FILTERED", "turbidity", "NTU", 2, 0.01, 0.03),
        Line("SETTLED", "hydrogen_peroxide", "mg/L", 2, 0.02, below=0.05),
        Line("HYPO-BULK", "level", "m", 3),
        Line("NAOH-BULK", "level", "m", 3),
        Line("PEROX-TANK", "weight", "kg", 1),
        Line("ENTRY", "free_chlorine", "mg/L", 2, 0.015),
        Line("ENTRY", "pH", "pH", 2, 0.02),
        Line("ENTRY", "turbidity", "NTU", 2, 0.008, 0.03),
        Line("FT-TREATED", "totaliser", "m3", 0),
        Line("NETWORK", "free_chlorine", "mg/L", 2, 0.02, due="day", below=0.05),
    ),
    blocks={
        "sample_point": KESTREL.blocks["sample_point"],
        "meter": [block for block in KESTREL.blocks["meter"] if block["code"] == "FT-TREATED"],
        "limit": [
            block
            for block in KESTREL.blocks["limit"]
            if block.get("sample_point") in ("ENTRY", "FILTERED") and block["parameter"] in ("free_chlorine", "turbidity")
        ],
    },
)  # fmt: skip

PLANS: dict[str, Plan] = {plan.code: plan for plan in (KESTREL, HEATH)}


def drawn_incidents(plan: Plan, *, seed: int, days: int, every_days: float = 17.0) -> list[Incident]:
    """Incidents at random, one every so many days after a quiet month, never two on the same thing within a month."""
    rng = np.random.default_rng([seed, 31337])
    out: list[Incident] = []
    busy: dict[str, float] = {}
    day = 30.0
    while day < days - 12:
        incident = _one(plan, rng, float(np.floor(day) + rng.choice([0.1, 0.3, 0.55])))
        if incident is not None and busy.get(incident.subject, -99.0) < incident.start - 30:
            busy[incident.subject] = incident.end
            out.append(incident)
        day += rng.uniform(0.6, 1.4) * every_days
    return out


def _one(plan: Plan, rng: np.random.Generator, start: float) -> Incident | None:
    what = str(rng.choice(["feeder_drift", "weak_lot", "leak", "stuck", "wrong_reading", "missing_round",
                           "unbooked_delivery", "raw_water_change", "feeder_stop", "meter_error"]))  # fmt: skip
    feed = plan.feeds[int(rng.integers(len(plan.feeds)))]
    tank = str(feed.tank["code"])
    lasts = float(rng.integers(5, 15))
    sign = float(rng.choice([-1, 1]))
    sized: dict[str, tuple[str, str, float, float]] = {
        "feeder_drift": ("feeder_drift", feed.code, lasts + 6, sign * float(rng.uniform(0.01, 0.02))),
        "weak_lot": ("weak_product", tank, 40, float(rng.uniform(0.78, 0.88))),
        "leak": ("leak", tank, lasts, float(rng.uniform(0.25, 0.5)) * _use_kg_h(plan, feed)),
        "stuck": ("stuck_sensor", f"{tank}:{_gauge(feed)}", float(rng.integers(3, 6)), 0.0),
        "wrong_reading": ("wrong_reading", "RAW:pH", 1.0, 100.0),
        "missing_round": ("missing_readings", "", 0.3, 0.0),
        "unbooked_delivery": ("unbooked_delivery", tank, 60.0, 0.0),
        "raw_water_change": ("raw_water_change", "RAW", lasts, float(rng.uniform(12, 18))),
        "feeder_stop": ("unknown", feed.code, 0.3, 0.7),
        "meter_error": ("meter_error", plan.treated_meter, lasts, 1 + sign * float(rng.uniform(0.08, 0.15))),
    }
    cause, subject, length, size = sized[what]
    if feed.refill == "change" and what in ("weak_lot", "unbooked_delivery"):
        return None
    if what == "feeder_stop" and feed.wants != "chlorine":
        return None
    if what == "raw_water_change" and plan.target_hardness_mg_l is None:
        return None
    if what == "missing_round":
        # From the afternoon into the night, so that the evening's round falls into it.
        start = float(np.floor(start)) + 0.45
    return Incident(what, cause, subject, start, start + length, size, effects.KINDS[what])


def _gauge(feed: Feed) -> str:
    return "weight" if feed.tank["shape"] == "scale" else "level"


def _use_kg_h(plan: Plan, feed: Feed) -> float:
    """About what the feed uses in an hour, kg."""
    usual_mg_l = {"chlorine": 1.0, "caustic": 5.0, "peroxide": 1.8, "coagulant": 2.4, "lime": 104.0, "sequestrant": 2.9}
    dose = usual_mg_l.get(feed.wants, 0.5)
    share = float(feed.product["strength"]) / 100
    if feed.product["strength_basis"] == "g_per_L_available_chlorine":
        share = float(feed.product["strength"]) / 1000 / float(feed.product["density_kg_per_L"])
    return dose * plan.waters.flow_ml_d.mean / 24 / (1.0 if feed.product["dose_basis"] == "product" else share)
