"""Calcium carbonate precipitation potential, and water at other temperatures and mixtures of two waters."""

from dataclasses import dataclass, replace

from chemistry import activity as activities
from chemistry import errors
from chemistry.carbonate import dosing, equilibrium, waters
from chemistry.constants import Values

_CACO3_MG_MOL = waters.CACO3_MG_MEQ * 2.0 * 1e3


@dataclass(frozen=True, slots=True)
class PrecipitationPotential:
    """What happens when a water comes to balance with calcite, closed to the air.

    ccpp_mg_l: CaCO3 that falls out (positive) or can be dissolved (negative). The rest describes the water
    then.
    """

    ccpp_mg_l: Values
    ph_at_balance: Values
    calcium_hardness_mg_l_caco3: Values
    alkalinity_mg_l_caco3: Values
    si_calcite_before: Values


def precipitation_potential(water: waters.Water, *, activity: str = activities.DAVIES) -> PrecipitationPotential:
    """:class:`PrecipitationPotential` of a Water at its own temperature.

    activity, ranges and errors as for speciation.speciate; balance outside pH 3 to 13 raises ChemistryError.
    The number belongs to this procedure, this set of ion pairs and this temperature: report them with it.
    Source: closed calcite equilibrium, sign as in Standard Methods 2330 C (key SM-2330), procedure checked
    against PHREEQC as Tang et al. 2021 recommend (key TANG-2021).
    """
    before = waters.totals(water)
    closed = equilibrium.solve(before, activity)
    if before.h is not None:
        before = before.with_carbon_system(alkalinity=closed.alkalinity, carbon=closed.carbon)
    balanced = equilibrium.solve(before, activity, calcite=True, start=closed)
    return PrecipitationPotential(
        ccpp_mg_l=(before.calcium - balanced.calcium) * _CACO3_MG_MOL,
        ph_at_balance=-_log10(balanced.h),
        calcium_hardness_mg_l_caco3=balanced.calcium * _CACO3_MG_MOL,
        alkalinity_mg_l_caco3=balanced.alkalinity * (waters.CACO3_MG_MEQ * 1e3),
        si_calcite_before=equilibrium.log10(closed.ion_product_calcite),
    )


def at_temperature(water: waters.Water, temperature_c: Values, *, activity: str = activities.DAVIES) -> waters.Water:
    """The same water, closed, warmed or cooled to ``temperature_c`` (0 to 80 °C): alkalinity and carbon stay,
    pH moves.

    Source: definition of a closed system (key definition).
    """
    found = dosing.carbon_totals(water, activity)
    return waters.water_of_totals(water, replace(found, temperature_c=temperature_c))


def blend(one: waters.Water, other: waters.Water, share_of_one: Values, *, activity: str = activities.DAVIES) -> waters.Water:
    """The Water made by mixing ``one`` (share 0 to 1 by volume) with ``other``, closed to the air.

    Temperature, alkalinity, inorganic carbon and ions mix in proportion; pH and saturation follow from them
    (two waters each in balance can be aggressive together). Outside 0 to 1 raises OutOfRange. Source: mass
    balance (key definition).
    """
    errors.require("share", share_of_one, "", 0.0, 1.0, "a share of the mixture")
    a = dosing.carbon_totals(one, activity)
    b = dosing.carbon_totals(other, activity)
    rest = 1.0 - share_of_one
    mixed = {name: getattr(a, name) * share_of_one + getattr(b, name) * rest for name in waters.Totals.__slots__ if name != "h"}
    base = replace(
        one,
        ph=None,
        alkalinity_mg_l_caco3=0.0,
        dic_mmol_l=0.0,
        nitrate_mg_l=one.nitrate_mg_l * share_of_one + other.nitrate_mg_l * rest,
        fluoride_mg_l=one.fluoride_mg_l * share_of_one + other.fluoride_mg_l * rest,
    )
    return waters.water_of_totals(base, waters.Totals(h=None, **mixed))


def _log10(value: Values) -> Values:
    return equilibrium.log10(value)
