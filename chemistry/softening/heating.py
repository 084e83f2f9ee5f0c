"""Heating and temporary hardness: how much calcium carbonate heat drives out, as an estimate.

An upper bound by equilibrium: real heaters leave more hardness, since scale forms slowly. Magnesium carbonate
hardness is left out (it comes out as hydroxide only in long boiling).
"""

from dataclasses import dataclass

from chemistry import activity as activities
from chemistry import constants
from chemistry.carbonate import constants_of_equilibrium, dosing, equilibrium, potential, waters
from chemistry.constants import Values

_CACO3_MG_MOL = constants.molar_mass("CaCO3") * 1e3


@dataclass(frozen=True, slots=True)
class Heated:
    """Estimate of what heating does: scale in mg/L CaCO3, and the water left. ``is_estimate`` is always
    true."""

    temperature_c: Values
    scale_mg_l_caco3: Values
    calcium_hardness_mg_l_caco3: Values
    alkalinity_mg_l_caco3: Values
    ph: Values
    is_estimate: bool = True


def after_heating(
    water: waters.Water, temperature_c: Values, *, co2_escapes: bool = True, activity: str = activities.DAVIES
) -> Heated:
    """:class:`Heated` for a Water brought to ``temperature_c`` (0 to 80 °C; outside raises
    OutOfRange).

    co2_escapes: True lets the carbon dioxide set free go until the water is in balance with 1,000 ppm in the
    gas above it (an open pan or vented heater; common practice, no source), False keeps it in (a closed
    heater). Scale is never below zero. Source: calcite equilibrium (key PLUMMER-BUSENBERG-1982); the estimate
    is ours, not a published rule.
    """
    hot = potential.at_temperature(water, temperature_c, activity=activity)
    totals = dosing.carbon_totals(hot, activity)
    if co2_escapes:
        henry = 10.0 ** constants_of_equilibrium.log_k("henry_co2", totals.temperature_c)
        gas = henry * 1000e-6
        vented = equilibrium.solve(totals.with_carbon_system(alkalinity=totals.alkalinity), activity, co2_activity=gas)
        found = equilibrium.solve(
            totals.with_carbon_system(alkalinity=totals.alkalinity),
            activity,
            calcite=True,
            co2_activity=gas,
            start=vented,
        )
        bare = vented
    else:
        bare = equilibrium.solve(totals, activity)
        found = equilibrium.solve(totals, activity, calcite=True, start=bare)
    scales = totals.calcium - found.calcium > 0.0
    scale = (totals.calcium - found.calcium) * scales
    return Heated(
        temperature_c=totals.temperature_c,
        scale_mg_l_caco3=scale * _CACO3_MG_MOL,
        calcium_hardness_mg_l_caco3=(totals.calcium - scale) * _CACO3_MG_MOL,
        alkalinity_mg_l_caco3=(totals.alkalinity - 2.0 * scale) * (waters.CACO3_MG_MEQ * 1e3),
        ph=-equilibrium.log10(found.h * scales + bare.h * (1.0 - scales)),
    )
