"""Keeping iron and manganese in solution with polyphosphate or silicate: dose, limits, reversion.

No constant here is a law of nature: every one is a setting with a published or customary default.
Sequestration does not remove the metals, and phosphate or silica added is limited by product certificates and
the regulator.
"""

import math
from dataclasses import dataclass

import numpy as np

from chemistry import constants, elementwise, errors
from chemistry.constants import Values

# Wis. Adm. Code NR 811.56 (key WIS-NR-811.56, opened): polyphosphate where Fe + Mn is at most 1.0 mg/L, silicate
# at most 2.
POLYPHOSPHATE_HIGHEST_FE_MN_MG_L = 1.0
SILICATE_HIGHEST_FE_MN_MG_L = 2.0
# Recommended Standards for Water Works (key TEN-STATES, from memory).
HIGHEST_TOTAL_PHOSPHATE_MG_L_PO4 = 10.0
HIGHEST_SILICA_ADDED_MG_L_SIO2 = 20.0
HIGHEST_SILICA_TOTAL_MG_L_SIO2 = 60.0
# Product per mg of Fe + Mn, 2 to 5: common practice, no source. The middle is the default.
USUAL_PRODUCT_PER_METAL = 3.0
# Reversion of metaphosphate in stoppered glass: first order, under 10 % in 24 d without calcium, over 70 % with 120 mg/L
# Ca, rate about linear in log Ca (key HOLM-EDWARDS-2003, abstract opened). The bounds are taken as the values.
_RATE_NO_CALCIUM_D = math.log(1.0 / 0.9) / 24.0
_RATE_120_CALCIUM_D = math.log(1.0 / 0.3) / 24.0
# From the hydrolysis rates of tripolyphosphate at 12 and 25 °C in a registration dossier (key ECHA-STPP, opened).
USUAL_ACTIVATION_KJ_MOL = 57.0
# Threshold treatment against calcium carbonate scale, 0.5 to 2 mg/L, not stoichiometric: from memory.
THRESHOLD_LOW_MG_L, THRESHOLD_HIGH_MG_L = 0.5, 2.0

_LIMIT = "limit of this model"


@dataclass(frozen=True, slots=True)
class SequestrantDose:
    """Product dose in mg/L, the phosphate it adds, and which published limits it passes (true means passed
    over)."""

    product_mg_l: Values
    phosphate_added_mg_l_po4: Values
    total_phosphate_mg_l_po4: Values
    metals_mg_l: Values
    too_much_metal: Values
    too_much_phosphate: Values


def polyphosphate_dose(
    iron_mg_l: Values,
    manganese_mg_l: Values,
    *,
    mg_per_mg_iron: Values = USUAL_PRODUCT_PER_METAL,
    mg_per_mg_manganese: Values = USUAL_PRODUCT_PER_METAL,
    base_mg_l: Values = 0.0,
    phosphate_share_po4: Values = 0.8,
    raw_phosphate_mg_l_po4: Values = 0.0,
    highest_metals_mg_l: Values = POLYPHOSPHATE_HIGHEST_FE_MN_MG_L,
    highest_phosphate_mg_l_po4: Values = HIGHEST_TOTAL_PHOSPHATE_MG_L_PO4,
) -> SequestrantDose:
    """:class:`SequestrantDose` of a polyphosphate product: base + iron x ratio + manganese x ratio.

    iron_mg_l 0 to 10 and manganese_mg_l 0 to 5 (dissolved, before any oxidant or aeration: afterwards it does
    not work); ratios 0 to 20 mg product per mg (2 to 5: common practice, no source); base_mg_l 0 to 20;
    phosphate_share_po4 0 to 1, mg PO4 per mg product, from the product's certificate. Outside raises
    OutOfRange. Where a limit is passed the dose still stands, with its flag: too much metal means remove it
    instead. Manganese is held less well than iron. Source: limits WIS-NR-811.56 and TEN-STATES; ratios common
    practice.
    """
    source = "limit of this model"
    errors.require("iron", iron_mg_l, "mg/L", 0.0, 10.0, source)
    errors.require("manganese", manganese_mg_l, "mg/L", 0.0, 5.0, source)
    errors.require("ratio to iron", mg_per_mg_iron, "mg/mg", 0.0, 20.0, source)
    errors.require("ratio to manganese", mg_per_mg_manganese, "mg/mg", 0.0, 20.0, source)
    errors.require("base dose", base_mg_l, "mg/L", 0.0, 20.0, source)
    errors.require("phosphate share", phosphate_share_po4, "mg/mg", 0.0, 1.0, source)
    errors.require("phosphate", raw_phosphate_mg_l_po4, "mg/L PO4", 0.0, 50.0, source)
    product = base_mg_l + iron_mg_l * mg_per_mg_iron + manganese_mg_l * mg_per_mg_manganese
    added = product * phosphate_share_po4
    total = added + raw_phosphate_mg_l_po4
    metals = iron_mg_l + manganese_mg_l
    return SequestrantDose(
        product_mg_l=product,
        phosphate_added_mg_l_po4=added,
        total_phosphate_mg_l_po4=total,
        metals_mg_l=metals,
        too_much_metal=metals > highest_metals_mg_l,
        too_much_phosphate=total > highest_phosphate_mg_l_po4,
    )


def highest_product_mg_l(
    *,
    phosphate_share_po4: Values,
    raw_phosphate_mg_l_po4: Values = 0.0,
    highest_phosphate_mg_l_po4: Values = HIGHEST_TOTAL_PHOSPHATE_MG_L_PO4,
) -> Values:
    """Largest product dose, mg/L, that keeps total phosphate within its limit; zero where the raw water
    passes it.

    phosphate_share_po4: above 0 to 1 mg/mg; raw phosphate 0 to 50 mg/L PO4. Source: key TEN-STATES (from
    memory).
    """
    errors.require("phosphate share", phosphate_share_po4, "mg/mg", 0.01, 1.0, _LIMIT)
    errors.require("phosphate", raw_phosphate_mg_l_po4, "mg/L PO4", 0.0, 50.0, _LIMIT)
    return elementwise.most(highest_phosphate_mg_l_po4 - raw_phosphate_mg_l_po4, 0.0) / phosphate_share_po4


@dataclass(frozen=True, slots=True)
class SilicateDose:
    """Silica added and in all, mg/L SiO2, and which published limits are passed (true means passed over)."""

    silica_added_mg_l_sio2: Values
    silica_total_mg_l_sio2: Values
    too_much_metal: Values
    too_much_silica: Values


def silicate_check(
    silica_added_mg_l_sio2: Values, raw_silica_mg_l_sio2: Values, iron_mg_l: Values, manganese_mg_l: Values
) -> SilicateDose:
    """:class:`SilicateDose`: a silicate dose against Fe + Mn at most 2 mg/L, added at most 20, total at most
    60 mg/L SiO2.

    Silica 0 to 200 mg/L, iron 0 to 10, manganese 0 to 5; outside raises OutOfRange. It suits groundwater that
    has not met air. Source: WIS-NR-811.56 (metals), TEN-STATES (silica, from memory).
    """
    errors.require("silica added", silica_added_mg_l_sio2, "mg/L SiO2", 0.0, 200.0, _LIMIT)
    errors.require("raw silica", raw_silica_mg_l_sio2, "mg/L SiO2", 0.0, 200.0, _LIMIT)
    errors.require("iron", iron_mg_l, "mg/L", 0.0, 10.0, _LIMIT)
    errors.require("manganese", manganese_mg_l, "mg/L", 0.0, 5.0, _LIMIT)
    total = silica_added_mg_l_sio2 + raw_silica_mg_l_sio2
    over = elementwise.most(silica_added_mg_l_sio2 - HIGHEST_SILICA_ADDED_MG_L_SIO2, total - HIGHEST_SILICA_TOTAL_MG_L_SIO2)
    return SilicateDose(
        silica_added_mg_l_sio2=silica_added_mg_l_sio2,
        silica_total_mg_l_sio2=total,
        too_much_metal=iron_mg_l + manganese_mg_l > SILICATE_HIGHEST_FE_MN_MG_L,
        too_much_silica=over > 0.0,
    )


@dataclass(frozen=True, slots=True)
class Reversion:
    """Estimate of polyphosphate turned to orthophosphate; ``is_estimate`` is always true."""

    polyphosphate_left_share: Values
    half_life_d: Values
    is_estimate: bool = True


def reversion_half_life_d(calcium_mg_l: Values) -> Values:
    """Estimate of the half-life of polyphosphate in clean glass at room temperature, d, for calcium 0 to 500 mg/L as Ca.

    158 d up to 1 mg/L, 14 d at 120 mg/L, rate linear in log Ca between and beyond. Old pipes, metals and microbes make
    it much shorter. Outside raises OutOfRange. Source: Holm and Edwards 2003 (key HOLM-EDWARDS-2003); abstract opened.
    """
    calcium = elementwise.number(calcium_mg_l)
    errors.require("calcium", calcium, "mg/L", 0.0, 500.0, "Holm and Edwards 2003")
    share = elementwise.number(np.log10(elementwise.most(calcium, 1.0))) / math.log10(120.0)
    return math.log(2.0) / (_RATE_NO_CALCIUM_D + share * (_RATE_120_CALCIUM_D - _RATE_NO_CALCIUM_D))


def reversion(
    time_d: Values,
    temperature_c: Values,
    *,
    half_life_d_20c: Values,
    activation_kj_mol: Values = USUAL_ACTIVATION_KJ_MOL,
) -> Reversion:
    """:class:`Reversion` after ``time_d`` days at ``temperature_c``, first order: an estimate, the constants are settings.

    time_d: 0 to 365; temperature_c: 0 to 60; half_life_d_20c: 0.1 to 3,650, from :func:`reversion_half_life_d` or
    better from ortho and total phosphate measured in the network; activation_kj_mol: 20 to 160. Outside raises
    OutOfRange. What reverts no longer sequesters. Source: first order HOLM-EDWARDS-2003, temperature ECHA-STPP.
    """
    errors.require("time", time_d, "d", 0.0, 365.0, _LIMIT)
    errors.require("temperature", temperature_c, "°C", 0.0, 60.0, _LIMIT)
    errors.require("half-life", half_life_d_20c, "d", 0.1, 3650.0, _LIMIT)
    errors.require("activation energy", activation_kj_mol, "kJ/mol", 20.0, 160.0, _LIMIT)
    kelvin = constants.kelvin(temperature_c)
    slope = activation_kj_mol * 1000.0 / constants.GAS_CONSTANT_J_MOL_K
    half_life = half_life_d_20c * math.e ** (slope * (1.0 / kelvin - 1.0 / 293.15))
    return Reversion(polyphosphate_left_share=0.5 ** (time_d / half_life), half_life_d=half_life)


def phosphate_from_phosphorus_mg_l_po4(phosphorus_mg_l: Values) -> Values:
    """Phosphate, mg/L as PO4, from phosphorus, mg/L as P (0 to 1,000): 3.066 P. Source: definition, by
    definition."""
    errors.require("phosphorus", phosphorus_mg_l, "mg/L", 0.0, 1000.0, _LIMIT)
    return phosphorus_mg_l * (constants.molar_mass("PO4") / constants.molar_mass("P"))


def silica_from_silicon_mg_l_sio2(silicon_mg_l: Values) -> Values:
    """Silica, mg/L as SiO2, from silicon, mg/L as Si (0 to 1,000): 2.139 Si. Source: definition."""
    errors.require("silicon", silicon_mg_l, "mg/L", 0.0, 1000.0, _LIMIT)
    return silicon_mg_l * (constants.molar_mass("SiO2") / constants.molar_mass("Si"))
