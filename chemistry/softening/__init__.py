"""Softening: by stoichiometry, by equilibrium, recarbonation, split treatment, heating."""

from chemistry.softening.lime_soda import CausticDose, LimeSodaDose, Removal, caustic_dose, lime_soda_dose, solids_mg_l

__all__ = ["CausticDose", "LimeSodaDose", "Removal", "caustic_dose", "lime_soda_dose", "solids_mg_l"]
