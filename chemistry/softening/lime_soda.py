"""Lime, lime-soda and caustic softening by stoichiometry.

Hardness, alkalinity and excess in mg/L as CaCO3; CO2 in mg/L; doses in mg/L of the pure compound. The result
is what the reactions consume: real dosing follows from a jar test and the finished water's pH, and lime and
caustic burn eyes and skin, so the local safety rules and a licensed operator decide.
"""

from dataclasses import dataclass

from chemistry import constants, elementwise, errors, hardness
from chemistry.constants import Values

# 1.25 meq/L: course notes and worked examples (key LIME-EXCESS). Another handbook takes 1.0 meq/L.
USUAL_EXCESS_MG_L_CACO3 = 62.5
# ASCE/AWWA, Water Treatment Plant Design, p. 11.11 (key WTPD-11): calcium 35, magnesium 10; course cards 30
# and 10.
PRACTICAL_CALCIUM_MG_L_CACO3 = 35.0
PRACTICAL_MAGNESIUM_MG_L_CACO3 = 10.0

_MEQ = hardness.CACO3_MG_MEQ
_CO2 = constants.molar_mass("CO2")
_CAOH2_MEQ = constants.molar_mass("Ca(OH)2") / 2.0
_CAO_MEQ = constants.molar_mass("CaO") / 2.0
_SODA_MEQ = constants.molar_mass("Na2CO3") / 2.0
_NAOH_MEQ = constants.molar_mass("NaOH")
_HIGHEST = 5000.0
_LIMIT = "limit of this model"


@dataclass(frozen=True, slots=True)
class Removal:
    """Hardness to be removed by what it is bound to, mg/L as CaCO3."""

    calcium_carbonate: Values
    magnesium_carbonate: Values
    calcium_non_carbonate: Values
    magnesium_non_carbonate: Values

    @property
    def total(self) -> Values:
        """All of it."""
        return self.calcium_carbonate + self.magnesium_carbonate + self.calcium_non_carbonate + self.magnesium_non_carbonate


@dataclass(frozen=True, slots=True)
class LimeSodaDose:
    """Doses of pure compounds in mg/L, and what they are made of.

    below_practical_floor: true where the water left would be softer than cold softening reaches in practice.
    """

    lime_ca_oh_2_mg_l: Values
    lime_cao_mg_l: Values
    soda_na2co3_mg_l: Values
    removal: Removal
    hardness_after_mg_l_caco3: Values
    co2_demand_meq_l: Values
    sodium_alkalinity_demand_meq_l: Values
    excess_meq_l: Values
    solids_mg_l: Values
    below_practical_floor: Values


@dataclass(frozen=True, slots=True)
class CausticDose:
    """Doses of pure compounds in mg/L for softening with sodium hydroxide; the rest as in LimeSodaDose.

    sodium_added_mg_l counts the sodium of both chemicals.
    """

    caustic_naoh_mg_l: Values
    soda_na2co3_mg_l: Values
    sodium_added_mg_l: Values
    removal: Removal
    hardness_after_mg_l_caco3: Values
    co2_demand_meq_l: Values
    sodium_alkalinity_demand_meq_l: Values
    excess_meq_l: Values
    solids_mg_l: Values
    below_practical_floor: Values


def lime_soda_dose(
    *,
    calcium_hardness_mg_l_caco3: Values,
    magnesium_hardness_mg_l_caco3: Values,
    alkalinity_mg_l_caco3: Values,
    co2_mg_l: Values,
    target_hardness_mg_l_caco3: Values = None,
    remove_magnesium: bool = False,
    excess_mg_l_caco3: Values = None,
    convert_sodium_alkalinity: bool = False,
) -> LimeSodaDose:
    """:class:`LimeSodaDose` for softening to a target total hardness (None: all that can react is removed).

    Calcium carbonate hardness goes first (lime), then calcium non-carbonate (soda); with ``remove_magnesium``
    magnesium carbonate goes after calcium carbonate (lime, twice), magnesium non-carbonate last (lime and
    soda). In meq/L: lime = 2 CO2 (mmol/L) + CaCH + 2 MgCH + MgNCH + excess; soda = CaNCH + MgNCH.

    excess_mg_l_caco3: lime beyond the reactions, 0 to 500; None means 62.5 where magnesium is removed, else
    0. It is dosed only where some magnesium is to be removed. convert_sodium_alkalinity: also bring
    alkalinity beyond the hardness to carbonate (needed for magnesium at pH 11). Other inputs 0 to 5,000,
    co2_mg_l 0 to 500. Outside raises OutOfRange. A target that can't be reached without magnesium removal
    raises ChemistryError; one above the hardness gives no dose. Source: stoichiometry as in ASCE/AWWA Water
    Treatment Plant Design ch. 11, eq. 11.10, 11.18 (key WTPD-11).
    """
    removal, common = _plan(
        calcium_hardness_mg_l_caco3, magnesium_hardness_mg_l_caco3, alkalinity_mg_l_caco3, co2_mg_l,
        target_hardness_mg_l_caco3, remove_magnesium, excess_mg_l_caco3, convert_sodium_alkalinity,
    )  # fmt: skip
    lime_meq = _alkali_meq(removal, common)
    soda_meq = (removal.calcium_non_carbonate + removal.magnesium_non_carbonate) / _MEQ
    return LimeSodaDose(
        lime_ca_oh_2_mg_l=lime_meq * _CAOH2_MEQ,
        lime_cao_mg_l=lime_meq * _CAO_MEQ,
        soda_na2co3_mg_l=soda_meq * _SODA_MEQ,
        removal=removal,
        solids_mg_l=solids_mg_l(removal, co2_removed_mg_l=common["co2_demand_meq_l"] / 2.0 * _CO2),
        **common,
    )


def caustic_dose(
    *,
    calcium_hardness_mg_l_caco3: Values,
    magnesium_hardness_mg_l_caco3: Values,
    alkalinity_mg_l_caco3: Values,
    co2_mg_l: Values,
    target_hardness_mg_l_caco3: Values = None,
    remove_magnesium: bool = False,
    excess_mg_l_caco3: Values = None,
    convert_sodium_alkalinity: bool = False,
) -> CausticDose:
    """:class:`CausticDose` for softening with sodium hydroxide; arguments as for :func:`lime_soda_dose`.

    In meq/L caustic equals the lime of that function. It adds no calcium: the carbonate it makes, 2 CO2 +
    CaCH + 2 MgCH (+ sodium alkalinity brought to carbonate), serves the calcium non-carbonate hardness before
    any soda is needed. Source: stoichiometry (key definition): Ca(HCO3)2 + 2 NaOH = CaCO3 + Na2CO3 + 2 H2O
    and its like.
    """
    removal, common = _plan(
        calcium_hardness_mg_l_caco3, magnesium_hardness_mg_l_caco3, alkalinity_mg_l_caco3, co2_mg_l,
        target_hardness_mg_l_caco3, remove_magnesium, excess_mg_l_caco3, convert_sodium_alkalinity,
    )  # fmt: skip
    caustic_meq = _alkali_meq(removal, common)
    made_meq = (
        common["co2_demand_meq_l"]
        + (removal.calcium_carbonate + 2.0 * removal.magnesium_carbonate) / _MEQ
        + 2.0 * common["sodium_alkalinity_demand_meq_l"]
    )
    soda_meq = elementwise.most(removal.calcium_non_carbonate / _MEQ - made_meq, 0.0)
    # With caustic one CaCO3 falls per calcium removed: no calcium comes with the dose, and none with the CO2.
    calcium = removal.calcium_carbonate + removal.calcium_non_carbonate
    magnesium = removal.magnesium_carbonate + removal.magnesium_non_carbonate
    return CausticDose(
        caustic_naoh_mg_l=caustic_meq * _NAOH_MEQ,
        soda_na2co3_mg_l=soda_meq * _SODA_MEQ,
        sodium_added_mg_l=(caustic_meq + soda_meq) * constants.molar_mass("Na"),
        removal=removal,
        solids_mg_l=calcium + magnesium * (constants.molar_mass("Mg(OH)2") / hardness.CACO3_G_MOL),
        **common,
    )


def solids_mg_l(removal: Values, *, co2_removed_mg_l: Values = 0.0) -> Values:
    """Dry solids from lime-soda softening, mg/L: CaCO3 and Mg(OH)2 for a :class:`Removal` and the CO2 taken
    by lime.

    Per mg as CaCO3 removed: CaCH 2.00, CaNCH 1.00, MgCH 2.583, MgNCH 1.583; per mg CO2 2.274 mg. Turbidity
    and coagulant sludge come on top. Source: stoichiometry; the first and third agree with Lang et al. 1985
    (key LANG-1985).
    """
    brucite = constants.molar_mass("Mg(OH)2") / hardness.CACO3_G_MOL
    return (
        2.0 * removal.calcium_carbonate
        + removal.calcium_non_carbonate
        + (2.0 + brucite) * removal.magnesium_carbonate
        + (1.0 + brucite) * removal.magnesium_non_carbonate
        + co2_removed_mg_l * (hardness.CACO3_G_MOL / _CO2)
    )


def _plan(
    calcium: Values,
    magnesium: Values,
    alkalinity: Values,
    co2_mg_l: Values,
    target: Values,
    remove_magnesium: bool,
    excess: Values,
    convert_sodium_alkalinity: bool,
) -> tuple[Removal, dict[str, Values]]:
    calcium, magnesium, alkalinity = (
        _checked(name, value)
        for name, value in (
            ("calcium hardness", calcium),
            ("magnesium hardness", magnesium),
            ("alkalinity", alkalinity),
        )
    )
    co2 = elementwise.number(co2_mg_l)
    errors.require("carbon dioxide", co2, "mg/L", 0.0, 500.0, _LIMIT)
    parts = hardness.parts(calcium, magnesium, alkalinity)
    total = calcium + magnesium
    reach = total if remove_magnesium else calcium
    if target is None:
        wanted = reach
    else:
        target = _checked("target hardness", target)
        wanted = elementwise.most(total - target, 0.0)
        if hardness.any_true(wanted > reach * (1.0 + 1e-12) + 1e-9):
            raise errors.ChemistryError("the target hardness is below the magnesium: magnesium has to be removed too")
        wanted = elementwise.least(wanted, reach)
    removal = _removal(parts, wanted, remove_magnesium)
    taken = elementwise.where(wanted > 0.0, 1.0, 0.0)
    magnesium_removed = removal.magnesium_carbonate + removal.magnesium_non_carbonate
    some_magnesium = elementwise.where(magnesium_removed > 0.0, 1.0, 0.0)
    if excess is None:
        excess = USUAL_EXCESS_MG_L_CACO3 if remove_magnesium else 0.0
    excess = elementwise.number(excess)
    errors.require("excess", excess, "mg/L CaCO3", 0.0, 500.0, _LIMIT)
    sodium_alkalinity = parts.sodium_alkalinity / _MEQ if convert_sodium_alkalinity else 0.0 * alkalinity
    after_calcium = calcium - removal.calcium_carbonate - removal.calcium_non_carbonate
    after_magnesium = magnesium - magnesium_removed
    below = ((after_calcium < PRACTICAL_CALCIUM_MG_L_CACO3) & (after_calcium < calcium)) | (
        (after_magnesium < PRACTICAL_MAGNESIUM_MG_L_CACO3) & (after_magnesium < magnesium)
    )
    common = {
        "hardness_after_mg_l_caco3": total - removal.total,
        "co2_demand_meq_l": taken * (2.0 * co2 / _CO2),
        "sodium_alkalinity_demand_meq_l": taken * sodium_alkalinity,
        "excess_meq_l": some_magnesium * excess / _MEQ,
        "below_practical_floor": below,
    }
    return removal, common


def _removal(parts: Values, wanted: Values, remove_magnesium: bool) -> Removal:
    """Share the hardness to be removed out over its parts, in the order of cost."""
    left = wanted
    calcium_carbonate = elementwise.least(parts.calcium_carbonate, left)
    left = left - calcium_carbonate
    magnesium_carbonate = elementwise.least(parts.magnesium_carbonate, left) if remove_magnesium else 0.0 * left
    left = left - magnesium_carbonate
    calcium_non_carbonate = elementwise.least(parts.calcium_non_carbonate, left)
    left = left - calcium_non_carbonate
    magnesium_non_carbonate = elementwise.least(parts.magnesium_non_carbonate, left) if remove_magnesium else 0.0 * left
    return Removal(calcium_carbonate, magnesium_carbonate, calcium_non_carbonate, magnesium_non_carbonate)


def _alkali_meq(removal: Values, common: Values) -> Values:
    return (
        common["co2_demand_meq_l"]
        + (removal.calcium_carbonate + 2.0 * removal.magnesium_carbonate + removal.magnesium_non_carbonate) / _MEQ
        + common["sodium_alkalinity_demand_meq_l"]
        + common["excess_meq_l"]
    )


def _checked(name: str, value: Values) -> Values:
    value = elementwise.number(value)
    errors.require(name, value, "mg/L CaCO3", 0.0, _HIGHEST, _LIMIT)
    return value
