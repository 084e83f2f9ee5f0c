"""What a product contains: from its stated strength to kilograms active per kilogram, on any dose basis.

Strength bases: ``g_per_L_available_chlorine``, ``trade_pct`` (10 g/L available chlorine each), both needing
the density; ``weight_pct_available_chlorine``; ``weight_pct`` of the chemical or, with ``strength_as``, of
a formula such as CaO, Al2O3, Fe or PO4. Dose bases: ``product`` (as delivered), ``active`` (what the
strength is stated as), ``Cl2`` or any formula. Sources: molar masses (CIAAW-2021); strength terms
HYPO-TERMS; dilution CADPH.
"""

from collections.abc import Mapping, Sequence
from functools import lru_cache
from typing import Any

import numpy as np

from chemistry import constants, errors

Values = Any  # a float or a numpy array

CHLORINE_BASES = ("g_per_L_available_chlorine", "trade_pct", "weight_pct_available_chlorine")
STRENGTH_BASES = (*CHLORINE_BASES, "weight_pct")
_NEEDS_DENSITY = ("g_per_L_available_chlorine", "trade_pct")
_SOURCE = "a product's certificate"

# Moles of available Cl2 in one mole: each OCl takes two electrons, as Cl2 does (definition of available
# chlorine).
AVAILABLE_CL2_MOL: dict[str, float] = {
    "Cl2": 1,
    "NaOCl": 1,
    "HOCl": 1,
    "OCl": 1,
    "KOCl": 1,
    "Ca(OCl)2": 2,
    "LiOCl": 1,
}
# Equivalents of acid taken (+) or given (-) by one mole, for doses stated as CaCO3 (definition).
ALKALINITY_EQ_MOL: dict[str, float] = {
    "CaCO3": 2,
    "Ca(OH)2": 2,
    "CaO": 2,
    "NaOH": 1,
    "Na2CO3": 2,
    "NaHCO3": 1,
    "Mg(OH)2": 2,
    "MgO": 2,
    "KOH": 1,
    "H2SO4": -2,
    "HCl": -1,
}
# Which element two formulas are compared by when they share several; the first in this list wins.
_COUNTED_ELEMENTS = ("Al", "Fe", "Mn", "Cu", "Zn", "F", "P", "Si", "N", "Ca", "Mg", "S", "C", "Cl", "Na", "K")


@lru_cache(maxsize=1024)
def mass_ratio(from_formula: str, to_formula: str) -> float:
    """kg of ``to_formula`` that stand for 1 kg of ``from_formula``.

    Available chlorine compounds go by available chlorine (1 kg NaOCl = 0.9525 kg Cl2); anything to or from
    CaCO3 goes by alkalinity equivalents; the rest by the element they share (Al in alum and Al2O3, Ca in
    lime and CaO, P in H3PO4 and PO4). Raises ChemistryError when they have nothing to be counted by.
    """
    if from_formula == to_formula:
        return 1.0
    from_mass, to_mass = constants.molar_mass(from_formula), constants.molar_mass(to_formula)
    if from_formula in AVAILABLE_CL2_MOL and to_formula in AVAILABLE_CL2_MOL:
        return AVAILABLE_CL2_MOL[from_formula] / from_mass * to_mass / AVAILABLE_CL2_MOL[to_formula]
    if "CaCO3" in (from_formula, to_formula):
        equivalents = ALKALINITY_EQ_MOL.get(from_formula), ALKALINITY_EQ_MOL.get(to_formula)
        if equivalents[0] and equivalents[1]:
            return abs(equivalents[0] / from_mass * to_mass / equivalents[1])
    mine, theirs = constants.composition(from_formula), constants.composition(to_formula)
    # Available chlorine is an oxidising power: chloride or chlorite atoms don't make up for it.
    chlorine_differs = (from_formula in AVAILABLE_CL2_MOL) != (to_formula in AVAILABLE_CL2_MOL)
    for element in _COUNTED_ELEMENTS:
        if element == "Cl" and chlorine_differs:
            continue
        if element in mine and element in theirs:
            return mine[element] / from_mass * to_mass / theirs[element]
    raise errors.ChemistryError(f"{from_formula} can't be stated as {to_formula}: they share nothing to count by")


def strength_as_weight_fraction(strength: Values, strength_basis: str, density_kg_l: Values = None) -> Values:
    """kg of what the strength counts per kg of product; float or array.

    Valid: 0 to 100 weight %, 0 to 1000 g/L; a result above 1 kg/kg is refused. Needs the density (kg/L, 0.5
    to 2.5) for strengths per volume: 12.5 trade % at 1.16 kg/L is 10.8 weight %, not 12.5.
    """
    if strength_basis not in STRENGTH_BASES:
        raise errors.ChemistryError(f"unknown strength basis {strength_basis!r}; known: {', '.join(STRENGTH_BASES)}")
    if strength_basis in _NEEDS_DENSITY:
        if density_kg_l is None:
            raise errors.ChemistryError(f"{strength_basis} needs the product's density")
        errors.require("density", density_kg_l, "kg/L", 0.5, 2.5, _SOURCE)
        grams_per_litre = strength * 10.0 if strength_basis == "trade_pct" else strength
        fraction = grams_per_litre / (1000.0 * density_kg_l)
    else:
        fraction = strength / 100.0
    errors.require("strength", fraction, "kg/kg", 0.0, 1.0, _SOURCE)
    return fraction


def strength_from_weight_fraction(fraction: Values, strength_basis: str, density_kg_l: Values = None) -> Values:
    """The inverse of :func:`strength_as_weight_fraction`."""
    if strength_basis in _NEEDS_DENSITY and density_kg_l is None:
        raise errors.ChemistryError(f"{strength_basis} needs the product's density")
    if strength_basis == "g_per_L_available_chlorine":
        return fraction * 1000.0 * density_kg_l
    if strength_basis == "trade_pct":
        return fraction * 100.0 * density_kg_l
    if strength_basis in STRENGTH_BASES:
        return fraction * 100.0
    raise errors.ChemistryError(f"unknown strength basis {strength_basis!r}; known: {', '.join(STRENGTH_BASES)}")


def active_fraction(
    strength: Values,
    strength_basis: str,
    density_kg_l: Values,
    dose_basis: str,
    chemical: str,
    strength_as: str | None = None,
) -> Values:
    """kg of the dose basis per kg of product; float or array of strengths.

    125 g/L available chlorine at 1.20 kg/L: 0.10417 as Cl2, 0.10937 as NaOCl. Raises ChemistryError for a
    basis the product can't be stated in, OutOfRange for an impossible strength.
    """
    fraction = strength_as_weight_fraction(strength, strength_basis, density_kg_l)
    if dose_basis == "product":
        return fraction * 0.0 + 1.0
    counted = counted_formula(strength_basis, chemical, strength_as)
    if dose_basis in ("active", counted):
        return fraction
    return fraction * mass_ratio(counted, dose_basis)


def counted_formula(strength_basis: str, chemical: str, strength_as: str | None = None) -> str:
    """The formula a strength counts: Cl2 for the chlorine bases, else ``strength_as`` or the chemical itself."""
    if strength_basis in CHLORINE_BASES:
        if constants.is_formula(chemical) and chemical not in AVAILABLE_CL2_MOL:
            raise errors.ChemistryError(f"{chemical} has no available chlorine")
        return "Cl2"
    return strength_as or chemical


def fraction_of_product(product: Mapping[str, Any], dose_basis: str | None = None, strength: Values = None) -> Values:
    """:func:`active_fraction` of a product as stated (keys chemical, strength, strength_basis, strength_as,
    density_kg_per_L, dose_basis), with another dose basis or a newer strength where given."""
    return active_fraction(
        product["strength"] if strength is None else strength,
        product["strength_basis"],
        product.get("density_kg_per_L"),
        dose_basis or product["dose_basis"],
        product["chemical"],
        product.get("strength_as"),
    )


def dose_in_basis_mg_l(dose_mg_l: Values, of_formula: str, product: Mapping[str, Any]) -> Values:
    """mg/L in the product's own dose basis that carry ``dose_mg_l`` of a pure substance (``Cl2``, ``Ca(OH)2`` ...)."""
    basis = product["dose_basis"]
    if basis == "product":
        return dose_mg_l / fraction_of_product(product, of_formula)
    if basis == "active":
        basis = counted_formula(product["strength_basis"], product["chemical"], product.get("strength_as"))
    return dose_mg_l * mass_ratio(of_formula, basis)


def convert_strength(
    strength: Values, from_basis: str, to_basis: str, density_kg_l: Values, chemical: str, strength_as: str | None = None
) -> Values:
    """A strength on another basis, for the same product.

    weight % NaOCl = 1.050 x weight % available chlorine; weight % available chlorine = trade % / density.
    """
    fraction = strength_as_weight_fraction(strength, from_basis, density_kg_l)
    source = counted_formula(from_basis, chemical, strength_as)
    target = counted_formula(to_basis, chemical, strength_as)
    return strength_from_weight_fraction(fraction * mass_ratio(source, target), to_basis, density_kg_l)


def mix_lots(
    masses_kg: Sequence[float],
    strengths: Sequence[float],
    densities_kg_l: Sequence[float | None],
    strength_basis: str,
) -> tuple[float, float, float | None]:
    """(kg, strength, density) of lots poured together: active mass adds up, volumes too (common practice, no source).

    All strengths on one basis. Without a density for every lot the mixture has none, and a strength per
    volume is refused.
    """
    if not (len(masses_kg) == len(strengths) == len(densities_kg_l)) or not len(masses_kg):
        raise errors.ChemistryError("lots need a mass, a strength and a density (or None) each")
    masses = np.asarray(masses_kg, dtype=float)
    errors.require("lot", masses, "kg", 0.0, 1e9, _SOURCE)
    total = float(masses.sum())
    if total <= 0:
        raise errors.ChemistryError("lots of no mass have no strength")
    density = None
    known = [value for value in densities_kg_l if value is not None]
    if len(known) == len(masses):
        density = total / float((masses / np.asarray(known, dtype=float)).sum())
    active = sum(
        mass * strength_as_weight_fraction(strength, strength_basis, own_density)
        for mass, strength, own_density in zip(masses, strengths, densities_kg_l, strict=True)
    )
    return total, float(strength_from_weight_fraction(active / total, strength_basis, density)), density


def dilute(
    product_l: Values,
    density_kg_l: Values,
    strength: Values,
    strength_basis: str,
    water_l: Values,
    water_density_kg_l: float = 0.998,
) -> Values:
    """(litres, density, strength) after product and water are put together in a tank.

    Active mass stays; volumes are added (CADPH: strength by mass, density as the mean by volume); the few
    tenths of a % that mixing shrinks are neglected. Heat is not computed: acids and caustic need the
    maker's dilution procedure.
    """
    fraction = strength_as_weight_fraction(strength, strength_basis, density_kg_l)
    errors.require("product", product_l, "L", 0.0, 1e9, _SOURCE)
    errors.require("water", water_l, "L", 0.0, 1e9, _SOURCE)
    litres = product_l + water_l
    if np.any(np.asarray(litres) <= 0):
        raise errors.ChemistryError("nothing was put together")
    kilograms = product_l * density_kg_l + water_l * water_density_kg_l
    density = kilograms / litres
    diluted = product_l * density_kg_l * fraction / kilograms
    return litres, density, strength_from_weight_fraction(diluted, strength_basis, density)


def dilution_water_l(stock_l: Values, strength: Values, wanted_strength: Values) -> Values:
    """Water in litres to add to stock so that a strength per volume falls to the wanted one: V (C/C' - 1)."""
    errors.require("wanted share of the strength", wanted_strength / strength, "", 1e-9, 1.0, "dilution only weakens")
    return stock_l * (strength / wanted_strength - 1.0)


def stock_for_batch_l(batch_l: Values, strength: Values, wanted_strength: Values) -> Values:
    """Litres of stock in a batch of ``batch_l`` made to a wanted strength per volume: V' C'/C."""
    errors.require("wanted share of the strength", wanted_strength / strength, "", 0.0, 1.0, "dilution only weakens")
    return batch_l * wanted_strength / strength
