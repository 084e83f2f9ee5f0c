"""Saturation of a water with calcium carbonate: the index, pHs, Ryznar, and Langelier's hand formula."""

from dataclasses import dataclass

import numpy as np

from chemistry import activity as activities
from chemistry import elementwise, errors, hardness
from chemistry.carbonate import constants_of_equilibrium, speciation
from chemistry.constants import Values


@dataclass(frozen=True, slots=True)
class Indices:
    """si_calcite: log10 of supersaturation, 0 is balance, negative dissolves; ph_s: pH less that; ryznar: 2
    pHs - pH.

    What an index means for a given pipe is not a law: it says which way the reaction runs, not how fast or
    how much.
    """

    ph: Values
    si_calcite: Values
    ph_s: Values
    ryznar: Values


def indices(water: Values, *, activity: str = activities.DAVIES) -> Indices:
    """:class:`Indices` of a Water from its full speciation; calcium must be present, else ChemistryError.

    activity, ranges and errors as for speciation.speciate. Source: SI = pH - pHs with free ions (Standard
    Methods 2330 B, key SM-2330); Ryznar 1944 (key RYZNAR-1944); both from memory.
    """
    found = speciation.speciate(water, activity=activity)
    if np.any(np.isneginf(found.si_calcite)):
        raise errors.ChemistryError("a water without calcium has no saturation index")
    ph_s = found.ph - found.si_calcite
    return Indices(ph=found.ph, si_calcite=found.si_calcite, ph_s=ph_s, ryznar=2.0 * ph_s - found.ph)


def langelier_hand_formula(
    temperature_c: Values,
    ph: Values,
    calcium_hardness_mg_l_caco3: Values,
    alkalinity_mg_l_caco3: Values,
    ionic_strength_mol_l: Values,
) -> Indices:
    """:class:`Indices` by pHs = pK2 - pKs + p[Ca] + p[HCO3] + 5 pf, with total calcium and total alkalinity.

    temperature_c: 0 to 80 °C; ph: 6 to 8.5 (above that carbonate and ion pairs spoil it: up to 0.5 in the
    index); calcium hardness 1 to 5,000, alkalinity 1 to 5,000 mg/L as CaCO3; ionic strength 0 to 0.5 mol/L.
    Outside raises OutOfRange. Below pH 8.5 it comes out up to 0.04 above the full calculation. Source:
    Langelier 1936 as in Standard Methods 2330 B (key SM-2330); from memory.
    """
    source = "Standard Methods 2330 B"
    errors.require("pH", ph, "", 6.0, 8.5, source)
    errors.require("calcium hardness", calcium_hardness_mg_l_caco3, "mg/L CaCO3", 1.0, 5000.0, source)
    errors.require("alkalinity", alkalinity_mg_l_caco3, "mg/L CaCO3", 1.0, 5000.0, source)
    log10 = _log10
    p_f = -activities.log_gamma_davies(temperature_c, ionic_strength_mol_l, 1)
    pk2 = -constants_of_equilibrium.log_k("k2", temperature_c)
    pks = -constants_of_equilibrium.log_k("calcite", temperature_c)
    p_calcium = -log10(calcium_hardness_mg_l_caco3 * (1e-3 / hardness.CACO3_G_MOL))
    p_bicarbonate = -log10(alkalinity_mg_l_caco3 * (1e-3 / hardness.CACO3_MG_MEQ))
    ph_s = pk2 - pks + p_calcium + p_bicarbonate + 5.0 * p_f
    return Indices(ph=ph, si_calcite=ph - ph_s, ph_s=ph_s, ryznar=2.0 * ph_s - ph)


def _log10(value: Values) -> Values:
    return elementwise.number(np.log10(value))
