"""Carbon dioxide after lime softening: in one stage or two, by hand and by equilibrium.

Doses are of pure CO2, all of it absorbed; a real contactor absorbs less (common practice, no source, 70 to 95
%). Carbon dioxide gathers in low rooms and kills: ventilate and measure before anyone enters.
"""

from dataclasses import dataclass, replace

from chemistry import activity as activities
from chemistry import constants, elementwise, errors, hardness
from chemistry.carbonate import dosing, equilibrium, waters
from chemistry.constants import Values

# Bicarbonate alkalinity to be left: ASCE/AWWA Water Treatment Plant Design p. 11.7 (key WTPD-11).
USUAL_BICARBONATE_LEFT_MG_L_CACO3 = 40.0
# Two-stage practice, first stage 10.0 to 10.5, final 8.4 to 8.6: from memory.
USUAL_FIRST_STAGE_PH = 10.3
USUAL_FINAL_PH = 8.5

_CO2 = constants.molar_mass("CO2")
_CO2_PER_CACO3 = _CO2 / hardness.CACO3_G_MOL
_CACO3_MG_MOL = hardness.CACO3_G_MOL * 1e3


@dataclass(frozen=True, slots=True)
class HandDose:
    """CO2 in mg/L by stoichiometry: what each stage takes, and the total."""

    first_stage_mg_l: Values
    second_stage_mg_l: Values
    total_mg_l: Values


def single_stage_hand_dose(
    hydroxide_mg_l_caco3: Values, carbonate_mg_l_caco3: Values, *, carbonate_left_mg_l_caco3: Values = 0.0
) -> HandDose:
    """:class:`HandDose` that turns all hydroxide and the carbonate above what is to be left straight into
    bicarbonate.

    CO2 = 0.440 (2 OH + CO3 - CO3 left), all as CaCO3 and 0 to 2,000 mg/L; outside raises OutOfRange, more
    carbonate left than present takes none. Source: stoichiometry; ASCE/AWWA Water Treatment Plant Design eq.
    11.20 (key WTPD-11).
    """
    hydroxide, carbonate, left = _three(hydroxide_mg_l_caco3, carbonate_mg_l_caco3, carbonate_left_mg_l_caco3)
    total = _CO2_PER_CACO3 * (2.0 * hydroxide + elementwise.most(carbonate - left, 0.0))
    return HandDose(first_stage_mg_l=total, second_stage_mg_l=0.0 * total, total_mg_l=total)


def two_stage_hand_dose(
    hydroxide_mg_l_caco3: Values, carbonate_mg_l_caco3: Values, *, carbonate_left_mg_l_caco3: Values = 0.0
) -> HandDose:
    """:class:`HandDose`: hydroxide to carbonate, settled out as CaCO3 with its calcium; then carbonate to
    bicarbonate.

    First stage 0.440 OH, second 0.440 (CO3 - CO3 left), where CO3 is the carbonate of the water after
    settling: the carbonate made in the first stage is taken to settle. All as CaCO3, 0 to 2,000 mg/L; outside
    raises OutOfRange. Source: stoichiometry; ASCE/AWWA Water Treatment Plant Design eq. 11.20 (key WTPD-11).
    """
    hydroxide, carbonate, left = _three(hydroxide_mg_l_caco3, carbonate_mg_l_caco3, carbonate_left_mg_l_caco3)
    first = _CO2_PER_CACO3 * hydroxide + 0.0 * carbonate
    second = _CO2_PER_CACO3 * elementwise.most(carbonate - left, 0.0) + 0.0 * hydroxide
    return HandDose(first_stage_mg_l=first, second_stage_mg_l=second, total_mg_l=first + second)


@dataclass(frozen=True, slots=True)
class Recarbonated:
    """Recarbonation at equilibrium: CO2 of each stage, calcite settled after the first, and the finished
    water."""

    first_stage_co2_mg_l: Values
    second_stage_co2_mg_l: Values
    calcite_mg_l: Values
    calcium_hardness_mg_l_caco3: Values
    alkalinity_mg_l_caco3: Values
    ph: Values
    water: waters.Water

    @property
    def total_co2_mg_l(self) -> Values:
        """Both stages together."""
        return self.first_stage_co2_mg_l + self.second_stage_co2_mg_l


def single_stage(
    softened_water: waters.Water, final_ph: Values = USUAL_FINAL_PH, *, activity: str = activities.DAVIES
) -> Recarbonated:
    """:class:`Recarbonated`: CO2 straight to ``final_ph`` (6 to 11), nothing settles.

    softened_water: the water of by_equilibrium.Softened, or any above that pH; one already below it raises
    ChemistryError. Source: equilibrium (see carbonate).
    """
    errors.require("final pH", final_ph, "", 6.0, 11.0, "limit of this model")
    dose, after = dosing.dose_between(softened_water, "CO2", final_ph, activity)
    return _recarbonated(softened_water, 0.0 * dose, dose, 0.0 * dose, final_ph, after)


def two_stage(
    softened_water: waters.Water,
    first_ph: Values = USUAL_FIRST_STAGE_PH,
    final_ph: Values = USUAL_FINAL_PH,
    *,
    activity: str = activities.DAVIES,
) -> Recarbonated:
    """:class:`Recarbonated`: CO2 to ``first_ph`` (9 to 11.5) with calcite settled in balance, then to
    ``final_ph``.

    Brucite left in suspension is not counted. A first pH so low that calcite would dissolve, or at or above
    the pH of the softened water, raises ChemistryError. final_ph: 6 to 11, below first_ph. Source:
    equilibrium (see carbonate).
    """
    errors.require("first pH", first_ph, "", 9.0, 11.5, "limit of this model")
    errors.require("final pH", final_ph, "", 6.0, 11.0, "limit of this model")
    before = dosing.carbon_totals(softened_water, activity)
    h = 10.0 ** (-first_ph) + 0.0 * before.alkalinity
    found = equilibrium.solve(replace(before, h=h, carbon=None), activity, calcite=True)
    settled = before.calcium - found.calcium
    co2 = found.carbon - before.carbon + settled
    if hardness.any_true(settled < -1e-9) or hardness.any_true(co2 < -1e-9):
        raise errors.ChemistryError("no calcite settles on the way to the first pH: use a single stage")
    between = replace(before, alkalinity=found.alkalinity, carbon=found.carbon, calcium=found.calcium)
    middle = waters.water_of_totals(softened_water, between)
    second, after = dosing.dose_between(middle, "CO2", final_ph, activity)
    return _recarbonated(softened_water, co2 * (_CO2 * 1e3), second, settled * _CACO3_MG_MOL, final_ph + 0.0 * second, after)


def _recarbonated(
    base: waters.Water, first: Values, second: Values, calcite: Values, ph: Values, after: waters.Totals
) -> Recarbonated:
    water = waters.water_of_totals(base, after)
    return Recarbonated(
        first_stage_co2_mg_l=first,
        second_stage_co2_mg_l=second,
        calcite_mg_l=calcite,
        calcium_hardness_mg_l_caco3=after.calcium * _CACO3_MG_MOL,
        alkalinity_mg_l_caco3=water.alkalinity_mg_l_caco3,
        ph=ph,
        water=water,
    )


def _three(hydroxide: Values, carbonate: Values, left: Values) -> list[Values]:
    values = []
    for name, value in (("hydroxide", hydroxide), ("carbonate", carbonate), ("carbonate left", left)):
        value = elementwise.number(value)
        errors.require(name, value, "mg/L CaCO3", 0.0, 2000.0, "limit of this model")
        values.append(value)
    return values
