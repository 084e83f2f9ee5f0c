"""Activity coefficients: limits, published coefficients, refusals."""

import numpy as np
import pytest

from chemistry import activity, errors
from tests.chemistry import tables


def test_nothing_dissolved_means_ideal():
    assert activity.log_gamma_davies(15.0, 0.0, 2) == 0.0
    assert activity.log_gamma_extended(15.0, 0.0, 2, 5.0, 0.165) == 0.0


@pytest.mark.parametrize(("ion", "charge", "column"), [("H+", 1, "gamma_h"), ("Ca+2", 2, "gamma_calcium"),
                                                        ("HCO3-", 1, "gamma_hco3"), ("CO3-2", 2, "gamma_co3")])  # fmt: skip
def test_phreeqc_activity_coefficients(ion, charge, column):
    table = tables.columns("speciation")
    size, b = activity.ION_SIZE_AND_B[ion]
    strength = table["ionic_strength_mol_l_phreeqc"]
    found = activity.log_gamma_extended(table["temperature_c"], strength, charge, size, b)
    assert 10.0**found == pytest.approx(table[f"{column}_phreeqc"], rel=1e-4)
    davies = activity.log_gamma_davies(table["temperature_c"], table["ionic_strength_mol_l_davies"], charge)
    assert 10.0**davies == pytest.approx(table[f"{column}_davies"], rel=1e-4)


def test_shortcuts_stay_within_their_stated_error():
    """The text says 1.1 to 1.9 and 1.1 to 1.6 times the true ionic strength at most on these waters."""
    table = tables.columns("speciation")
    mass = {"calcium": 40.078, "magnesium": 24.305, "sodium": 22.990, "chloride": 35.45, "sulfate": 96.06}
    solids = sum(table[f"{ion}_mmol_l"] * grams for ion, grams in mass.items()) + table["alkalinity_meq_l"] * 61.016
    keep = solids <= 1000.0
    ratio = activity.ionic_strength_from_tds_mol_l(solids[keep]) / table["ionic_strength_mol_l_phreeqc"][keep]
    assert ratio.min() > 0.9
    assert ratio.max() < 1.9
    assert activity.ionic_strength_from_conductivity_mol_l(500.0) == pytest.approx(0.008)


@pytest.mark.parametrize("ionic_strength", [-1e-9, 0.51, float("nan"), np.array([0.1, 0.6])])
def test_outside_is_refused(ionic_strength):
    with pytest.raises(errors.OutOfRange):
        activity.log_gamma_davies(15.0, ionic_strength, 1)
    with pytest.raises(errors.OutOfRange):
        activity.log_gamma_extended(15.0, ionic_strength, 1, 4.0, 0.0)


def test_an_unknown_model_is_refused():
    with pytest.raises(errors.ChemistryError, match="davies, phreeqc"):
        activity.require_model("pitzer")
