"""Activity coefficients in dilute water: Davies, and the extended Debye-Hückel form PHREEQC uses.

Ionic strength I in mol per litre of water (1 L taken as 1 kg), 0 to 0.5; outside raises OutOfRange.
"""

import math

import numpy as np

from chemistry import errors, water
from chemistry.constants import Values

DAVIES = "davies"
PHREEQC = "phreeqc"
MODELS = (DAVIES, PHREEQC)
HIGHEST_IONIC_STRENGTH = 0.5

# Ion size a (angstrom) and b of log gamma = -A z^2 sqrt(I)/(1 + B a sqrt(I)) + b I, as in phreeqc.dat (key
# PHREEQC-DAT, after Truesdell and Jones 1974). A species not named here follows Davies in both models.
ION_SIZE_AND_B: dict[str, tuple[float, float]] = {
    "H+": (9.0, 0.0), "OH-": (3.5, 0.0), "Ca+2": (5.0, 0.165), "Mg+2": (5.5, 0.20), "Na+": (4.08, 0.082),
    "K+": (3.5, 0.015), "Cl-": (3.63, 0.017), "NO3-": (3.0, 0.0), "CO3-2": (5.4, 0.0), "HCO3-": (5.4, 0.0),
    "SO4-2": (5.0, -0.04), "CaHCO3+": (6.0, 0.0), "MgHCO3+": (4.0, 0.0), "MgOH+": (6.5, 0.0), "NaSO4-": (5.4, 0.0),
    "KSO4-": (5.4, 0.0),
}  # fmt: skip


def debye_huckel_a(temperature_c: Values) -> Values:
    """Debye-Hückel A, base 10, (kg/mol)^0.5, from density and permittivity of water; 0.510 at 25 °C.

    temperature_c: 0 to 100 °C; outside raises OutOfRange. Source: the Debye-Hückel limiting law, A = 1.82483e6
    rho^0.5 (eps T)^-1.5 (key DEBYE-HUCKEL; numerical factor from memory, checked against PHREEQC's own A).
    """
    return debye_huckel_a_and_b(temperature_c)[0]


def debye_huckel_b(temperature_c: Values) -> Values:
    """Debye-Hückel B, (kg/mol)^0.5 per angstrom; 0.329 at 25 °C.

    temperature_c: 0 to 100 °C; outside raises OutOfRange. Source: as :func:`debye_huckel_a`, B = 50.2916
    (rho / (eps T))^0.5.
    """
    return debye_huckel_a_and_b(temperature_c)[1]


def debye_huckel_a_and_b(temperature_c: Values) -> tuple[Values, Values]:
    """A and B of the two functions above, the properties of water computed once."""
    eps_t = water.relative_permittivity(temperature_c) * (temperature_c + 273.15)
    ratio = water.density_kg_m3(temperature_c) / (1000.0 * eps_t)
    root = np.sqrt(ratio) if isinstance(ratio, np.ndarray) else math.sqrt(ratio)
    return 1.82483e6 * root / eps_t, 50.2916 * root


def log_gamma_davies(temperature_c: Values, ionic_strength_mol_l: Values, charge: int) -> Values:
    """Log10 of the activity coefficient of an ion by Davies: -A z^2 (sqrt(I)/(1 + sqrt(I)) - 0.3 I).

    temperature_c: 0 to 100 °C; ionic_strength_mol_l: 0 to 0.5; charge: 0 to 4 (0 gives 0.1 I, PHREEQC's
    default). Outside raises OutOfRange. Source: Davies 1962 (key DAVIES-1962); from memory.
    """
    _require_ionic_strength(ionic_strength_mol_l, "Davies 1962")
    if charge == 0:
        return 0.1 * ionic_strength_mol_l + 0.0 * temperature_c
    errors.require("charge", float(abs(charge)), "", 0, 4, "Davies 1962")
    root = ionic_strength_mol_l**0.5
    return -debye_huckel_a(temperature_c) * charge**2 * (root / (1.0 + root) - 0.3 * ionic_strength_mol_l)


def log_gamma_extended(
    temperature_c: Values, ionic_strength_mol_l: Values, charge: int, ion_size_angstrom: Values, b: Values
) -> Values:
    """Log10 of the activity coefficient of an ion by the extended Debye-Hückel equation with its own a and b.

    temperature_c: 0 to 100 °C; ionic_strength_mol_l: 0 to 0.5; ion_size_angstrom: 2 to 12; b: -0.5 to 0.5.
    Outside raises OutOfRange. Source: Truesdell and Jones 1974 as in phreeqc.dat (key PHREEQC-DAT), see
    ION_SIZE_AND_B.
    """
    _require_ionic_strength(ionic_strength_mol_l, "Truesdell and Jones 1974")
    errors.require("ion size", ion_size_angstrom, "angstrom", 2, 12, "Truesdell and Jones 1974")
    errors.require("b", b, "", -0.5, 0.5, "Truesdell and Jones 1974")
    root = ionic_strength_mol_l**0.5
    size_term = 1.0 + debye_huckel_b(temperature_c) * ion_size_angstrom * root
    return -debye_huckel_a(temperature_c) * charge**2 * root / size_term + b * ionic_strength_mol_l


def ionic_strength_from_tds_mol_l(tds_mg_l: Values) -> Values:
    """Ionic strength guessed from total dissolved solids, I = 2.5e-5 TDS, mol/L.

    tds_mg_l: 0 to 1,000 mg/L; outside raises OutOfRange. Use only where the ions are unknown: on 36
    sodium-rich test waters it came out up to 1.9 times too high. Source: Langelier 1936 (key LANGELIER-1936);
    from memory.
    """
    errors.require("total dissolved solids", tds_mg_l, "mg/L", 0, 1000, "Langelier 1936")
    return 2.5e-5 * tds_mg_l


def ionic_strength_from_conductivity_mol_l(conductivity_us_cm: Values) -> Values:
    """Ionic strength guessed from conductivity at 25 °C, I = 1.6e-5 EC, mol/L.

    conductivity_us_cm: 0 to 30,000 µS/cm; outside raises OutOfRange. Use only where the ions are unknown: on
    the test waters it came out 1.1 to 1.6 times too high. Source: Russell 1976 (key RUSSELL-1976); from
    memory.
    """
    errors.require("conductivity", conductivity_us_cm, "µS/cm", 0, 30000, "Russell 1976")
    return 1.6e-5 * conductivity_us_cm


def require_model(activity: str) -> None:
    """Raise ChemistryError unless ``activity`` names one of MODELS."""
    if activity not in MODELS:
        raise errors.ChemistryError(f"activity must be one of {', '.join(MODELS)}, not {activity!r}")


def _require_ionic_strength(ionic_strength_mol_l: Values, source: str) -> None:
    errors.require("ionic strength", ionic_strength_mol_l, "mol/L", 0, HIGHEST_IONIC_STRENGTH, source)


LN10 = math.log(10.0)
