"""The need models: what a water, by its readings, needs of a product.

``need`` answers with a Need; ``needed_parameters`` tells which readings to fetch; ``model_keys`` and
``check_settings`` validate what a works states. The models: none, oxidant_demand, lime_soda,
ion_exchange_salt, target_ph, quench, oxidise, sequestrant, curve, fluoride. Readings are in canonical units
(`chemistry.units`), doses in the product's dose basis.
"""

from collections.abc import Mapping
from typing import Any, NamedTuple

from chemistry import errors, need_models, need_softening
from chemistry.need_parts import MissingReading, Model, Need, Step, solve

__all__ = [
    "MODELS",
    "MissingReading",
    "Need",
    "Step",
    "check_settings",
    "model_keys",
    "need",
    "needed_parameters",
]

MODELS: dict[str, Model] = {
    "oxidant_demand": need_models.oxidant_demand,
    "lime_soda": need_softening.lime_soda,
    "ion_exchange_salt": need_models.ion_exchange_salt,
    "target_ph": need_softening.target_ph,
    "quench": need_models.quench,
    "oxidise": need_models.oxidise,
    "sequestrant": need_models.sequestrant,
    "curve": need_models.curve,
    "fluoride": need_models.fluoride,
}
NO_MODEL = "none"


class Keys(NamedTuple):
    """Setting keys of a model: those it can't do without and all it understands."""

    required: frozenset[str]
    allowed: frozenset[str]


_EVERY_MODEL = ("model", "max_age_hours")
_REQUIRED: dict[str, tuple[str, ...]] = {
    "none": (),
    "oxidant_demand": ("target_residual_mg_per_L",),
    "lime_soda": ("target_hardness_mg_per_L_CaCO3", "part"),
    "ion_exchange_salt": (
        "resin_m3",
        "capacity_kg_CaCO3_per_m3",
        "salt_kg_per_m3",
        "target_hardness_mg_per_L_CaCO3",
    ),
    "target_ph": ("target_ph",),
    "quench": ("of",),
    "oxidise": (),
    "sequestrant": (),
    "curve": ("parameter", "points"),
    "fluoride": ("target_mg_per_L",),
}
_OPTIONAL: dict[str, tuple[str, ...]] = {
    "oxidant_demand": ("demand_mg_per_L", "demand_from"),
    "lime_soda": ("remove_magnesium", "excess_mg_per_L_CaCO3"),
    "quench": ("target_mg_per_L",),
    "oxidise": ("iron", "manganese", "sulfide", "sulfide_to"),
    "sequestrant": ("mg_per_mg_iron", "mg_per_mg_manganese", "base_mg_per_L"),
}
_CHOICES: dict[tuple[str, str], tuple[str, ...]] = {
    ("oxidant_demand", "demand_from"): ("last_7_days",),
    ("lime_soda", "part"): ("lime", "soda_ash", "caustic"),
    ("quench", "of"): ("chlorine", "peroxide"),
    ("oxidise", "sulfide_to"): ("sulfur", "sulfate"),
}
_FLAGS = ("remove_magnesium",)
_FLAG_OR_NUMBER = ("iron", "manganese", "sulfide")
_TEXTS = ("model", "parameter")


def need(
    model: str,
    settings: Mapping[str, Any],
    readings: Mapping[str, float],
    *,
    product: Mapping[str, Any],
    sds: Mapping[str, float] | None = None,
) -> Need:
    """The dose a water needs of a product, with its uncertainty, readings used and working, or the reason why not.

    ``readings``: canonical values by parameter (for ``demand_from = "last_7_days"`` also
    ``demand_mg_per_L``). ``product``: chemical, strength, strength_basis, density_kg_per_L, strength_as,
    dose_basis, strength_sd_pct as stated by the works. ``sds``: standard uncertainties of readings where
    known, else the usual ones of need_parts.READING_SD. Never raises for water or settings that have no
    answer: the Need says why. ChemistryError for an unknown model.
    """
    if model == NO_MODEL:
        return Need(None, None, reason="no need model is stated for this dosing point")
    if model not in MODELS:
        raise errors.ChemistryError(f"unknown need model {model!r}; known: {', '.join((NO_MODEL, *MODELS))}")
    return solve(MODELS[model], settings, readings, product, sds)


def needed_parameters(model: str, settings: Mapping[str, Any]) -> tuple[str, ...]:
    """Every reading a model can use, required ones first.

    ``demand_mg_per_L`` is no reading of the water: the caller works it out over seven days
    (`need_models.DEMAND`).
    """
    if model == "oxidant_demand":
        return (need_models.DEMAND,) if settings.get("demand_from") else ()
    if model == "lime_soda":
        return (
            *("alkalinity", "pH", "temperature", "calcium", "magnesium", "hardness"),
            *("calcium_hardness", "magnesium_hardness", "carbon_dioxide"),
        )
    if model == "target_ph":
        ions = ("calcium", "magnesium", "sodium", "potassium", "chloride", "sulfate")
        return ("pH", "alkalinity", "temperature", *ions, "calcium_hardness", "magnesium_hardness")
    if model == "ion_exchange_salt":
        return ("hardness",)
    if model == "quench":
        return ("hydrogen_peroxide",) if settings.get("of") == "peroxide" else ("free_chlorine", "total_chlorine")
    if model == "oxidise":
        stated = tuple(key for key in _FLAG_OR_NUMBER if key in settings)
        return tuple(key for key in stated or _FLAG_OR_NUMBER if settings.get(key) is not False)
    if model == "sequestrant":
        return ("iron", "manganese")
    if model == "curve":
        return (str(settings.get("parameter")),)
    if model == "fluoride":
        return ("fluoride",)
    return ()


def model_keys(model: str) -> Keys:
    """Required and allowed setting keys of a model; ChemistryError for an unknown one."""
    if model not in _REQUIRED:
        raise errors.ChemistryError(f"unknown need model {model!r}; known: {', '.join(_REQUIRED)}")
    required = frozenset(_REQUIRED[model])
    return Keys(required, required | frozenset(_OPTIONAL.get(model, ())) | frozenset(_EVERY_MODEL))


def check_settings(model: str, settings: Mapping[str, Any]) -> tuple[str, ...]:
    """What is wrong with a model's stated settings, in words, one entry a fault; empty when nothing."""
    try:
        keys = model_keys(model)
    except errors.ChemistryError as unknown:
        return (str(unknown),)
    faults = [f"{key} is missing" for key in sorted(keys.required - settings.keys())]
    known = ", ".join(sorted(keys.allowed))
    faults += [f"unknown key {key}; {model} knows {known}" for key in sorted(settings.keys() - keys.allowed)]
    found = (_fault(model, key, settings[key]) for key in sorted(settings.keys() & keys.allowed))
    faults += [fault for fault in found if fault]
    if model == "oxidant_demand" and ("demand_mg_per_L" in settings) == ("demand_from" in settings):
        faults.append("either demand_mg_per_L or demand_from is needed, not both")
    return tuple(faults)


def _fault(model: str, key: str, value: object) -> str:
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if (model, key) in _CHOICES:
        choices = _CHOICES[model, key]
        return "" if value in choices else f"{key} must be {' or '.join(choices)}, not {value!r}"
    if key == "points":
        try:
            need_models.curve_points(value)
        except errors.ChemistryError as fault:
            return str(fault)
        return ""
    if key in _TEXTS:
        return "" if isinstance(value, str) and value else f"{key} must be a word, not {value!r}"
    if key in _FLAGS or (key in _FLAG_OR_NUMBER and isinstance(value, bool)):
        return "" if isinstance(value, bool) else f"{key} must be true or false, not {value!r}"
    if not number or not 0 <= float(str(value)) < float("inf"):
        return f"{key} must be a number of 0 or more, not {value!r}"
    if key == "target_ph" and not 3 <= float(str(value)) <= 13:
        return f"target_ph must lie between 3 and 13, not {value!r}"
    return ""
