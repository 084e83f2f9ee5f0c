"""Oxidants and what they oxidise: ratios by electrons, demand, residual over time, chloramine ratio,
dechlorination.

mg A per mg B = (M_A / n_A) / (M_B / n_B), with n electrons per mole (definition; molar masses CIAAW-2021).
Iron and manganese count the dissolved part; sulfide is as S, nitrite and ammonia as N, chlorine as Cl2.
Real water holds organics and side reactions: the stoichiometric figure is where a jar test starts, not
where it ends.
"""

from typing import Any

import numpy as np

from chemistry import constants, errors

Values = Any  # a float or a numpy array

# Electrons an oxidant takes per mole: permanganate to MnO2, chlorine dioxide to chlorite.
OXIDANT_ELECTRONS: dict[str, float] = {
    "Cl2": 2,
    "NaOCl": 2,
    "Ca(OCl)2": 4,
    "H2O2": 2,
    "O3": 2,
    "O2": 4,
    "KMnO4": 3,
    "NaMnO4": 3,
    "ClO2": 1,
    "NH2Cl": 2,
}
CLO2_ELECTRONS_TO_CHLORIDE = 5

# What is oxidised: the formula its mg/L count and the electrons it gives per mole of that formula.
REDUCTANTS: dict[str, tuple[str, float]] = {
    "iron": ("Fe", 1),  # Fe(II) to Fe(III)
    "manganese": ("Mn", 2),  # Mn(II) to MnO2
    "sulfide_to_sulfur": ("S", 2),
    "sulfide_to_sulfate": ("S", 8),
    "nitrite": ("N", 2),  # to nitrate
    "ammonia_to_nitrogen": ("N", 3),  # breakpoint
    "chlorine": ("Cl2", 2),  # as the one that is quenched
}
MONOCHLORAMINE_RATIO = constants.molar_mass("Cl2") / constants.molar_mass("N")  # 5.06 mg Cl2 per mg N, 1 mol per mol
BREAKPOINT_RATIO = 1.5 * MONOCHLORAMINE_RATIO  # 7.59: 2 NH3 + 3 Cl2 = N2 + 6 HCl
BREAKPOINT_PRACTICE_RATIO = (10.0, 15.0)  # Applications of Environmental Calculations, ch. 4; opened

# Dechlorinating chemicals: moles of Cl2 one mole takes, and the field figure in mg per mg Cl2
# (AWWA-DECHLORINATION; None: no field figure opened). Thiosulfate ranges from 1/4 mol (to sulfate) to 2 mol
# (to tetrathionate) per mole of chlorine.
DECHLORINATING: dict[str, tuple[float, float | None]] = {
    "SO2": (1, None),
    "NaHSO3": (1, 1.61),
    "Na2S2O5": (2, 1.47),
    "Na2SO3": (1, 1.96),
    "C6H8O6": (1, 2.5),
    "H2O2": (1, None),
    "Na2S2O3": (0.5, 1.9),
    "Na2S2O3.5H2O": (0.5, None),
}
ALKALINITY_PER_CL2_STANDING = constants.CACO3_MG_MEQ / constants.molar_mass("Cl2")  # 0.71 while HOCl stands
ALKALINITY_PER_CL2_REDUCED = 2 * ALKALINITY_PER_CL2_STANDING  # 1.41 once it has reacted
_SOURCE = "oxidant arithmetic"


def oxidant_per_reductant_mg_mg(oxidant: str, reductant: str, *, oxidant_electrons: float | None = None) -> float:
    """mg of oxidant per mg of what it oxidises (names in REDUCTANTS), by electrons.

    Chlorine per iron 0.635, per manganese 1.29; permanganate per manganese 1.92; peroxide per iron 0.305.
    Give ``oxidant_electrons=5`` for chlorine dioxide that ends as chloride.
    """
    formula, given = _reductant(reductant)
    taken = _electrons(oxidant) if oxidant_electrons is None else oxidant_electrons
    return (constants.molar_mass(oxidant) / taken) / (constants.molar_mass(formula) / given)


def equivalent_mg_l(dose_mg_l: Values, from_oxidant: str, to_oxidant: str) -> Values:
    """The dose of another oxidant that takes the same electrons (chlorine to permanganate, ozone to
    peroxide ...).
    """
    errors.require("dose", dose_mg_l, "mg/L", 0.0, 1e6, _SOURCE)
    per = constants.molar_mass(from_oxidant) / _electrons(from_oxidant)
    return dose_mg_l / per * constants.molar_mass(to_oxidant) / _electrons(to_oxidant)


def demand_mg_l(
    oxidant: str,
    *,
    iron_mg_l: Values = 0.0,
    manganese_mg_l: Values = 0.0,
    sulfide_mg_l_s: Values = 0.0,
    nitrite_mg_l_n: Values = 0.0,
    ammonia_mg_l_n: Values = 0.0,
    sulfide_to_sulfate: bool = True,
) -> Values:
    """Stoichiometric demand in mg/L of the oxidant, summed over what is given (each 0 to 1000 mg/L; float
    or array).

    Ammonia counts for chlorine only (breakpoint, 7.59 mg/mg N; 10 to 15 in practice); other oxidants leave
    it. Iron(III) already oxidised, organics and pH limits (manganese by chlorine is slow below pH 9) are
    not in it.
    """
    sulfide = "sulfide_to_sulfate" if sulfide_to_sulfate else "sulfide_to_sulfur"
    parts = {
        "iron": iron_mg_l,
        "manganese": manganese_mg_l,
        sulfide: sulfide_mg_l_s,
        "nitrite": nitrite_mg_l_n,
    }
    if oxidant in ("Cl2", "NaOCl", "Ca(OCl)2"):
        parts["ammonia_to_nitrogen"] = ammonia_mg_l_n
    total = 0.0
    for name, concentration in parts.items():
        errors.require(name.replace("_", " "), concentration, "mg/L", 0.0, 1000.0, _SOURCE)
        total = total + concentration * oxidant_per_reductant_mg_mg(oxidant, name)
    return total


def dose_for_residual_mg_l(demand_mg_l: Values, target_residual_mg_l: Values) -> Values:
    """Dose = demand + residual wanted (MD0160; the demand belongs to one contact time and place)."""
    errors.require("demand", demand_mg_l, "mg/L", 0.0, 1000.0, _SOURCE)
    errors.require("target residual", target_residual_mg_l, "mg/L", 0.0, 100.0, _SOURCE)
    return demand_mg_l + target_residual_mg_l


def observed_demand_mg_l(dose_mg_l: Values, residual_mg_l: Values) -> Values:
    """Demand seen = dose - residual; a residual above the dose is refused (a wrong reading or another
    source).
    """
    demand = dose_mg_l - residual_mg_l
    errors.require("demand", demand, "mg/L", 0.0, np.inf, "dose less residual can't be below 0")
    return demand


def expected_residual_mg_l(dose_mg_l: Values, demand_mg_l: Values) -> Values:
    """Residual to expect = dose - demand, 0 where the demand takes all of it."""
    errors.require("dose", dose_mg_l, "mg/L", 0.0, 1000.0, _SOURCE)
    errors.require("demand", demand_mg_l, "mg/L", 0.0, 1000.0, _SOURCE)
    left = dose_mg_l - demand_mg_l
    return left * (left > 0)


def flow_weighted_demand_mg_l(doses_mg_l: Values, residuals_mg_l: Values, volumes_ml: Values) -> Values:
    """Demand over several days, each day weighted by its volume (ML); days given as equal-length
    sequences.
    """
    volumes = np.asarray(volumes_ml, dtype=float)
    errors.require("volume", volumes, "ML", 0.0, np.inf, _SOURCE)
    if volumes.sum() <= 0:
        raise errors.ChemistryError("no water was treated on those days")
    daily = observed_demand_mg_l(np.asarray(doses_mg_l, dtype=float), np.asarray(residuals_mg_l, dtype=float))
    return float((daily * volumes).sum() / volumes.sum())


def residual_after_mg_l(initial_mg_l: Values, minutes: Values, rate_per_min: Values) -> Values:
    """Residual after a time by first order: C0 exp(-k t)."""
    errors.require("rate", rate_per_min, "1/min", 0.0, 100.0, _SOURCE)
    errors.require("time", minutes, "min", 0.0, np.inf, _SOURCE)
    return initial_mg_l * np.exp(-rate_per_min * minutes)


def residual_after_parallel_mg_l(
    initial_mg_l: Values, minutes: Values, fast_share: Values, fast_rate_per_min: Values, slow_rate_per_min: Values
) -> Values:
    """Residual when a share decays fast and the rest slowly: C0 [x exp(-k1 t) + (1 - x) exp(-k2 t)].

    Haas & Karra 1984, parallel first-order model; from memory.
    """
    errors.require("fast share", fast_share, "", 0.0, 1.0, _SOURCE)
    fast = residual_after_mg_l(initial_mg_l, minutes, fast_rate_per_min)
    slow = residual_after_mg_l(initial_mg_l, minutes, slow_rate_per_min)
    return fast_share * fast + (1.0 - fast_share) * slow


def first_order_rate_per_min(initial_mg_l: Values, residual_mg_l: Values, minutes: Values) -> Values:
    """Rate constant from two residuals (each above 0) a time apart: ln(C0/C) / t."""
    errors.require("residual", residual_mg_l, "mg/L", 1e-9, np.inf, _SOURCE)
    errors.require("initial less residual", initial_mg_l - residual_mg_l, "mg/L", 0.0, np.inf, _SOURCE)
    errors.require("time", minutes, "min", 1e-9, np.inf, _SOURCE)
    return np.log(initial_mg_l / residual_mg_l) / minutes


def chlorine_to_nitrogen_stage(chlorine_mg_l: float, ammonia_mg_l_n: float) -> str:
    """Where a chlorine dose stands on the breakpoint curve: 'monochloramine' up to 5.06 mg/mg N,
    'breakpoint' to 7.59, 'free chlorine' beyond (theory; side reactions move the breakpoint to 10 to 15 in
    practice)."""
    errors.require("ammonia", ammonia_mg_l_n, "mg/L N", 0.0, 1000.0, _SOURCE)
    errors.require("chlorine", chlorine_mg_l, "mg/L", 0.0, 10000.0, _SOURCE)
    if chlorine_mg_l <= MONOCHLORAMINE_RATIO * ammonia_mg_l_n:
        return "monochloramine"
    return "breakpoint" if chlorine_mg_l < BREAKPOINT_RATIO * ammonia_mg_l_n else "free chlorine"


def dechlorination_mg_l(chemical: str, chlorine_mg_l: Values, *, field: bool = False) -> Values:
    """mg/L of a dechlorinating chemical (formulas in DECHLORINATING) for so much chlorine.

    By stoichiometry, or ``field`` by the figures of the AWWA pipeline guide, about 10 % higher (1.9 for
    thiosulfate at pH 7, against 0.56 to 4.46 in theory). A large overdose takes oxygen and lowers pH.
    """
    if chemical not in DECHLORINATING:
        raise errors.ChemistryError(f"no dechlorinating chemical {chemical!r}; known: {', '.join(DECHLORINATING)}")
    errors.require("chlorine", chlorine_mg_l, "mg/L", 0.0, 10000.0, _SOURCE)
    chlorine_mol, field_ratio = DECHLORINATING[chemical]
    if field:
        if field_ratio is None:
            raise errors.ChemistryError(f"no field figure for {chemical}")
        return chlorine_mg_l * field_ratio
    return chlorine_mg_l * constants.molar_mass(chemical) / constants.molar_mass("Cl2") / chlorine_mol


def hocl_fraction(ph: Values, temperature_c: Values) -> Values:
    """Share of free chlorine that is HOCl: 1 / (1 + 10^(pH - pKa)), pKa = 3000.00/T - 10.0686 + 0.0253 T.

    Morris 1966, J. Phys. Chem. 70:3798 (from memory); 0 to 40 °C, pH 4 to 11; activity neglected.
    """
    errors.require("pH", ph, "", 4.0, 11.0, "Morris 1966")
    errors.require("temperature", temperature_c, "°C", 0.0, 40.0, "Morris 1966")
    kelvin = constants.kelvin(temperature_c)
    pka = 3000.0 / kelvin - 10.0686 + 0.0253 * kelvin
    return 1.0 / (1.0 + 10.0 ** (ph - pka))


def alkalinity_used_mg_l(chlorine_mg_l: Values, *, reduced: bool) -> Values:
    """Alkalinity (mg/L CaCO3) taken by chlorine gas: 0.71 per mg while HOCl stands, 1.41 once it is
    reduced.
    """
    return chlorine_mg_l * (ALKALINITY_PER_CL2_REDUCED if reduced else ALKALINITY_PER_CL2_STANDING)


def _electrons(oxidant: str) -> float:
    if oxidant not in OXIDANT_ELECTRONS:
        raise errors.ChemistryError(f"no oxidant {oxidant!r}; known: {', '.join(OXIDANT_ELECTRONS)}")
    return OXIDANT_ELECTRONS[oxidant]


def _reductant(name: str) -> tuple[str, float]:
    if name not in REDUCTANTS:
        raise errors.ChemistryError(f"nothing known as {name!r} to oxidise; known: {', '.join(REDUCTANTS)}")
    return REDUCTANTS[name]
