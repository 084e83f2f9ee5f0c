"""Softening as an equilibrium: what lime, soda or caustic leave dissolved once calcite and brucite have
formed.

Calcite and brucite form only where supersaturated and never dissolve below what was dosed. Practice leaves
more calcium and magnesium than this (fine crystals, short time, magnesium carried over): see
lime_soda.PRACTICAL_*. The residual magnesium depends on the solubility product chosen for brucite: published
values move it by up to 6 mg/L as CaCO3.
"""

from dataclasses import dataclass, replace

import numpy as np

from chemistry import activity as activities
from chemistry import constants, elementwise, errors
from chemistry.carbonate import dosing, equilibrium, waters
from chemistry.constants import Values
from chemistry.softening import lime_soda, precipitation

_CACO3_MG_MOL = waters.CACO3_MG_MEQ * 2.0 * 1e3
_BRUCITE_MG_MOL = constants.molar_mass("Mg(OH)2") * 1e3
_LIME_MG_MOL = constants.molar_mass("Ca(OH)2") * 1e3
_USUAL_EXCESS_MOL = lime_soda.USUAL_EXCESS_MG_L_CACO3 / _CACO3_MG_MOL


@dataclass(frozen=True, slots=True)
class Softened:
    """The clear water after softening at equilibrium, and the solids per litre; ``water`` can be treated
    further."""

    ph: Values
    calcium_hardness_mg_l_caco3: Values
    magnesium_hardness_mg_l_caco3: Values
    alkalinity_mg_l_caco3: Values
    dic_mmol_l: Values
    ionic_strength_mol_l: Values
    calcite_mg_l: Values
    brucite_mg_l: Values
    water: waters.Water

    @property
    def solids_mg_l(self) -> Values:
        """Calcite and brucite together, dry, mg/L."""
        return self.calcite_mg_l + self.brucite_mg_l

    @property
    def hardness_mg_l_caco3(self) -> Values:
        """Calcium and magnesium hardness together."""
        return self.calcium_hardness_mg_l_caco3 + self.magnesium_hardness_mg_l_caco3


def soften(
    water: waters.Water,
    *,
    lime_ca_oh_2_mg_l: Values = 0.0,
    soda_na2co3_mg_l: Values = 0.0,
    caustic_naoh_mg_l: Values = 0.0,
    co2_mg_l: Values = 0.0,
    activity: str = activities.DAVIES,
) -> Softened:
    """:class:`Softened` for a Water after the doses given (pure compounds, each 0 to 2,000 mg/L).

    Without a dose it shows what the raw water itself would precipitate. Ranges and errors as for
    carbonate.speciate. Source: equilibrium with calcite and brucite (keys PLUMMER-BUSENBERG-1982,
    WATEQ4F-DAT), checked against PHREEQC.
    """
    doses = {
        "Ca(OH)2": lime_ca_oh_2_mg_l,
        "Na2CO3": soda_na2co3_mg_l,
        "NaOH": caustic_naoh_mg_l,
        "CO2": co2_mg_l,
    }
    dosed = dosing.dosed_totals(water, doses, activity)
    found = precipitation.precipitate(dosed, activity)
    return _softened(water, dosed, found)


def lime_for_hardness(
    water: waters.Water,
    target_hardness_mg_l_caco3: Values,
    *,
    soda_na2co3_mg_l: Values = 0.0,
    activity: str = activities.DAVIES,
) -> Values:
    """Smallest lime dose, mg/L Ca(OH)2, that leaves ``target_hardness_mg_l_caco3`` (total) at equilibrium.

    Hardness falls with lime, then rises again as lime is overdosed; the falling side is taken. Zero where the
    water is soft enough already. Doses are sought up to what CO2, alkalinity and magnesium take plus 62.5
    mg/L as CaCO3; a target below what that reaches raises ChemistryError. target: 0 to 5,000 mg/L as CaCO3.
    Source: :func:`soften`.
    """
    target = elementwise.number(target_hardness_mg_l_caco3)
    errors.require("target hardness", target, "mg/L CaCO3", 0.0, 5000.0, "limit of this model")
    scalar = water.is_scalar and not isinstance(target, np.ndarray) and not isinstance(soda_na2co3_mg_l, np.ndarray)
    start = dosing.carbon_totals(water, activity)
    start = dosing.added(start, "Na2CO3", soda_na2co3_mg_l)
    column = _as_columns(start, np.shape(target))
    target_column = np.broadcast_to(np.atleast_1d(target)[..., None], (*np.shape(column.alkalinity)[:-1], 1))

    def over(lime_mg_l: Values) -> Values:
        dosed = dosing.added(column, "Ca(OH)2", lime_mg_l)
        found = precipitation.precipitate(dosed, activity)
        return (found.calcium + found.magnesium) * _CACO3_MG_MOL - target_column

    # Beyond CO2, alkalinity and magnesium lime only adds hardness of its own.
    closed = equilibrium.solve(column, activity)
    useful_mol = closed.co2 + 0.5 * column.alkalinity + column.magnesium + _USUAL_EXCESS_MOL
    grid = np.linspace(0.0, 1.0, 121) * (useful_mol * _LIME_MG_MOL) + 0.0 * target_column
    misses = over(grid)
    reached = misses <= 0.0
    failing = ~reached.any(axis=-1)
    if failing.any():
        lowest = float((misses + target_column).min(axis=-1)[failing].flat[0])
        raise errors.ChemistryError(
            f"lime can't bring this water to the target hardness; it reaches about {lowest:.0f} mg/L CaCO3"
        )
    first = reached.argmax(axis=-1)[..., None]
    high = np.take_along_axis(grid, first, axis=-1)
    low = np.take_along_axis(grid, np.maximum(first - 1, 0), axis=-1)
    for _ in range(40):
        middle = 0.5 * (low + high)
        above = over(middle) > 0.0
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    dose = np.where(first == 0, 0.0, high)[..., 0]
    return float(dose[0]) if scalar else dose.reshape(np.broadcast_shapes(precipitation.shape_of(start), np.shape(target)))


def _softened(water: waters.Water, dosed: waters.Totals, found: Values) -> Softened:
    after = replace(
        dosed,
        alkalinity=found.alkalinity,
        carbon=found.carbon,
        calcium=found.calcium,
        magnesium=found.magnesium,
    )
    return Softened(
        ph=-equilibrium.log10(found.h),
        calcium_hardness_mg_l_caco3=found.calcium * _CACO3_MG_MOL,
        magnesium_hardness_mg_l_caco3=found.magnesium * _CACO3_MG_MOL,
        alkalinity_mg_l_caco3=found.alkalinity * (waters.CACO3_MG_MEQ * 1e3),
        dic_mmol_l=found.carbon * 1e3,
        ionic_strength_mol_l=found.ionic_strength,
        calcite_mg_l=elementwise.most((dosed.calcium - found.calcium) * _CACO3_MG_MOL, 0.0),
        brucite_mg_l=elementwise.most((dosed.magnesium - found.magnesium) * _BRUCITE_MG_MOL, 0.0),
        water=waters.water_of_totals(water, after),
    )


def _as_columns(totals: waters.Totals, other_shape: tuple[int, ...]) -> waters.Totals:
    """Every total with a last axis of one, so that a row of doses can stand against each water."""
    shape = np.broadcast_shapes(precipitation.shape_of(totals), other_shape) or (1,)
    return replace(
        totals,
        **{
            name: np.array(np.broadcast_to(value, shape))[..., None]
            for name in totals.__slots__
            if (value := getattr(totals, name)) is not None
        },
    )
