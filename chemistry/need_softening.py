"""The need models that ask the softening and carbonate chemistry: lime_soda and target_ph."""

from typing import Any

from chemistry import carbonate, constants, errors, need_parts, softening
from chemistry.carbonate import chemicals
from chemistry.need_parts import Product, Readings, Settings, Step, Working

_CA_TO_CACO3 = constants.CACO3_G_MOL / constants.molar_mass("Ca")  # 2.497
_MG_TO_CACO3 = constants.CACO3_G_MOL / constants.molar_mass("Mg")  # 4.118
_COLDEST_C = 0.0
_SUPERCOOLED_C = -2.0
_HARDNESS_GAP = 0.10  # common practice: above this, one of the analyses is doubtful
_PART_FORMULA = {"lime": "Ca(OH)2", "soda_ash": "Na2CO3", "caustic": "NaOH"}


def lime_soda(settings: Settings, readings: Readings, product: Product) -> Working:
    """One chemical of lime-soda (or caustic) softening to a target hardness; see `softening.lime_soda_dose`."""
    part = settings.get("part", "lime")
    if part not in _PART_FORMULA:
        raise errors.ChemistryError(f"part must be lime, soda_ash or caustic, not {part!r}")
    lacking = [name for name in ("alkalinity", "pH", "temperature") if not need_parts.has(readings, name)]
    if "pH" in lacking and need_parts.has(readings, "carbon_dioxide"):
        lacking = [name for name in lacking if name == "alkalinity"]
    calcium, magnesium, hardness_uses, steps = _hardness(readings, lacking)
    alkalinity = need_parts.reading(readings, "alkalinity")
    co2, co2_uses = _carbon_dioxide(readings, alkalinity, steps)
    excess = settings.get("excess_mg_per_L_CaCO3")
    target = need_parts.setting(settings, "target_hardness_mg_per_L_CaCO3")
    remove_magnesium = bool(settings.get("remove_magnesium", False))
    cautions = ["stoichiometric: pH of the softened water and a jar test decide"]
    if not remove_magnesium and target < magnesium:
        cautions.append("without removing magnesium the target can't be reached: the dose takes all the calcium")
        steps.append(Step("softest without magnesium removal", "Mg", magnesium, "mg/L as CaCO3", "definition"))
        target = magnesium
    water: dict[str, Any] = {
        "calcium_hardness_mg_l_caco3": calcium,
        "magnesium_hardness_mg_l_caco3": magnesium,
        "alkalinity_mg_l_caco3": alkalinity,
        "co2_mg_l": co2,
        "target_hardness_mg_l_caco3": target,
        "remove_magnesium": remove_magnesium,
        "excess_mg_l_caco3": None if excess is None else need_parts.setting(settings, "excess_mg_per_L_CaCO3"),
    }
    result: softening.CausticDose | softening.LimeSodaDose
    if part == "caustic":
        result = caustic = softening.caustic_dose(**water)
        dose = float(caustic.caustic_naoh_mg_l)
    else:
        result = lime = softening.lime_soda_dose(**water)
        dose = float(lime.lime_ca_oh_2_mg_l if part == "lime" else lime.soda_na2co3_mg_l)
    steps += _softening_steps(result, part, dose)
    if result.below_practical_floor:
        cautions.append("softer than cold softening reaches in practice (about 35 calcium, 10 magnesium)")
    uses = tuple(dict.fromkeys((*hardness_uses, "alkalinity", *co2_uses)))
    return Working(dose, _PART_FORMULA[part], uses, steps, cautions)


def target_ph(settings: Settings, readings: Readings, product: Product) -> Working:
    """Dose of the product's chemical that brings the water to a pH, by carbonate equilibrium, closed to air.

    0 where the water is already there or beyond on the side the chemical pushes to.
    """
    target = need_parts.setting(settings, "target_ph")
    chemical = product["chemical"]
    effect = chemicals.effect(chemical)
    need_parts.require_readings(readings, "pH", "alkalinity", "temperature")
    ph = need_parts.reading(readings, "pH")
    uses = ["pH", "alkalinity", "temperature"]
    steps: list[Step] = []
    ions = {}
    for name in ("calcium", "magnesium", "sodium", "potassium", "chloride", "sulfate"):
        value, used = _ion_mg_l(readings, name)
        if value is not None and used is not None:
            ions[f"{name}_mg_l"] = value
            uses.append(used)
    water = carbonate.Water(
        temperature_c=_liquid_c(need_parts.reading(readings, "temperature"), steps),
        ph=ph,
        alkalinity_mg_l_caco3=need_parts.reading(readings, "alkalinity"),
        **ions,
    )
    raises = effect.alkalinity > 0
    if (ph >= target) if raises else (ph <= target):
        dose = 0.0
        words = f"the water is at pH {ph:g} already: {chemical} only {'raises' if raises else 'lowers'} it"
    else:
        dose = float(carbonate.dose_for_target_ph(water, chemical, target))
        words = f"{chemical} to pH {target:g} by carbonate equilibrium, closed to air"
    formula = "Cl2" if chemical in ("NaOCl", "Cl2") else chemical
    steps.append(Step(words, "Alk(pH, DIC) = Alk + n dose", dose, f"mg/L {formula}", "PLUMMER-BUSENBERG-1982"))
    cautions = ["closed to air; aeration, biology and precipitation move the pH: confirm with a jar test"]
    return Working(dose, formula, tuple(uses), steps, cautions)


def _hardness(readings: Readings, lacking: list[str]) -> tuple[float, float, tuple[str, ...], list[Step]]:
    """Calcium and magnesium hardness (mg/L as CaCO3) from whichever two of calcium, magnesium and total are there."""
    calcium, calcium_name = _as_caco3(readings, "calcium", _CA_TO_CACO3)
    magnesium, magnesium_name = _as_caco3(readings, "magnesium", _MG_TO_CACO3)
    total = float(readings["hardness"]) if need_parts.has(readings, "hardness") else None
    known = sum(value is not None for value in (calcium, magnesium, total))
    if known < 2 or lacking:
        if known < 2:
            names = {"calcium": calcium, "magnesium": magnesium}
            lacking = [*lacking, *(name for name, value in names.items() if value is None)]
        raise need_parts.MissingReading(*lacking)
    uses = [name for name in (calcium_name, magnesium_name) if name]
    if calcium is None and total is not None and magnesium is not None:
        calcium, uses = total - magnesium, ["hardness", *uses]
    if magnesium is None and total is not None and calcium is not None:
        magnesium, uses = total - calcium, ["hardness", *uses]
    if calcium is None or magnesium is None or min(calcium, magnesium) < 0:
        raise errors.ChemistryError("hardness is below its calcium or magnesium part: one reading is wrong")
    steps = [
        Step("calcium hardness", "2.497 Ca, or total - Mg", calcium, "mg/L as CaCO3", "SM-2340"),
        Step("magnesium hardness", "4.118 Mg, or total - Ca", magnesium, "mg/L as CaCO3", "SM-2340"),
    ]
    if total and len(uses) == 2 and "hardness" not in uses:
        gap = calcium + magnesium - total
        if abs(gap) > _HARDNESS_GAP * total:
            words = "calcium + magnesium differ from the hardness read by more than 10 %"
            steps.append(Step(words, "Ca + Mg - TH", gap, "mg/L as CaCO3", "common-practice"))
    return calcium, magnesium, tuple(uses), steps


def _carbon_dioxide(readings: Readings, alkalinity: float, steps: list[Step]) -> tuple[float, tuple[str, ...]]:
    uses: tuple[str, ...] = ("pH", "temperature")
    if need_parts.has(readings, "pH"):
        temperature = _liquid_c(need_parts.reading(readings, "temperature"), steps)
        co2 = float(carbonate.co2_mg_l(temperature, need_parts.reading(readings, "pH"), alkalinity))
        words, source = "carbon dioxide from pH and alkalinity", "PLUMMER-BUSENBERG-1982"
    else:
        co2 = need_parts.reading(readings, "carbon_dioxide")
        words, source, uses = "carbon dioxide as read", "definition", ("carbon_dioxide",)
    steps.append(Step(words, "CO2(pH, Alk, T)", co2, "mg/L CO2", source))
    return co2, uses


def _softening_steps(result: softening.CausticDose | softening.LimeSodaDose, part: str, dose: float) -> list[Step]:
    removal = result.removal
    excess = result.excess_meq_l * constants.CACO3_MG_MEQ
    rows = [
        ("calcium carbonate hardness removed", "CaCH", removal.calcium_carbonate),
        ("magnesium carbonate hardness removed", "MgCH", removal.magnesium_carbonate),
        ("calcium non-carbonate hardness removed", "CaNCH", removal.calcium_non_carbonate),
        ("magnesium non-carbonate hardness removed", "MgNCH", removal.magnesium_non_carbonate),
        ("excess for magnesium", "E", excess),
    ]
    formulas = {
        "lime": "2 CO2 + CaCH + 2 MgCH + MgNCH + E (meq/L) × 37.05",
        "soda_ash": "CaNCH + MgNCH (meq/L) × 52.99",
        "caustic": "2 CO2 + CaCH + 2 MgCH + MgNCH + E (meq/L) × 40.00",
    }
    steps = [Step(words, formula, float(value), "mg/L as CaCO3", "WTPD-11") for words, formula, value in rows]
    formula = _PART_FORMULA[part]
    return [*steps, Step(f"{formula} by stoichiometry", formulas[part], dose, f"mg/L {formula}", "WTPD-11")]


def _as_caco3(readings: Readings, ion: str, factor: float) -> tuple[float | None, str | None]:
    if need_parts.has(readings, f"{ion}_hardness"):
        return float(readings[f"{ion}_hardness"]), f"{ion}_hardness"
    if need_parts.has(readings, ion):
        return float(readings[ion]) * factor, ion
    return None, None


def _ion_mg_l(readings: Readings, ion: str) -> tuple[float | None, str | None]:
    if need_parts.has(readings, ion):
        return float(readings[ion]), ion
    factor = {"calcium": _CA_TO_CACO3, "magnesium": _MG_TO_CACO3}.get(ion)
    if factor and need_parts.has(readings, f"{ion}_hardness"):
        return float(readings[f"{ion}_hardness"]) / factor, f"{ion}_hardness"
    return None, None


def _liquid_c(temperature_c: float, steps: list[Step]) -> float:
    """Raw water under ice reads down to about -2 °C; the equilibrium starts at 0, which stands for it."""
    if _SUPERCOOLED_C <= temperature_c < _COLDEST_C:
        steps.append(Step("temperature below 0 °C taken as 0", "T = 0", _COLDEST_C, "°C", "common-practice"))
        return _COLDEST_C
    return temperature_c
