"""Coagulants: alkalinity taken, sludge made, metal content. mg/L of the pure compound named; floats or arrays.

Reactions run to the hydroxide: Al2(SO4)3 + 6 HCO3 = 2 Al(OH)3 + 3 SO4 + 6 CO2 and their like (definition).
Coagulants are acid, stain and corrode, and with hypochlorite or chlorite give off chlorine or chlorine
dioxide: separate tanks, lines and bunds.
"""

from typing import Any, NamedTuple

from chemistry import constants, errors

Values = Any  # a float or a numpy array
_SOURCE = "coagulant arithmetic"
_HIGHEST_MG_L = 2000.0


class Coagulant(NamedTuple):
    """Metal, its atoms per formula, and equivalents of alkalinity one mole takes."""

    metal: str
    atoms: float
    equivalents: float


COAGULANTS: dict[str, Coagulant] = {
    "Al2(SO4)3": Coagulant("Al", 2, 6),
    "Al2(SO4)3.14H2O": Coagulant("Al", 2, 6),  # dry alum, 17 % Al2O3
    "Al2(SO4)3.18H2O": Coagulant("Al", 2, 6),
    "FeCl3": Coagulant("Fe", 1, 3),
    "FeCl3.6H2O": Coagulant("Fe", 1, 3),
    "Fe2(SO4)3": Coagulant("Fe", 2, 6),
    "FeSO4.7H2O": Coagulant("Fe", 1, 2),  # also when oxygen takes it to Fe(OH)3; 3 when chlorine does
}
BOUND_WATER = 3  # H2O per hydroxide in settled sludge: Al(OH)3.3H2O gives the 0.44 of LANG-1985
RATIOS_NTU = (0.7, 2.2)  # mg/L suspended solids per NTU, from memory


def alkalinity_used_mg_l(coagulant: str, dose_mg_l: Values, *, oxidised_by_chlorine: bool = False) -> Values:
    """Alkalinity taken in mg/L as CaCO3: 0.505 per mg of dry alum (14 H2O), 0.926 per mg FeCl3, 0.751 per mg Fe2(SO4)3.

    Ferrous sulfate takes 0.36 per mg, 0.54 when chlorine oxidises it. Dose 0 to 2000 mg/L; names in
    COAGULANTS.
    """
    kind = _kind(coagulant)
    errors.require("coagulant dose", dose_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    equivalents = kind.equivalents
    if oxidised_by_chlorine:
        if coagulant != "FeSO4.7H2O":
            raise errors.ChemistryError("only ferrous sulfate is oxidised by chlorine")
        equivalents = 3
    return dose_mg_l * equivalents * constants.CACO3_MG_MEQ / constants.molar_mass(coagulant)


def alkalinity_left_mg_l(coagulant: str, dose_mg_l: Values, alkalinity_mg_l_caco3: Values) -> Values:
    """Alkalinity after a dose; refused below 0, where the pH falls and the metal stays in solution: add alkali first."""
    left = alkalinity_mg_l_caco3 - alkalinity_used_mg_l(coagulant, dose_mg_l)
    errors.require("alkalinity left", left, "mg/L as CaCO3", 0.0, 10000.0, "alkalinity the coagulant takes")
    return left


def metal_mg_l(coagulant: str, dose_mg_l: Values) -> Values:
    """Aluminium or iron in a dose, mg/L: 0.0908 per mg of dry alum, 0.344 per mg FeCl3."""
    kind = _kind(coagulant)
    errors.require("coagulant dose", dose_mg_l, "mg/L", 0.0, _HIGHEST_MG_L, _SOURCE)
    return dose_mg_l * kind.atoms * constants.molar_mass(kind.metal) / constants.molar_mass(coagulant)


def hydroxide_sludge_mg_l(coagulant: str, dose_mg_l: Values, *, bound_water: bool = True) -> Values:
    """Dry metal hydroxide in mg/L: with three bound waters 0.444 per mg of dry alum and 2.88 per mg Fe;
    without, 0.262 and 1.914 (LANG-1985 mixes 0.44 with 1.9; CORNWELL 2.9)."""
    kind = _kind(coagulant)
    hydroxide = f"{kind.metal}(OH)3"
    grams = constants.molar_mass(hydroxide) + (BOUND_WATER * constants.molar_mass("H2O") if bound_water else 0.0)
    return metal_mg_l(coagulant, dose_mg_l) / constants.molar_mass(kind.metal) * grams


def sludge_mg_l(
    *,
    calcium_removed_mg_l_caco3: Values = 0.0,
    magnesium_removed_mg_l_caco3: Values = 0.0,
    alum_mg_l: Values = 0.0,
    iron_mg_l: Values = 0.0,
    suspended_solids_mg_l: Values = 0.0,
    additives_mg_l: Values = 0.0,
) -> Values:
    """Dry solids in mg/L (kg per ML): 2.0 Ca + 2.6 Mg (removed, as CaCO3) + 0.44 alum + 1.9 Fe + SS + additives.

    LANG-1985, second-hand. Alum as dry alum, iron as Fe. An estimate: weigh the sludge.
    """
    parts = {
        "calcium removed": (2.0, calcium_removed_mg_l_caco3),
        "magnesium removed": (2.6, magnesium_removed_mg_l_caco3),
        "alum": (0.44, alum_mg_l),
        "iron": (1.9, iron_mg_l),
        "suspended solids": (1.0, suspended_solids_mg_l),
        "additives": (1.0, additives_mg_l),
    }
    total: Values = 0.0
    for name, (share, amount) in parts.items():
        errors.require(name, amount, "mg/L", 0.0, 20000.0, "Lang et al. 1985")
        total = total + share * amount
    return total


def suspended_solids_mg_l(turbidity_ntu: Values, mg_l_per_ntu: Values = 1.5) -> Values:
    """Suspended solids estimated from turbidity; 1.5 mg/L per NTU in a textbook problem (opened), 0.7 to
    2.2 seen (from memory). The works' own ratio is better."""
    errors.require("turbidity", turbidity_ntu, "NTU", 0.0, 10000.0, _SOURCE)
    errors.require("solids per NTU", mg_l_per_ntu, "mg/L per NTU", 0.1, 5.0, _SOURCE)
    return turbidity_ntu * mg_l_per_ntu


def dry_alum_pct_from_al2o3(al2o3_pct: Values, dry_alum_al2o3_pct: float = 17.0) -> Values:
    """Weight % dry alum from weight % Al2O3, dry alum at 17 % Al2O3 (trade convention, WP-1018; opened)."""
    errors.require("Al2O3", al2o3_pct, "weight %", 0.0, dry_alum_al2o3_pct, "liquid alum")
    return al2o3_pct / dry_alum_al2o3_pct * 100.0


def _kind(coagulant: str) -> Coagulant:
    if coagulant not in COAGULANTS:
        raise errors.ChemistryError(f"no coagulant {coagulant!r}; known: {', '.join(COAGULANTS)}")
    return COAGULANTS[coagulant]
