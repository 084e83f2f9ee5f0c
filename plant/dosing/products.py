"""A stated product, as reckoning needs it: fractions, dose bases, and the law by which it loses strength."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable

from chemistry import decay as chemistry_decay
from chemistry import errors, products, units
from plant.dosing.contents import Contents, Decay, no_decay
from plant.works.described import Product

USUAL_STORE_C = 20.0
"""Taken where neither a reading nor the statement gives the store's temperature (common practice, no source)."""


class NoDensity(ValueError):
    """A volume of this product can't be turned into a mass: no density is stated."""


def fraction(
    product: Product, strength: float | None = None, basis: str | None = None, density_kg_l: float | None = None
) -> float:
    """kg of the chemical, as the product's stated strength counts it, per kg of product.

    ``strength`` and ``basis`` are a certificate's or a test's; without them the stated ones hold. Raises ChemistryError.
    """
    basis = basis or product.strength_basis
    density = density_kg_l or product.density_kg_per_L
    own = products.counted_formula(product.strength_basis, product.chemical, product.strength_as)
    as_form = product.strength_as if basis == "weight_pct" else None
    counted = products.counted_formula(basis, product.chemical, as_form)
    found = products.strength_as_weight_fraction(product.strength if strength is None else strength, basis, density)
    return float(found if counted == own else found * products.mass_ratio(counted, own))


def strength(product: Product, contents: Contents) -> float:
    """The strength of some contents, on the product's own basis."""
    density = contents.density_kg_l or product.density_kg_per_L
    return float(products.strength_from_weight_fraction(contents.fraction, product.strength_basis, density))


def active_kg(product: Product, product_kg: float, chemical_kg: float) -> float:
    """Mass in the product's dose basis, from the mass of product and of its chemical."""
    if product.dose_basis == "product":
        return product_kg
    own = products.counted_formula(product.strength_basis, product.chemical, product.strength_as)
    if product.dose_basis in ("active", own):
        return chemical_kg
    return chemical_kg * products.mass_ratio(own, product.dose_basis)


def quantity_kg(quantity: float, unit: str, density_kg_l: float | None) -> float:
    """A quantity as delivered, in kg. Raises NoDensity for a volume without a density."""
    if units.kind_of(unit) == "mass":
        return float(units.mass_kg(quantity, unit))
    if not density_kg_l:
        raise NoDensity(f"{quantity:g} {unit} can't be turned into a mass: no density is stated")
    return float(units.volume_l(quantity, unit)) * density_kg_l


def decay_of(product: Product, temperature_c: Callable[[dt.datetime], float]) -> Decay:
    """The law by which this product loses strength in store.

    Hypochlorite: second order, Adam & Gordon 1999 (chemistry.decay). Hydrogen peroxide: first order. Others keep.
    """
    own = products.counted_formula(product.strength_basis, product.chemical, product.strength_as)
    if product.chemical == "NaOCl":
        to_cl2 = 1.0 if own == "Cl2" else products.mass_ratio(own, "Cl2")

        def hypochlorite(contents: Contents, to: dt.datetime) -> float:
            per_litre = to_cl2 * 1000.0 * (contents.density_kg_l or product.density_kg_per_L or 1.2)
            days = (to - contents.at).total_seconds() / 86400
            before = contents.fraction * per_litre
            after = chemistry_decay.hypochlorite_strength_after(
                before, [temperature_c(contents.at)], [days], fresh_g_l=contents.fresh_fraction * per_litre, extrapolate=True
            )
            return float(after) / per_litre

        return _guarded(hypochlorite)
    if product.chemical == "H2O2":

        def peroxide(contents: Contents, to: dt.datetime) -> float:
            days = (to - contents.at).total_seconds() / 86400
            return float(chemistry_decay.peroxide_strength_after(contents.fraction, [temperature_c(contents.at)], [days]))

        return _guarded(peroxide)
    return no_decay


def _guarded(law: Decay) -> Decay:
    """Outside a law's range the strength is carried on unchanged; the comparison's remarks name the product's test instead."""

    def within(contents: Contents, to: dt.datetime) -> float:
        try:
            return law(contents, to)
        except errors.ChemistryError:
            return contents.fraction

    return within
