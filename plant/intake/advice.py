"""What to do when a value lies outside a limit, and what to be careful of, in the words of the works' day.

Common practice, no source, except where noted; the works' own procedures, the supplier's safety data sheets and the
local regulator come first, and every sentence here gives way to them. A limit may state its own words in ``do``.
"""

from __future__ import annotations

REPEAT = "Take the sample again and read it again. "

_LOW: dict[str, str] = {
    "free_chlorine": (
        "Look whether the feeder runs, has prime, and its tank is not empty. Put it right, read again within the hour, "
        "and tell the person named below."
    ),
    "total_chlorine": "Look at the feeder and its tank, put it right, and read again within the hour.",
    "pH": "Look at the alkali feeder and the calibration of the pH meter. Raise the dose only by the works' own procedure.",
    "fluoride": "Look at the fluoride feeder and its scale. Do not make up for the lost hours.",
    "hydrogen_peroxide": "Look at the feeder and its container, and whether the raw water has changed.",
    "level": "Do not let the pump run dry. Look when the next delivery is due, and change over if there is a second tank.",
    "weight": "Look when the next container is due, and change over before it runs empty.",
}
_HIGH: dict[str, str] = {
    "free_chlorine": "Reduce or stop the dose by the works' own procedure. Look for a feeder set too high or a siphoning line.",
    "total_chlorine": "Reduce or stop the dose by the works' own procedure, and look for a feeder set too high.",
    "pH": "Look whether an alkali feeder is set too high or siphons. Stop it if it can't be held.",
    "fluoride": "Stop the fluoride feeder and close its valve. Read again before it is started.",
    "turbidity": "Look at the filter, its flow and the coagulant dose. Take the filter out if the works' procedure says so.",
    "hydrogen_peroxide": "Reduce or stop the dose, and look at the quenching that follows it.",
    "iron": "Look at the oxidant dose and the filters.",
    "manganese": "Look at the oxidant dose, the pH and the filters.",
    "total_coliform": "Read the residual there at once. Repeat samples are taken by the works' own plan.",
    "e_coli": "This is urgent: the person named below is told at once. Repeat samples are taken by the works' own plan.",
    "level": "Stop filling and close the fill valve. Look at the overflow and the bund.",
}
_OTHER = "Look at the feeder, the sample line and the instrument, and do what the works' procedure says."

CAUTIONS: dict[str, str] = {
    "free_chlorine": (
        "Hypochlorite burns skin and eyes: goggles and gloves. Never bring it together with acid or another chemical: "
        "chlorine gas. If you smell chlorine, leave and call."
    ),
    "hydrogen_peroxide": (
        "Peroxide burns, and builds pressure when it is dirty or closed in: goggles, gloves, no closed pipe or bottle, "
        "nothing that burns or rusts near it."
    ),
    "pH": "Caustic and acid burn at once and deeply: face shield, gloves, water ready. Never acid and hypochlorite together.",
    "hardness": "Lime and caustic burn eyes and skin, quicklime heats with water: goggles, gloves, dust mask.",
    "fluoride": "Fluoride products are poisonous: no dust in the air, gloves and mask, wash before you eat.",
    "ozone": "Ozone harms the lungs: if you smell it, leave the room and call. Do not enter on the alarm.",
    "chlorine_dioxide": "Chlorine dioxide gas is poisonous and can explode: if you smell it, leave and call.",
}
_CAUTION_OF = {
    "total_chlorine": "free_chlorine",
    "combined_chlorine": "free_chlorine",
    "alkalinity": "pH",
    "p_alkalinity": "pH",
}


def what_to_do(parameter: str, side: str, level: str) -> str:
    """The next step for a value below (``low``) or above (``high``) a limit of a level."""
    words = (_LOW if side == "low" else _HIGH).get(parameter, _OTHER)
    return words if level in ("action", "regulatory") and parameter == "e_coli" else REPEAT + words


def caution(parameter: str) -> str:
    """What to be careful of while doing it; "" where nothing is handled."""
    return CAUTIONS.get(_CAUTION_OF.get(parameter, parameter), "")


DELIVERY: tuple[str, ...] = (
    "Read the papers and the labels of the load, and the label at the fill point: they name the same product.",
    "The fill point is the right one; the caps of all other fill points are locked.",
    "Never acid and hypochlorite, or any two products, in one hose, tank or bund.",
    "Face shield, gloves, apron, boots; shower and eye wash tried; nobody works alone.",
    "There is room for the whole load. Somebody watches the level all the time and can stop the pump.",
    "The driver and the person in charge of the works decide together; the supplier's safety data sheet holds.",
)
ALREADY_UNLOADED: tuple[str, ...] = (
    "Stop the transfer. Close the valves of the fill line and of the tank.",
    "Isolate the feed from this tank: nothing of it goes to the water.",
    "If there is heat, gas or a smell: leave, upwind, and keep others away.",
    "Call the emergency number of the works, the supplier, and the person in charge.",
)
