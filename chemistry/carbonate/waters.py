"""A water: temperature, two of pH, alkalinity and inorganic carbon, and its ions."""

import math
from dataclasses import dataclass, fields, replace

import numpy as np

from chemistry import constants, elementwise, errors
from chemistry.carbonate import constants_of_equilibrium
from chemistry.constants import Values

_MILLIMOLE_FIELDS = {
    "calcium_mg_l": "Ca", "magnesium_mg_l": "Mg", "sodium_mg_l": "Na", "potassium_mg_l": "K",
    "chloride_mg_l": "Cl", "sulfate_mg_l": "SO4", "nitrate_mg_l": "NO3", "fluoride_mg_l": "F",
}  # fmt: skip
_MASS_G_MOL = {field: constants.molar_mass(formula) for field, formula in _MILLIMOLE_FIELDS.items()}
CACO3_MG_MEQ = constants.molar_mass("CaCO3") / 2.0
CL2_G_MOL = constants.molar_mass("Cl2")

# What the equilibrium model is asked to bear; wider than any water worth treating, narrower than Davies'
# limit.
_HIGHEST_MG_L = {
    "calcium_mg_l": 2000.0, "magnesium_mg_l": 1000.0, "sodium_mg_l": 5000.0, "potassium_mg_l": 1000.0,
    "chloride_mg_l": 8000.0, "sulfate_mg_l": 5000.0, "nitrate_mg_l": 1000.0, "fluoride_mg_l": 50.0,
    "free_chlorine_mg_l": 100.0,
}  # fmt: skip
_LIMIT_SOURCE = "limit of this model"
_LEAST_CARBON_MMOL_L = 1e-9  # the solver works in logarithms: none at all is taken as this


@dataclass(frozen=True, slots=True)
class Water:
    """One water (numbers) or many (arrays that broadcast together).

    temperature_c: 0 to 80 °C. Two of: ph (3 to 13), alkalinity_mg_l_caco3 (total, -2,000 to 10,000),
    dic_mmol_l (dissolved inorganic carbon, 0 to 1,000). With pH and one other the third follows; with
    alkalinity and DIC the pH does. Ions in mg/L of the ion (nitrate as NO3); free_chlorine_mg_l as Cl2 enters
    the alkalinity as hypochlorite. Ions that are not given count as absent: this lowers the ionic strength,
    and with it the index by up to 0.1. Outside these ranges, or not a number, raises OutOfRange; not exactly
    two of the three raises ChemistryError.
    """

    temperature_c: Values
    ph: Values = None
    alkalinity_mg_l_caco3: Values = None
    dic_mmol_l: Values = None
    calcium_mg_l: Values = 0.0
    magnesium_mg_l: Values = 0.0
    sodium_mg_l: Values = 0.0
    potassium_mg_l: Values = 0.0
    chloride_mg_l: Values = 0.0
    sulfate_mg_l: Values = 0.0
    nitrate_mg_l: Values = 0.0
    fluoride_mg_l: Values = 0.0
    free_chlorine_mg_l: Values = 0.0

    def __post_init__(self) -> None:
        given = [n for n in ("ph", "alkalinity_mg_l_caco3", "dic_mmol_l") if getattr(self, n) is not None]
        if len(given) != 2:
            raise errors.ChemistryError("a water needs exactly two of ph, alkalinity_mg_l_caco3 and dic_mmol_l")
        for name in _FIELD_NAMES:
            value = getattr(self, name)
            kind = type(value)
            if value is None or kind is float:
                continue
            if kind is not np.ndarray or value.dtype != np.float64:
                value = np.asarray(value, dtype=float)
                object.__setattr__(self, name, float(value) if value.ndim == 0 else value)
        constants_of_equilibrium.require_temperature(self.temperature_c)
        if self.ph is not None:
            errors.require("pH", self.ph, "", 3.0, 13.0, _LIMIT_SOURCE)
        if self.alkalinity_mg_l_caco3 is not None:
            errors.require("alkalinity", self.alkalinity_mg_l_caco3, "mg/L CaCO3", -2000.0, 10000.0, _LIMIT_SOURCE)
        if self.dic_mmol_l is not None:
            errors.require("inorganic carbon", self.dic_mmol_l, "mmol/L", 0.0, 1000.0, _LIMIT_SOURCE)
        for name, highest in _HIGHEST_MG_L.items():
            value = getattr(self, name)
            if value.__class__ is float and 0.0 <= value <= highest:
                continue
            errors.require(name.removesuffix("_mg_l").replace("_", " "), value, "mg/L", 0.0, highest, _LIMIT_SOURCE)

    @property
    def is_scalar(self) -> bool:
        """True when every field is a single number."""
        return not any(isinstance(getattr(self, name), np.ndarray) for name in _FIELD_NAMES)

    def change(self, **values: Values) -> "Water":
        """The same water with some fields replaced. ``water.change(ph=None, dic_mmol_l=2.1)`` swaps the given
        pair."""
        return replace(self, **values)


_FIELD_NAMES = tuple(field.name for field in fields(Water))


@dataclass(slots=True)
class Totals:
    """What the solver works on: totals in mol/L, alkalinity in eq/L (1 L is taken as 1 kg of water)."""

    temperature_c: Values
    h: Values  # activity of H+, or None when it is to be found
    alkalinity: Values  # or None
    carbon: Values  # or None
    calcium: Values
    magnesium: Values
    sodium: Values
    potassium: Values
    chloride: Values
    sulfate: Values
    other_charge: Values  # monovalent anions that take no part: nitrate, fluoride
    free_chlorine: Values

    def with_carbon_system(self, *, h: Values = None, alkalinity: Values = None, carbon: Values = None) -> "Totals":
        """The same ions with another pair of pH, alkalinity, carbon."""
        return replace(self, h=h, alkalinity=alkalinity, carbon=carbon)


def totals(water: Water) -> "Totals":
    """:class:`Totals` of a :class:`Water`."""
    exp = math.exp if type(water.ph) is float else np.exp
    mass = _MASS_G_MOL
    return Totals(
        temperature_c=water.temperature_c,
        h=None if water.ph is None else exp(-_LN10 * water.ph),
        alkalinity=None if water.alkalinity_mg_l_caco3 is None else water.alkalinity_mg_l_caco3 * (1e-3 / CACO3_MG_MEQ),
        carbon=None if water.dic_mmol_l is None else elementwise.most(water.dic_mmol_l, _LEAST_CARBON_MMOL_L) * 1e-3,
        calcium=water.calcium_mg_l * (1e-3 / mass["calcium_mg_l"]),
        magnesium=water.magnesium_mg_l * (1e-3 / mass["magnesium_mg_l"]),
        sodium=water.sodium_mg_l * (1e-3 / mass["sodium_mg_l"]),
        potassium=water.potassium_mg_l * (1e-3 / mass["potassium_mg_l"]),
        chloride=water.chloride_mg_l * (1e-3 / mass["chloride_mg_l"]),
        sulfate=water.sulfate_mg_l * (1e-3 / mass["sulfate_mg_l"]),
        other_charge=water.nitrate_mg_l * (1e-3 / mass["nitrate_mg_l"]) + water.fluoride_mg_l * (1e-3 / mass["fluoride_mg_l"]),
        free_chlorine=water.free_chlorine_mg_l * (1e-3 / CL2_G_MOL),
    )


def water_of_totals(base: Water, found: Totals, *, ph: Values = None) -> "Water":
    """A :class:`Water` with the ions, alkalinity and carbon of ``found``; nitrate and fluoride as in
    ``base``.

    With ``ph`` the pair is pH and alkalinity, else alkalinity and carbon.
    """
    mass = _MASS_G_MOL
    return replace(
        base,
        temperature_c=found.temperature_c,
        ph=ph,
        alkalinity_mg_l_caco3=found.alkalinity * (1e3 * CACO3_MG_MEQ),
        dic_mmol_l=None if ph is not None else found.carbon * 1e3,
        calcium_mg_l=found.calcium * (1e3 * mass["calcium_mg_l"]),
        magnesium_mg_l=found.magnesium * (1e3 * mass["magnesium_mg_l"]),
        sodium_mg_l=found.sodium * (1e3 * mass["sodium_mg_l"]),
        potassium_mg_l=found.potassium * (1e3 * mass["potassium_mg_l"]),
        chloride_mg_l=found.chloride * (1e3 * mass["chloride_mg_l"]),
        sulfate_mg_l=found.sulfate * (1e3 * mass["sulfate_mg_l"]),
        free_chlorine_mg_l=found.free_chlorine * (1e3 * CL2_G_MOL),
    )


def water_from_mmol(
    *,
    temperature_c: Values,
    ph: Values = None,
    alkalinity_meq_l: Values = None,
    dic_mmol_l: Values = None,
    calcium_mmol_l: Values = 0.0,
    magnesium_mmol_l: Values = 0.0,
    sodium_mmol_l: Values = 0.0,
    potassium_mmol_l: Values = 0.0,
    chloride_mmol_l: Values = 0.0,
    sulfate_mmol_l: Values = 0.0,
    nitrate_mmol_l: Values = 0.0,
) -> Water:
    """A :class:`Water` from an analysis in mmol/L (alkalinity in meq/L); ranges as for Water."""
    mass = _MASS_G_MOL
    return Water(
        temperature_c=temperature_c,
        ph=ph,
        alkalinity_mg_l_caco3=None if alkalinity_meq_l is None else alkalinity_meq_l * CACO3_MG_MEQ,
        dic_mmol_l=dic_mmol_l,
        calcium_mg_l=calcium_mmol_l * mass["calcium_mg_l"],
        magnesium_mg_l=magnesium_mmol_l * mass["magnesium_mg_l"],
        sodium_mg_l=sodium_mmol_l * mass["sodium_mg_l"],
        potassium_mg_l=potassium_mmol_l * mass["potassium_mg_l"],
        chloride_mg_l=chloride_mmol_l * mass["chloride_mg_l"],
        sulfate_mg_l=sulfate_mmol_l * mass["sulfate_mg_l"],
        nitrate_mg_l=nitrate_mmol_l * mass["nitrate_mg_l"],
    )


_LN10 = math.log(10.0)
