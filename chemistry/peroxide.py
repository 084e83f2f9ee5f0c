"""Hydrogen peroxide: doses, quenching both ways, use with ozone, organics, interference and contamination.

Ratios are stoichiometric (definition, CIAAW-2021). Peroxide wrongly dosed leaves a residual that hides from
and falsifies the usual chlorine test: every dose here asks for a jar test and for the readings named below.

Cautions: peroxide over 8 % burns skin and eyes, feeds fire, and bursts closed vessels and lines when
metals, dirt or alkali get in: vented storage, no trapped volumes, clean gear, eye and hand protection, no
return of drawn product.
"""

from typing import Any

import numpy as np

from chemistry import constants, errors, oxidants

Values = Any  # a float or a numpy array

H2O2_G_MOL = constants.molar_mass("H2O2")
OXYGEN_PER_PEROXIDE = constants.molar_mass("O2") / 2 / H2O2_G_MOL  # 0.470: 2 H2O2 = O2 + 2 H2O
PEROXIDE_PER_OZONE = H2O2_G_MOL / 2 / constants.molar_mass("O3")  # 0.354: 2 O3 + H2O2 = 2 OH + 3 O2
OZONE_PRACTICE_RATIO = (
    0.3,
    0.6,
)  # quoted widely, from memory; 0.35 to 0.45 best in one study (abstract opened)
JAR_TEST = "Stoichiometric figure: practice needs a jar test with the works' own water."
# Organics whose full oxidation to CO2 and water is asked for most often (formula by name).
NAMED_ORGANICS: dict[str, str] = {
    "phenol": "C6H6O",
    "formaldehyde": "CH2O",
    "methanol": "CH4O",
    "ethanol": "C2H6O",
    "acetone": "C3H6O",
    "acetic acid": "C2H4O2",
    "formic acid": "CH2O2",
    "toluene": "C7H8",
    "benzene": "C6H6",
    "glucose": "C6H12O6",
    "oxalic acid": "C2H2O4",
    "MTBE": "C5H12O",
    "geosmin": "C12H22O",
    "2-methylisoborneol": "C11H20O",
}
_SOURCE = "peroxide arithmetic"


def dose_to_quench_chlorine_mg_l(chlorine_mg_l: Values) -> Values:
    """Peroxide (mg/L, 100 %) that takes free chlorine (mg/L Cl2): 0.480 mg/mg; H2O2 + HOCl = O2 + H2O + HCl.

    Free chlorine only: chloramines react slowly. The chlorine test can't show an overdose.
    """
    return oxidants.dechlorination_mg_l("H2O2", chlorine_mg_l)


def chlorine_to_quench_mg_l(peroxide_mg_l: Values) -> Values:
    """Chlorine (mg/L Cl2) that takes peroxide (mg/L): 2.084 mg/mg. Hard to hit in practice (LIU-2003)."""
    errors.require("peroxide", peroxide_mg_l, "mg/L", 0.0, 10000.0, _SOURCE)
    return peroxide_mg_l * constants.molar_mass("Cl2") / H2O2_G_MOL


def dose_with_ozone_mg_l(ozone_mg_l: Values, ratio_mg_mg: Values = PEROXIDE_PER_OZONE) -> Values:
    """Peroxide (mg/L) to go with ozone (mg/L): 0.354 mg/mg by 2 O3 + H2O2; a works sets its own, usually 0.3 to 0.6.

    Ratios outside 0.1 to 1.0 are refused: more peroxide only eats radicals.
    """
    errors.require("ozone", ozone_mg_l, "mg/L", 0.0, 100.0, _SOURCE)
    errors.require("peroxide to ozone", ratio_mg_mg, "mg/mg", 0.1, 1.0, "use with ozone")
    return ozone_mg_l * ratio_mg_mg


def organic_demand_mg_mg(name_or_formula: str) -> float:
    """mg of peroxide per mg of an organic for oxidation to CO2 and water, nitrogen to ammonia.

    CaHbOcNd gives 4a + b - 2c - 3d electrons, one H2O2 takes two (definition). Phenol: 14 mol per mol, 5.06
    mg/mg. Names in NAMED_ORGANICS or a formula of C, H, O, N. Peroxide alone oxidises few organics; iron,
    UV or ozone make the radicals.
    """
    formula = NAMED_ORGANICS.get(name_or_formula, name_or_formula)
    atoms = constants.composition(formula)
    if "C" not in atoms or set(atoms) - {"C", "H", "O", "N"}:
        raise errors.ChemistryError(f"an organic of C, H, O and N is expected, not {name_or_formula!r}")
    electrons = 4 * atoms["C"] + atoms.get("H", 0) - 2 * atoms.get("O", 0) - 3 * atoms.get("N", 0)
    if electrons <= 0:
        raise errors.ChemistryError(f"{name_or_formula} has nothing left to oxidise")
    return electrons / 2 * H2O2_G_MOL / constants.molar_mass(formula)


def oxygen_released_l(peroxide_kg: Values, temperature_c: Values = 20.0) -> Values:
    """Litres of oxygen at 1 atm that so much peroxide (kg of 100 %) gives off when it decomposes wholly.

    0.470 kg O2 per kg, ideal gas; 1 kg of 50 % gives about 177 L at 20 °C. Why no peroxide line may be
    closed at both ends.
    """
    errors.require("temperature", temperature_c, "°C", -20.0, 100.0, "ideal gas")
    moles = peroxide_kg * 1000.0 / H2O2_G_MOL / 2.0
    litres_per_mole = constants.GAS_CONSTANT_J_MOL_K * constants.kelvin(temperature_c) / 101.325
    return moles * litres_per_mole


def dpd_remark(peroxide_mg_l: float) -> str:
    """Why a chlorine or total oxidant reading by DPD can't be believed, '' when no peroxide is there.

    Peroxide oxidises the iodide of the total test and slowly the dye itself: readings come out high
    (LIU-2003).
    """
    errors.require("peroxide", peroxide_mg_l, "mg/L", 0.0, np.inf, _SOURCE)
    if peroxide_mg_l == 0:
        return ""
    return "hydrogen peroxide present: a DPD reading of chlorine is falsely high"


def contamination_remark(loss_per_year: float, temperature_rise_c: float = 0.0) -> str:
    """An alarm text when stored peroxide loses strength or warms as clean product does not, else ''.

    Clean product loses under 1 % a year (H2O2-MAKERS). Alarm from 5 % a year or from a rise of 3 °C above
    surroundings: common practice, no source.
    """
    if loss_per_year >= 0.05 or temperature_rise_c >= 3.0:
        return (
            "stored hydrogen peroxide decomposes faster than clean product: suspect contamination, "
            "keep people away, keep vents open, call the supplier"
        )
    return ""
