"""Fluoride: content of the additives, dose over the natural level, saturator. Floats or arrays.

Natural fluoride counts: target - natural, always from today's reading, never from a constant that hides an
old target. Fluorosilicic acid burns, etches glass and needs a room of its own; an overfeed is an emergency,
tell the regulator.
"""

from typing import Any

from chemistry import constants, errors

Values = Any  # a float or a numpy array
# mg F per mg of pure additive, from molar masses: 0.7911, 0.4525, 0.6061. AWWA-M4 prints 0.792, 0.452 and
# 0.607.
AVAILABLE_FLUORIDE: dict[str, float] = {
    name: atoms * constants.molar_mass("F") / constants.molar_mass(name)
    for name, atoms in (("H2SiF6", 6), ("NaF", 1), ("Na2SiF6", 6))
}
PUBLISHED_FLUORIDE_CONTENT: dict[str, float] = {"H2SiF6": 0.792, "NaF": 0.4525, "Na2SiF6": 0.607}  # VRWA, MADPH-2015
SATURATED_NAF_MG_L_F = 18000.0  # 4 % NaF; ABC-TABLES and MADPH-2015, opened
_HIGHEST_MG_L = 10.0
_SOURCE = "fluoride arithmetic"


def fluoride_to_add_mg_l(target_mg_l: Values, natural_mg_l: Values) -> Values:
    """Fluoride to add in mg/L: target - natural, 0 where nature gives enough; both 0 to 10 mg/L."""
    errors.require("target fluoride", target_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    errors.require("natural fluoride", natural_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    gap = target_mg_l - natural_mg_l
    return gap * (gap > 0)


def additive_mg_l(fluoride_mg_l: Values, additive: str, purity: Values = 1.0, content: float | None = None) -> Values:
    """Additive in mg/L that carries so much fluoride: F / (content x purity).

    ``content`` (mg F per mg pure additive) defaults to molar masses; give 0.792, 0.4525 or 0.607 to follow
    a printed form.
    """
    if additive not in AVAILABLE_FLUORIDE:
        raise errors.ChemistryError(f"no fluoride additive {additive!r}; known: {', '.join(AVAILABLE_FLUORIDE)}")
    errors.require("purity", purity, "kg/kg", 1e-6, 1.0, _SOURCE)
    errors.require("fluoride", fluoride_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    return fluoride_mg_l / ((AVAILABLE_FLUORIDE[additive] if content is None else content) * purity)


def fluoride_added_mg_l(additive_mg_l: Values, additive: str, purity: Values = 1.0) -> Values:
    """Fluoride in mg/L that a dose of additive gives; the inverse of :func:`additive_mg_l`."""
    if additive not in AVAILABLE_FLUORIDE:
        raise errors.ChemistryError(f"no fluoride additive {additive!r}; known: {', '.join(AVAILABLE_FLUORIDE)}")
    errors.require("purity", purity, "kg/kg", 1e-6, 1.0, _SOURCE)
    return additive_mg_l * AVAILABLE_FLUORIDE[additive] * purity


def saturator_l_per_ml(fluoride_mg_l: Values, saturated_mg_l_f: float = SATURATED_NAF_MG_L_F) -> Values:
    """Litres of saturated NaF solution per ML of water (the same number as US gal per US Mgal): 1e6 F / 18,000."""
    errors.require("fluoride", fluoride_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    return 1e6 * fluoride_mg_l / saturated_mg_l_f
