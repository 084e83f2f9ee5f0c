"""Carbonate equilibrium: speciation, dosing, saturation, precipitation potential, blending.

``carbonate.Water`` describes a water; the functions below are the ones other packages call.
"""

from chemistry.carbonate.dosing import (
    dose_for_target_ph,
    ph_after_dose,
    speciation_after_doses,
    water_after_doses,
)
from chemistry.carbonate.potential import PrecipitationPotential, at_temperature, blend, precipitation_potential
from chemistry.carbonate.saturation import Indices, indices, langelier_hand_formula
from chemistry.carbonate.shortcuts import co2_mg_l, co2_mg_l_usgs_shortcut
from chemistry.carbonate.speciation import Speciation, speciate
from chemistry.carbonate.waters import Water, water_from_mmol

__all__ = [
    "Indices",
    "PrecipitationPotential",
    "Speciation",
    "Water",
    "at_temperature",
    "blend",
    "co2_mg_l",
    "co2_mg_l_usgs_shortcut",
    "dose_for_target_ph",
    "indices",
    "langelier_hand_formula",
    "ph_after_dose",
    "precipitation_potential",
    "speciate",
    "speciation_after_doses",
    "water_after_doses",
    "water_from_mmol",
]
