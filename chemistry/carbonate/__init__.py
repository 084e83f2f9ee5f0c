"""Carbonate equilibrium: speciation, dosing, saturation, precipitation potential, blending.

``carbonate.Water`` describes a water; the functions below are the ones other packages call.
"""

from chemistry.carbonate.dosing import (
    dose_for_target_ph,
    ph_after_dose,
    speciation_after_doses,
    water_after_doses,
)
from chemistry.carbonate.shortcuts import co2_mg_l, co2_mg_l_usgs_shortcut
from chemistry.carbonate.speciation import Speciation, speciate
from chemistry.carbonate.waters import Water, water_from_mmol

__all__ = [
    "Speciation",
    "Water",
    "co2_mg_l",
    "co2_mg_l_usgs_shortcut",
    "dose_for_target_ph",
    "ph_after_dose",
    "speciate",
    "speciation_after_doses",
    "water_after_doses",
    "water_from_mmol",
]
