"""The same waters through PHREEQC itself, where its Python package is installed; the tables in data/ always count.

Two databases: phreeqc.dat as shipped, and a copy without its ion sizes, in which every ion follows Davies.
"""

import re
from pathlib import Path

import numpy as np
import pytest

from chemistry import carbonate, softening

phreeqpython = pytest.importorskip(
    "phreeqpython", reason="PHREEQC IS NOT INSTALLED: no live comparison was made, only the tables"
)
WATERS = 60
IONS = {"calcium": "Ca", "magnesium": "Mg", "sodium": "Na", "potassium": "K", "chloride": "Cl", "sulfate": "S(6)"}
BRUCITE = "PHASES\nBrucite\n Mg(OH)2 + 2H+ = Mg+2 + 2H2O\n -log_k 16.84\n -delta_h -27.1 kcal\n"


@pytest.fixture(scope="module", params=["phreeqc", "davies"])
def live(request, tmp_path_factory):
    """(name of the activity model, PHREEQC with the same one)."""
    shipped = Path(phreeqpython.__file__).parent / "database" / "phreeqc.dat"
    text = shipped.read_text(encoding="utf-8", errors="replace")
    if request.param == "davies":
        text = re.sub(r"(?m)^\s*-gamma\b.*$", "", text)
    place = tmp_path_factory.mktemp("database")
    (place / "model.dat").write_text(text.replace("\nEXCHANGE_MASTER_SPECIES", f"\n{BRUCITE}\nEXCHANGE_MASTER_SPECIES", 1))
    return request.param, phreeqpython.PhreeqPython(database="model.dat", database_directory=place)


@pytest.fixture(scope="module")
def table():
    """Amounts of random waters, mmol/L, meq/L, °C."""
    rng = np.random.default_rng(20240229)
    return {
        "temperature_c": rng.uniform(1.0, 35.0, WATERS),
        "ph": rng.uniform(6.2, 9.6, WATERS),
        "alkalinity_meq_l": rng.uniform(0.4, 7.0, WATERS),
        "calcium_mmol_l": rng.uniform(0.1, 4.0, WATERS),
        "magnesium_mmol_l": rng.uniform(0.02, 1.5, WATERS),
        "sodium_mmol_l": rng.uniform(0.02, 10.0, WATERS),
        "potassium_mmol_l": rng.uniform(0.01, 0.5, WATERS),
        "chloride_mmol_l": rng.uniform(0.02, 10.0, WATERS),
        "sulfate_mmol_l": rng.uniform(0.02, 3.0, WATERS),
    }


def _solution(phreeqc, table, index):
    composition = {
        "units": "mmol/kgw",
        "temp": table["temperature_c"][index],
        "pH": table["ph"][index],
        "Alkalinity": table["alkalinity_meq_l"][index],
    }
    for ion, symbol in IONS.items():
        composition[symbol] = table[f"{ion}_mmol_l"][index]
    return phreeqc.add_solution(composition)


def test_saturation_and_carbon(live, table):
    model, phreeqc = live
    found = carbonate.speciate(carbonate.water_from_mmol(**table), activity=model)
    for index in range(WATERS):
        solution = _solution(phreeqc, table, index)
        assert found.si_calcite[index] == pytest.approx(solution.si("Calcite"), abs=0.002)
        assert found.si_aragonite[index] == pytest.approx(solution.si("Aragonite"), abs=0.002)
        assert found.ionic_strength_mol_l[index] == pytest.approx(solution.I, rel=1e-3)
        assert found.dic_mmol_l[index] == pytest.approx(solution.total_element("C"), rel=2e-3)
        solution.forget()


@pytest.mark.parametrize(
    ("chemical", "parts", "grams"),
    [
        ("NaOH", {"NaOH": 1}, 39.997),
        ("Ca(OH)2", {"Ca(OH)2": 1}, 74.092),
        ("Na2CO3", {"Na2CO3": 1}, 105.988),
        ("CO2", {"CO2": 1}, 44.009),
        ("HCl", {"HCl": 1}, 36.458),
        ("H2SO4", {"H2SO4": 1}, 98.072),
    ],
)
def test_ph_after_a_dose(live, table, chemical, parts, grams):
    model, phreeqc = live
    mmol = np.linspace(0.02, 0.35, WATERS)
    after = carbonate.ph_after_dose(carbonate.water_from_mmol(**table), chemical, mmol * grams, activity=model)
    for index in range(WATERS):
        solution = _solution(phreeqc, table, index)
        solution.change({name: count * mmol[index] for name, count in parts.items()})
        assert after[index] == pytest.approx(solution.pH, abs=0.003)
        solution.forget()


def test_precipitation_potential(live, table):
    model, phreeqc = live
    found = carbonate.precipitation_potential(carbonate.water_from_mmol(**table), activity=model)
    for index in range(WATERS):
        solution = _solution(phreeqc, table, index)
        before = solution.total_element("Ca")
        solution.equalize(["Calcite"], [0], [10])
        potential = (before - solution.total_element("Ca")) * 100.086
        assert found.ccpp_mg_l[index] == pytest.approx(potential, abs=0.2, rel=0.005)
        assert found.ph_at_balance[index] == pytest.approx(solution.pH, abs=0.003)
        solution.forget()


def test_softening(live, table):
    model, phreeqc = live
    lime = np.linspace(0.2, 4.5, WATERS)
    found = softening.soften(
        carbonate.water_from_mmol(**table), lime_ca_oh_2_mg_l=lime * 74.092, soda_na2co3_mg_l=0.4 * 105.988, activity=model
    )
    for index in range(WATERS):
        solution = _solution(phreeqc, table, index)
        solution.change({"Ca(OH)2": lime[index], "Na2CO3": 0.4})
        solution.equalize(["Calcite", "Brucite"], [0, 0], [0, 0])
        assert found.ph[index] == pytest.approx(solution.pH, abs=0.005)
        calcium = solution.total_element("Ca") * 100.086
        assert found.calcium_hardness_mg_l_caco3[index] == pytest.approx(calcium, abs=0.3)
        magnesium = solution.total_element("Mg") * 100.086
        assert found.magnesium_hardness_mg_l_caco3[index] == pytest.approx(magnesium, abs=0.05, rel=0.01)
        solution.forget()
