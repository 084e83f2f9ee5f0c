"""Softening: by stoichiometry, by equilibrium, recarbonation, split treatment, heating."""

from chemistry.softening.by_equilibrium import Softened, lime_for_hardness, soften
from chemistry.softening.heating import Heated, after_heating
from chemistry.softening.lime_soda import (
    CausticDose,
    LimeSodaDose,
    Removal,
    caustic_dose,
    lime_soda_dose,
    solids_mg_l,
)
from chemistry.softening.recarbonation import (
    Recarbonated,
    single_stage,
    single_stage_hand_dose,
    two_stage,
    two_stage_hand_dose,
)
from chemistry.softening.split import SplitTreatment, bypass_share, split_treatment

__all__ = [
    "CausticDose",
    "Heated",
    "LimeSodaDose",
    "Recarbonated",
    "Removal",
    "Softened",
    "SplitTreatment",
    "after_heating",
    "bypass_share",
    "caustic_dose",
    "lime_for_hardness",
    "lime_soda_dose",
    "single_stage",
    "single_stage_hand_dose",
    "soften",
    "solids_mg_l",
    "split_treatment",
    "two_stage",
    "two_stage_hand_dose",
]
