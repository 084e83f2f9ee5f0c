"""Split treatment: part of the water is softened with excess lime, the rest passes by and uses the excess
up."""

from dataclasses import dataclass

from chemistry import elementwise, errors, hardness
from chemistry.constants import Values
from chemistry.softening import lime_soda

USUAL_MAGNESIUM_LEFT_MG_L_CACO3 = lime_soda.PRACTICAL_MAGNESIUM_MG_L_CACO3


@dataclass(frozen=True, slots=True)
class SplitTreatment:
    """bypass_share: part of the whole flow that passes by, 0 to 1. Doses per litre of treated and of whole
    water."""

    bypass_share: Values
    treated_lime_ca_oh_2_mg_l: Values
    treated_soda_na2co3_mg_l: Values
    whole_lime_ca_oh_2_mg_l: Values
    whole_soda_na2co3_mg_l: Values
    magnesium_after_mg_l_caco3: Values


def bypass_share(
    raw_magnesium_mg_l_caco3: Values, target_magnesium_mg_l_caco3: Values, *, treated_magnesium_mg_l_caco3: Values = 10.0
) -> Values:
    """Share of the flow that may pass the softener, 0 to 1: (target - treated)/(raw - treated), all magnesium
    as CaCO3.

    0 to 5,000 mg/L each. A raw water at or below the target needs no magnesium removal and gives 1; a target
    below what the treated stream holds raises ChemistryError. Source: mass balance; 10 mg/L left: from
    memory.
    """
    raw, target, treated = (
        _checked(name, value)
        for name, value in (
            ("raw magnesium", raw_magnesium_mg_l_caco3),
            ("target magnesium", target_magnesium_mg_l_caco3),
            ("treated magnesium", treated_magnesium_mg_l_caco3),
        )
    )
    if hardness.any_true((target < treated) & (raw > target)):
        raise errors.ChemistryError("the target magnesium is below what the treated stream still holds")
    enough = raw <= target
    span = elementwise.where(enough, 1.0, raw - treated)
    return elementwise.where(enough, 1.0, (target - treated) / span)


def split_treatment(
    *,
    calcium_hardness_mg_l_caco3: Values,
    magnesium_hardness_mg_l_caco3: Values,
    alkalinity_mg_l_caco3: Values,
    co2_mg_l: Values,
    target_magnesium_mg_l_caco3: Values,
    excess_mg_l_caco3: Values = None,
    treated_magnesium_mg_l_caco3: Values = 10.0,
) -> SplitTreatment:
    """:class:`SplitTreatment`: full lime-soda dose with excess on the treated part, nothing on the bypass.

    The excess lime of the treated part reacts with the carbon dioxide and bicarbonate of the bypass when they
    meet: check the mixture with carbonate.blend. Arguments as for lime_soda.lime_soda_dose and
    :func:`bypass_share`. Source: mass balance and lime_soda (key DAVIS-2010 for the method; opened in part).
    """
    share = bypass_share(
        magnesium_hardness_mg_l_caco3,
        target_magnesium_mg_l_caco3,
        treated_magnesium_mg_l_caco3=treated_magnesium_mg_l_caco3,
    )
    dose = lime_soda.lime_soda_dose(
        calcium_hardness_mg_l_caco3=calcium_hardness_mg_l_caco3,
        magnesium_hardness_mg_l_caco3=magnesium_hardness_mg_l_caco3,
        alkalinity_mg_l_caco3=alkalinity_mg_l_caco3,
        co2_mg_l=co2_mg_l,
        remove_magnesium=True,
        excess_mg_l_caco3=excess_mg_l_caco3,
        convert_sodium_alkalinity=True,
    )
    treated = 1.0 - share
    raw = elementwise.number(magnesium_hardness_mg_l_caco3)
    return SplitTreatment(
        bypass_share=share,
        treated_lime_ca_oh_2_mg_l=dose.lime_ca_oh_2_mg_l,
        treated_soda_na2co3_mg_l=dose.soda_na2co3_mg_l,
        whole_lime_ca_oh_2_mg_l=treated * dose.lime_ca_oh_2_mg_l,
        whole_soda_na2co3_mg_l=treated * dose.soda_na2co3_mg_l,
        magnesium_after_mg_l_caco3=share * raw + treated * elementwise.least(raw, treated_magnesium_mg_l_caco3),
    )


def _checked(name: str, value: Values) -> Values:
    value = elementwise.number(value)
    errors.require(name, value, "mg/L CaCO3", 0.0, 5000.0, "limit of this model")
    return value
