"""Sodium-cycle ion exchange softening: capacity, throughput, salt, bypass, sodium added, regenerant brine.

Hardness in mg/L as CaCO3 (= g/m3), resin in m3, capacity in kg CaCO3 per m3 of resin. One sodium comes for
each charge of hardness removed: sodium-restricted diets and local limits may matter, ask the regulator.
"""

from dataclasses import dataclass

from chemistry import constants, elementwise, errors, hardness
from chemistry.constants import Values

NACL_G_MOL = constants.molar_mass("NaCl")
# Stoichiometric floor: two NaCl per CaCO3.
SALT_FLOOR_KG_PER_KG_CACO3 = 2.0 * NACL_G_MOL / hardness.CACO3_G_MOL
SODIUM_PER_CACO3 = 2.0 * constants.molar_mass("Na") / hardness.CACO3_G_MOL
# Total capacity of an 8 % DVB gel cation resin, 1.9 to 2.0 eq/L: trade journal article (key RESIN-JOURNAL),
# opened.
USUAL_TOTAL_CAPACITY_EQ_L = 2.0
# Recommended Standards for Water Works, sec. 4 (key TEN-STATES): at most 20,000 gr/ft3 at 0.3 lb salt per
# kilograin.
STANDARD_CAPACITY_KG_M3 = 45.767
STANDARD_SALT_KG_PER_KG_CACO3 = 2.10
# Working capacity against salt, kg CaCO3 per m3 at kg NaCl per m3 of resin: forum post, low authority
# (RESIN-FORUM).
WORKING_POINTS = ((96.0, 48.0), (128.0, 55.0))

_LIMIT = "limit of this model"


def total_capacity_kg_m3(capacity_eq_l: Values) -> Values:
    """Total capacity, kg CaCO3 per m3, from eq/L of resin (0.5 to 3): 50.04 per eq/L. Source: definition."""
    errors.require("resin capacity", capacity_eq_l, "eq/L", 0.5, 3.0, _LIMIT)
    return capacity_eq_l * hardness.CACO3_MG_MEQ


def working_capacity_kg_m3(salt_kg_m3: Values) -> Values:
    """Working capacity, kg CaCO3 per m3 of resin, for a salt level of 96 to 128 kg NaCl per m3, by straight
    line.

    Outside raises OutOfRange: the two points (48 at 96, 55 at 128) are a rule from a forum post, low
    authority (key RESIN-FORUM); the resin maker's curve for your water wins.
    """
    errors.require("salt per resin", salt_kg_m3, "kg/m3", 96.0, 128.0, "two published points")
    (low_salt, low), (high_salt, high) = WORKING_POINTS
    return low + (salt_kg_m3 - low_salt) * (high - low) / (high_salt - low_salt)


def throughput_m3(
    resin_m3: Values, capacity_kg_m3: Values, hardness_mg_l_caco3: Values, *, leakage_mg_l_caco3: Values = 0.0
) -> Values:
    """Water softened between regenerations, m3: resin x capacity / (hardness - leakage).

    resin_m3: 0 to 500; capacity_kg_m3: 5 to 150; hardness 1 to 5,000 and leakage below it, mg/L as CaCO3.
    Outside raises OutOfRange or ChemistryError. Source: mass balance (key definition).
    """
    errors.require("resin", resin_m3, "m3", 0.0, 500.0, _LIMIT)
    errors.require("capacity", capacity_kg_m3, "kg/m3", 5.0, 150.0, _LIMIT)
    removed = _removed(hardness_mg_l_caco3, leakage_mg_l_caco3)
    return resin_m3 * capacity_kg_m3 * 1000.0 / removed


def bypass_share(hardness_mg_l_caco3: Values, target_mg_l_caco3: Values, *, leakage_mg_l_caco3: Values = 0.0) -> Values:
    """Share of the flow, 0 to 1, that may pass the softener: (target - leakage)/(hardness - leakage).

    mg/L as CaCO3, hardness 1 to 5,000. A target at or above the hardness gives 1; one below the leakage
    raises ChemistryError. Source: mass balance (key definition).
    """
    raw = elementwise.number(hardness_mg_l_caco3)
    target = elementwise.number(target_mg_l_caco3)
    errors.require("target hardness", target, "mg/L CaCO3", 0.0, 5000.0, _LIMIT)
    span = _removed(raw, leakage_mg_l_caco3)
    if hardness.any_true(target < leakage_mg_l_caco3):
        raise errors.ChemistryError("the target hardness is below the leakage of the softener")
    return elementwise.least((target - leakage_mg_l_caco3) / span, 1.0)


def sodium_added_mg_l(hardness_removed_mg_l_caco3: Values) -> Values:
    """Sodium given to the water, mg/L: 0.459 per mg/L CaCO3 removed (0 to 5,000). Alkalinity stays as it was.

    Source: stoichiometry, two Na per Ca (key definition).
    """
    errors.require("hardness removed", hardness_removed_mg_l_caco3, "mg/L CaCO3", 0.0, 5000.0, _LIMIT)
    return hardness_removed_mg_l_caco3 * SODIUM_PER_CACO3


def salt_kg_per_regeneration(resin_m3: Values, salt_kg_m3: Values) -> Values:
    """Salt per regeneration, kg NaCl, for a resin volume (0 to 500 m3) and salt level (20 to 400 kg/m3).
    Definition."""
    errors.require("resin", resin_m3, "m3", 0.0, 500.0, _LIMIT)
    errors.require("salt per resin", salt_kg_m3, "kg/m3", 20.0, 400.0, _LIMIT)
    return resin_m3 * salt_kg_m3


def salt_efficiency_kg_per_kg(salt_kg_m3: Values, capacity_kg_m3: Values) -> Values:
    """Salt used per hardness removed, kg NaCl/kg CaCO3; below the floor of 1.168 raises ChemistryError.

    salt 20 to 400, capacity 5 to 150 kg/m3. 1.8 to 3 times the floor is common practice, no source; the floor
    follows from molar masses.
    """
    errors.require("salt per resin", salt_kg_m3, "kg/m3", 20.0, 400.0, _LIMIT)
    errors.require("capacity", capacity_kg_m3, "kg/m3", 5.0, 150.0, _LIMIT)
    ratio = elementwise.number(salt_kg_m3 / capacity_kg_m3)
    if hardness.any_true(ratio < SALT_FLOOR_KG_PER_KG_CACO3):
        raise errors.ChemistryError(
            f"less salt than the exchange itself takes ({SALT_FLOOR_KG_PER_KG_CACO3:.3f} kg NaCl per kg CaCO3): "
            "the capacity or the salt level is wrong"
        )
    return ratio


@dataclass(frozen=True, slots=True)
class SaltNeed:
    """Softening part of a flow to a target: per ML of finished water, and per regeneration."""

    bypass_share: Values
    salt_mg_l: Values  # of finished water, equal to kg/ML
    sodium_added_mg_l: Values
    throughput_m3: Values  # finished water between regenerations, bypass included
    salt_kg_per_regeneration: Values
    salt_kg_per_kg_caco3: Values
    hardness_after_mg_l_caco3: Values


def salt_need(
    *,
    resin_m3: Values,
    capacity_kg_m3: Values,
    salt_kg_m3: Values,
    hardness_mg_l_caco3: Values,
    target_hardness_mg_l_caco3: Values = 0.0,
    leakage_mg_l_caco3: Values = 0.0,
) -> SaltNeed:
    """:class:`SaltNeed` for blending softened and bypassed water to a target hardness.

    Ranges as in the functions above; a target at or above the raw hardness needs no salt (throughput is then
    infinite). salt_mg_l = (hardness - target) x salt/capacity. Source: mass balance (key definition).
    """
    raw = elementwise.number(hardness_mg_l_caco3)
    target = elementwise.most(elementwise.number(target_hardness_mg_l_caco3), leakage_mg_l_caco3)
    efficiency = salt_efficiency_kg_per_kg(salt_kg_m3, capacity_kg_m3)
    share = bypass_share(raw, target, leakage_mg_l_caco3=leakage_mg_l_caco3)
    through = 1.0 - share
    softened = throughput_m3(resin_m3, capacity_kg_m3, raw, leakage_mg_l_caco3=leakage_mg_l_caco3)
    removed = elementwise.most(raw - target, 0.0)
    safe = elementwise.where(through > 0.0, through, 1.0)
    return SaltNeed(
        bypass_share=share,
        salt_mg_l=removed * efficiency,
        sodium_added_mg_l=sodium_added_mg_l(removed),
        throughput_m3=elementwise.where(through > 0.0, softened / safe, float("inf")),
        salt_kg_per_regeneration=salt_kg_per_regeneration(resin_m3, salt_kg_m3),
        salt_kg_per_kg_caco3=efficiency,
        hardness_after_mg_l_caco3=raw - removed,
    )


@dataclass(frozen=True, slots=True)
class Brine:
    """Regenerant: volume and density of diluted brine for the salt, and the spent brine's salt balance."""

    brine_m3: Values
    density_kg_m3: Values
    water_kg: Values
    spent_calcium_magnesium_kg_caco3: Values
    spent_sodium_chloride_kg: Values  # unused salt that leaves with the spent brine


def regenerant_brine(
    salt_kg: Values, strength_weight_percent: Values, density_kg_m3: Values, *, hardness_taken_kg_caco3: Values = 0.0
) -> Brine:
    """:class:`Brine` for a salt charge made up to a strength; the density comes from chemistry.densities or a
    meter.

    salt_kg: 0 to 200,000; strength_weight_percent: 2 to 26 (saturated at 20 °C); density_kg_m3: 1,000 to
    1,210; hardness_taken_kg_caco3: what the resin held, its exchange eats 1.168 kg NaCl each. Outside raises
    OutOfRange. 10 % at the resin is usual (common practice, no source). Spent brine may need a permit.
    Source: mass balance.
    """
    errors.require("salt", salt_kg, "kg", 0.0, 200000.0, _LIMIT)
    errors.require("strength", strength_weight_percent, "%", 2.0, 26.5, "saturated brine")
    errors.require("density", density_kg_m3, "kg/m3", 1000.0, 1210.0, "saturated brine")
    errors.require("hardness taken", hardness_taken_kg_caco3, "kg CaCO3", 0.0, 200000.0, _LIMIT)
    unused = elementwise.number(salt_kg - hardness_taken_kg_caco3 * SALT_FLOOR_KG_PER_KG_CACO3)
    if hardness.any_true(unused < 0.0):
        raise errors.ChemistryError("the hardness taken up is more than this salt could displace")
    brine_kg = salt_kg * 100.0 / strength_weight_percent
    return Brine(
        brine_m3=brine_kg / density_kg_m3,
        density_kg_m3=density_kg_m3,
        water_kg=brine_kg - salt_kg,
        spent_calcium_magnesium_kg_caco3=hardness_taken_kg_caco3,
        spent_sodium_chloride_kg=unused,
    )


@dataclass(frozen=True, slots=True)
class BedCheck:
    """Is the bed deep enough, the rate low enough, the water clear enough? Each true when the standard is
    kept."""

    depth_ok: Values
    loading_ok: Values
    turbidity_ok: Values


def bed_check(bed_depth_m: Values, loading_m_h: Values, turbidity_ntu: Values) -> BedCheck:
    """:class:`BedCheck` against Recommended Standards for Water Works, section 4 (key TEN-STATES,
    second-hand).

    Bed at least 3 ft (0.914 m), loading at most 7 US gal/min/ft2 (17.11 m/h), turbidity at most 5 NTU.
    bed_depth_m 0 to 5, loading_m_h 0 to 100, turbidity_ntu 0 to 1,000; outside raises OutOfRange. The same
    standards ask for a bypass line.
    """
    errors.require("bed depth", bed_depth_m, "m", 0.0, 5.0, _LIMIT)
    errors.require("loading", loading_m_h, "m/h", 0.0, 100.0, _LIMIT)
    errors.require("turbidity", turbidity_ntu, "NTU", 0.0, 1000.0, _LIMIT)
    return BedCheck(
        depth_ok=bed_depth_m >= 0.9144 - 1e-9,
        loading_ok=loading_m_h <= 7.0 * 3.785411784e-3 * 60.0 / 0.09290304 + 1e-9,
        turbidity_ok=turbidity_ntu <= 5.0,
    )


def _removed(hardness_mg_l_caco3: Values, leakage_mg_l_caco3: Values) -> Values:
    raw = elementwise.number(hardness_mg_l_caco3)
    leakage = elementwise.number(leakage_mg_l_caco3)
    errors.require("hardness", raw, "mg/L CaCO3", 1.0, 5000.0, _LIMIT)
    errors.require("leakage", leakage, "mg/L CaCO3", 0.0, 5000.0, _LIMIT)
    removed = raw - leakage
    if hardness.any_true(removed <= 0.0):
        raise errors.ChemistryError("the leakage is as high as the raw hardness: the softener does nothing")
    return removed
