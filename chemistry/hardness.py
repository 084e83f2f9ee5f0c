"""Hardness, its carbonate and non-carbonate parts, the forms of alkalinity, and the balance of an analysis.

Hardness and alkalinity in mg/L as CaCO3 throughout.
"""

from dataclasses import dataclass

from chemistry import constants, elementwise, errors
from chemistry.constants import Values

CACO3_G_MOL = constants.molar_mass("CaCO3")
CACO3_MG_MEQ = CACO3_G_MOL / 2.0

_HIGHEST = 20000.0
_LIMIT = "limit of this model"


def calcium_hardness_mg_l_caco3(calcium_mg_l: Values) -> Values:
    """Calcium hardness, mg/L as CaCO3, from calcium in mg/L as Ca (0 to 8,000): 2.497 Ca.

    Source: Standard Methods 2340 B (key SM-2340), factor derived from molar masses.
    """
    return _per_metal("calcium", calcium_mg_l, "Ca")


def magnesium_hardness_mg_l_caco3(magnesium_mg_l: Values) -> Values:
    """Magnesium hardness, mg/L as CaCO3, from magnesium in mg/L as Mg (0 to 4,800): 4.118 Mg. Source:
    SM-2340."""
    return _per_metal("magnesium", magnesium_mg_l, "Mg")


def total_hardness_mg_l_caco3(
    calcium_mg_l: Values,
    magnesium_mg_l: Values,
    *,
    iron_mg_l: Values = 0.0,
    manganese_mg_l: Values = 0.0,
    strontium_mg_l: Values = 0.0,
) -> Values:
    """Total hardness, mg/L as CaCO3: 2.497 Ca + 4.118 Mg, and if given 1.792 Fe + 1.822 Mn + 1.142 Sr.

    Metals in mg/L, each from 0 up to 20,000 mg/L as CaCO3; outside raises OutOfRange. Iron, manganese and
    strontium are normally left out: they matter in some groundwaters only. Source: Standard Methods 2340 B
    (key SM-2340); the three smaller factors from molar masses of divalent ions.
    """
    return (
        _per_metal("calcium", calcium_mg_l, "Ca")
        + _per_metal("magnesium", magnesium_mg_l, "Mg")
        + _per_metal("iron", iron_mg_l, "Fe")
        + _per_metal("manganese", manganese_mg_l, "Mn")
        + _per_metal("strontium", strontium_mg_l, "Sr")
    )


def calcium_mg_l(calcium_hardness_mg_l_caco3: Values) -> Values:
    """Calcium, mg/L as Ca, from calcium hardness (0 to 20,000 mg/L as CaCO3). Source: SM-2340."""
    return _metal("calcium hardness", calcium_hardness_mg_l_caco3, "Ca")


def magnesium_mg_l(magnesium_hardness_mg_l_caco3: Values) -> Values:
    """Magnesium, mg/L as Mg, from magnesium hardness (0 to 20,000 mg/L as CaCO3). Source: SM-2340."""
    return _metal("magnesium hardness", magnesium_hardness_mg_l_caco3, "Mg")


@dataclass(frozen=True, slots=True)
class HardnessParts:
    """Hardness by what it is bound to, all mg/L as CaCO3."""

    carbonate: Values
    non_carbonate: Values
    calcium_carbonate: Values
    calcium_non_carbonate: Values
    magnesium_carbonate: Values
    magnesium_non_carbonate: Values
    sodium_alkalinity: Values


def parts(
    calcium_hardness_mg_l_caco3: Values, magnesium_hardness_mg_l_caco3: Values, alkalinity_mg_l_caco3: Values
) -> HardnessParts:
    """:class:`HardnessParts`: alkalinity is paired with calcium first, then magnesium; what is left is sodium
    alkalinity.

    All three 0 to 20,000 mg/L as CaCO3; outside raises OutOfRange. Carbonate hardness is the smaller of total
    hardness and alkalinity: Davis 2010, section 7-1, figure 7-4 (key DAVIS-2010). Calcium first: from memory.
    """
    ca = _checked("calcium hardness", calcium_hardness_mg_l_caco3)
    mg = _checked("magnesium hardness", magnesium_hardness_mg_l_caco3)
    alkalinity = _checked("alkalinity", alkalinity_mg_l_caco3)
    ca_carbonate = elementwise.least(ca, alkalinity)
    mg_carbonate = elementwise.least(mg, alkalinity - ca_carbonate)
    carbonate = ca_carbonate + mg_carbonate
    return HardnessParts(
        carbonate=carbonate,
        non_carbonate=ca + mg - carbonate,
        calcium_carbonate=ca_carbonate,
        calcium_non_carbonate=ca - ca_carbonate,
        magnesium_carbonate=mg_carbonate,
        magnesium_non_carbonate=mg - mg_carbonate,
        sodium_alkalinity=alkalinity - carbonate,
    )


@dataclass(frozen=True, slots=True)
class AlkalinityForms:
    """Alkalinity by form, all mg/L as CaCO3."""

    hydroxide: Values
    carbonate: Values
    bicarbonate: Values


def alkalinity_forms(p_alkalinity_mg_l_caco3: Values, total_alkalinity_mg_l_caco3: Values) -> AlkalinityForms:
    """:class:`AlkalinityForms` from the phenolphthalein (P) and total (M) titrations.

    P up to M/2: carbonate 2P, the rest bicarbonate. P above M/2: hydroxide 2P - M, carbonate 2(M - P). The
    scheme takes hydroxide and bicarbonate never to occur together, so it errs by a few mg/L around P = M/2;
    the equilibrium does not. Both 0 to 20,000 mg/L as CaCO3; P above M raises ChemistryError. Source:
    Standard Methods 2320 B, table 2320:II (key SM-2320).
    """
    p = _checked("P alkalinity", p_alkalinity_mg_l_caco3)
    m = _checked("total alkalinity", total_alkalinity_mg_l_caco3)
    if any_true(p > m):
        raise errors.ChemistryError("P alkalinity is above the total alkalinity: one of the titrations is wrong")
    hydroxide = elementwise.most(2.0 * p - m, 0.0)
    carbonate = elementwise.least(2.0 * p, 2.0 * (m - p))
    return AlkalinityForms(hydroxide=hydroxide, carbonate=carbonate, bicarbonate=m - hydroxide - carbonate)


@dataclass(frozen=True, slots=True)
class IonBalance:
    """Sums of charges in meq/L, and their difference in percent of the sum."""

    cations_meq_l: Values
    anions_meq_l: Values
    difference_percent: Values

    def within(self, percent: float = 5.0) -> Values:
        """True where the difference is no more than ``percent`` (5 to 10 %: common practice, no source)."""
        return abs(self.difference_percent) <= percent


def ion_balance(
    *,
    alkalinity_mg_l_caco3: Values,
    calcium_mg_l: Values = 0.0,
    magnesium_mg_l: Values = 0.0,
    sodium_mg_l: Values = 0.0,
    potassium_mg_l: Values = 0.0,
    iron_mg_l: Values = 0.0,
    manganese_mg_l: Values = 0.0,
    ammonium_mg_l: Values = 0.0,
    chloride_mg_l: Values = 0.0,
    sulfate_mg_l: Values = 0.0,
    nitrate_mg_l: Values = 0.0,
    fluoride_mg_l: Values = 0.0,
) -> IonBalance:
    """:class:`IonBalance` of an analysis: cations against anions, alkalinity standing for the weak acids.

    Ions in mg/L of the ion, alkalinity in mg/L as CaCO3, each 0 to 20,000. Below pH 5 the acid itself is not
    counted. difference = 100 (cations - anions)/(cations + anions). Source: Standard Methods 1030 E (key
    SM-1030); from memory.
    """
    cations = (
        _charges("calcium", calcium_mg_l, "Ca", 2)
        + _charges("magnesium", magnesium_mg_l, "Mg", 2)
        + _charges("sodium", sodium_mg_l, "Na", 1)
        + _charges("potassium", potassium_mg_l, "K", 1)
        + _charges("iron", iron_mg_l, "Fe", 2)
        + _charges("manganese", manganese_mg_l, "Mn", 2)
        + _charges("ammonium", ammonium_mg_l, "NH4", 1)
    )
    anions = (
        _checked("alkalinity", alkalinity_mg_l_caco3) / CACO3_MG_MEQ
        + _charges("chloride", chloride_mg_l, "Cl", 1)
        + _charges("sulfate", sulfate_mg_l, "SO4", 2)
        + _charges("nitrate", nitrate_mg_l, "NO3", 1)
        + _charges("fluoride", fluoride_mg_l, "F", 1)
    )
    total = cations + anions
    if any_true(total <= 0.0):
        raise errors.ChemistryError("an analysis without ions has no balance")
    return IonBalance(cations, anions, 100.0 * (cations - anions) / total)


def any_true(condition: Values) -> bool:
    """True where a condition on a number holds, or on an array for any element."""
    return bool(condition) if isinstance(condition, bool) else bool(condition.any())


def _checked(name: str, value: Values) -> Values:
    value = elementwise.number(value)
    errors.require(name, value, "mg/L", 0.0, _HIGHEST, _LIMIT)
    return value


def _per_metal(name: str, value_mg_l: Values, element: str) -> Values:
    factor = CACO3_G_MOL / constants.molar_mass(element)
    value = elementwise.number(value_mg_l)
    errors.require(name, value, "mg/L", 0.0, _HIGHEST / factor, _LIMIT)
    return value * factor


def _metal(name: str, value_mg_l_caco3: Values, element: str) -> Values:
    return _checked(name, value_mg_l_caco3) * (constants.molar_mass(element) / CACO3_G_MOL)


def _charges(name: str, value_mg_l: Values, formula: str, charge: int) -> Values:
    return _checked(name, value_mg_l) * (charge / constants.molar_mass(formula))
