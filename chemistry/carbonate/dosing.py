"""pH, alkalinity and saturation after chemicals are dosed; the dose that brings a water to a pH.

Closed to the air unless asked otherwise. Coagulants count with their hydroxide wholly precipitated, chlorine
with its residual standing. Advice for a licensed person and a jar test, not an instruction to dose.
"""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from chemistry import activity as activities
from chemistry import elementwise, errors
from chemistry.carbonate import chemicals, constants_of_equilibrium, equilibrium, speciation, waters
from chemistry.constants import Values

HIGHEST_DOSE_MG_L = 2000.0
_DOSE_LIMIT = "limit of this model"
_SLACK_EQ_L = 2e-10  # alkalinity, far below what any titration shows


def water_after_doses(
    water: waters.Water, doses_mg_l: Mapping[str, Values], *, activity: str = activities.DAVIES
) -> waters.Water:
    """The :class:`waters.Water` after doses, as alkalinity, inorganic carbon and ions.

    doses_mg_l: mapping of a name in chemicals.EFFECTS to mg/L of the pure compound (chlorine, hypochlorite as
    Cl2), each 0 to 2,000. Outside raises OutOfRange. Source: stoichiometry (key definition).
    """
    return waters.water_of_totals(water, dosed_totals(water, doses_mg_l, activity))


def speciation_after_doses(
    water: waters.Water,
    doses_mg_l: Mapping[str, Values],
    *,
    activity: str = activities.DAVIES,
    open_to_air_ppm_co2: Values = None,
) -> speciation.Speciation:
    """The :class:`speciation.Speciation` after doses as for :func:`water_after_doses`.

    open_to_air_ppm_co2: None keeps the carbon in; a number (10 to 100,000 ppm by volume at 1 atm; air holds
    about 420) lets CO2 escape or enter until the water is in balance with it, which takes hours to days in an
    open tank. A result outside pH 3 to 13 raises OutOfRange or ChemistryError.
    """
    after = dosed_totals(water, doses_mg_l, activity)
    if open_to_air_ppm_co2 is None:
        found = equilibrium.solve(after, activity)
    else:
        found = _open_to_air(after, open_to_air_ppm_co2, activity)
    return speciation.of_solved(after.temperature_c, found)


def ph_after_dose(
    water: waters.Water,
    chemical: str,
    dose_mg_l: Values,
    *,
    activity: str = activities.DAVIES,
    open_to_air_ppm_co2: Values = None,
) -> Values:
    """pH after ``dose_mg_l`` of one chemical (name as in chemicals.EFFECTS); see
    :func:`speciation_after_doses`."""
    return speciation_after_doses(water, {chemical: dose_mg_l}, activity=activity, open_to_air_ppm_co2=open_to_air_ppm_co2).ph


def dose_for_target_ph(water: waters.Water, chemical: str, target_ph: Values, *, activity: str = activities.DAVIES) -> Values:
    """Dose in mg/L of the pure compound that brings ``water``, closed, to ``target_ph``; zero when it is
    there already.

    chemical: a name in chemicals.EFFECTS. target_ph: 3 to 13. Raises ChemistryError when no dose from 0 to
    2,000 mg/L reaches the pH (an acid can't raise it, carbon dioxide can't pass a strong base's pH,
    bicarbonate stops near 8.3). With arrays, one water out of reach raises for all. Source: equilibrium (see
    the equilibrium module).
    """
    target_ph = elementwise.number(target_ph)
    errors.require("target pH", target_ph, "", 3.0, 13.0, _DOSE_LIMIT)
    return dose_between(water, chemical, target_ph, activity)[0]


def dose_between(water: waters.Water, chemical: str, target_ph: Values, activity: str) -> tuple[Values, waters.Totals]:
    """The dose of :func:`dose_for_target_ph` and the totals it leaves."""
    effect = chemicals.effect(chemical)
    before = carbon_totals(water, activity)
    scalar = water.is_scalar and not isinstance(target_ph, np.ndarray)
    h = 10.0 ** (-target_ph)

    def at(moles: Values) -> Values:
        totals = replace(_added(before, effect, moles), alkalinity=None, h=h)
        found = equilibrium.solve(totals, activity, tight=True)
        # What the alkalinity is at the target pH less what the dose has made it: nearly linear in the dose.
        return found.alkalinity - before.alkalinity - effect.alkalinity * moles

    most = HIGHEST_DOSE_MG_L * 1e-3 / effect.g_mol
    nothing = 0.0 if scalar else np.zeros(np.broadcast_shapes(np.shape(before.alkalinity), np.shape(target_ph)))
    low, high = nothing, nothing + most
    f_low, f_high = at(low), at(high)
    where = elementwise.where
    there = abs(f_low) < _SLACK_EQ_L
    out_of_reach = np.logical_not(there) & (f_low * f_high > 0.0)
    if np.any(out_of_reach):
        ph = np.broadcast_to(target_ph, np.shape(out_of_reach))[out_of_reach].flat[0]
        raise errors.ChemistryError(f"no dose of {chemical} up to {HIGHEST_DOSE_MG_L:g} mg/L brings this water to pH {ph:g}")
    f_high = where(there, -f_low - 1e-12, f_high)
    moles = low
    settled = 2e-12 + 5e-10 * abs(before.alkalinity)  # eq/L
    for turn in range(60):
        weight = f_low / (f_low - f_high)
        if turn % 4 == 3:  # a plain halving now and then keeps the bracket shrinking
            weight = weight * 0.0 + 0.5
        moles = where(there, 0.0, low + (high - low) * weight)
        miss = at(moles)
        if np.all(where(there, 0.0, abs(miss)) <= settled):
            break
        same = (miss > 0.0) == (f_low > 0.0)
        # Illinois: halve the kept end's value so that it can't stay for ever
        f_high, f_low = where(same, f_high * 0.5, miss), where(same, miss, f_low * 0.5)
        low, high = where(same, moles, low), where(same, high, moles)
    else:
        raise errors.ChemistryError(f"the dose of {chemical} for this pH could not be settled")
    return moles * (effect.g_mol * 1e3), _added(before, effect, moles)


def carbon_totals(water: waters.Water, activity: str) -> waters.Totals:
    """waters.Totals of a water with both alkalinity and carbon known, the pH left to be found."""
    found = waters.totals(water)
    if found.h is None:
        return found
    solved = equilibrium.solve(found, activity, tight=True)
    return found.with_carbon_system(
        alkalinity=found.alkalinity if found.alkalinity is not None else solved.alkalinity,
        carbon=found.carbon if found.carbon is not None else solved.carbon,
    )


def _added(before: waters.Totals, effect: Values, moles: Values) -> waters.Totals:
    return replace(
        before,
        alkalinity=before.alkalinity + effect.alkalinity * moles,
        carbon=before.carbon + effect.carbon * moles,
        calcium=before.calcium + effect.calcium * moles,
        magnesium=before.magnesium + effect.magnesium * moles,
        sodium=before.sodium + effect.sodium * moles,
        chloride=before.chloride + effect.chloride * moles,
        sulfate=before.sulfate + effect.sulfate * moles,
        other_charge=before.other_charge + effect.other_charge * moles,
        free_chlorine=before.free_chlorine + effect.free_chlorine * moles,
    )


def added(before: waters.Totals, chemical: str, dose_mg_l: Values) -> waters.Totals:
    """waters.Totals after a dose in mg/L of a chemical of chemicals.EFFECTS (not checked)."""
    effect = chemicals.effect(chemical)
    return _added(before, effect, dose_mg_l * (1e-3 / effect.g_mol))


def dosed_totals(water: waters.Water, doses_mg_l: Mapping[str, Values], activity: str) -> waters.Totals:
    """waters.Totals of a water after checked doses; see :func:`water_after_doses`."""
    after = carbon_totals(water, activity)
    for chemical, dose_mg_l in doses_mg_l.items():
        effect = chemicals.effect(chemical)
        dose = elementwise.number(dose_mg_l)
        errors.require(f"dose of {chemical}", dose, "mg/L", 0.0, HIGHEST_DOSE_MG_L, _DOSE_LIMIT)
        after = _added(after, effect, dose * (1e-3 / effect.g_mol))
    return after


def _open_to_air(after: waters.Totals, ppm_co2: Values, activity: str) -> equilibrium.Solved:
    errors.require("carbon dioxide in air", ppm_co2, "ppm", 10.0, 100000.0, _DOSE_LIMIT)
    henry = 10.0 ** constants_of_equilibrium.log_k("henry_co2", after.temperature_c)
    return equilibrium.solve(
        after.with_carbon_system(alkalinity=after.alkalinity), activity, co2_activity=henry * ppm_co2 * 1e-6
    )
