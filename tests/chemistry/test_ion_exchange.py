"""Ion exchange: published ratios, balances, refusals."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from chemistry import errors, ion_exchange
from tests.chemistry import tables

RATIOS = {
    "R22": lambda: ion_exchange.sodium_added_mg_l(1.0),
    "R23": lambda: ion_exchange.SALT_FLOOR_KG_PER_KG_CACO3,
    "R24": lambda: 7000.0 / ion_exchange.SALT_FLOOR_KG_PER_KG_CACO3,  # 7,000 grains are a pound
    "R25": lambda: ion_exchange.total_capacity_kg_m3(2.0) * 0.028316846592 / 64.79891e-6,
    "R26": lambda: 20000.0 * 64.79891e-6 / 0.028316846592,
}


@pytest.mark.parametrize("key", RATIOS)
def test_ratios_from_the_books(key):
    """Derived values to 0.1 %, published ones to 1 %; sources in the table."""
    table = tables.columns("stoichiometric-ratios")
    row = table["id"].index(key)
    assert RATIOS[key]() == pytest.approx(float(table["derived"][row]), rel=1e-3)
    assert RATIOS[key]() == pytest.approx(float(table["published"][row]), rel=1e-2)
    assert pytest.approx(RATIOS["R26"](), rel=1e-4) == ion_exchange.STANDARD_CAPACITY_KG_M3


@given(st.floats(50.0, 1000.0), st.floats(0.0, 1.0), st.floats(0.0, 20.0))
def test_bypass_blends_to_the_target(raw, part, leakage):
    target = leakage + part * (raw - leakage)
    share = ion_exchange.bypass_share(raw, target, leakage_mg_l_caco3=leakage)
    assert share * raw + (1.0 - share) * leakage == pytest.approx(target)


@given(st.floats(100.0, 800.0), st.floats(0.0, 90.0))
def test_salt_covers_what_is_exchanged(raw, target):
    found = ion_exchange.salt_need(
        resin_m3=2.0, capacity_kg_m3=48.0, salt_kg_m3=96.0, hardness_mg_l_caco3=raw, target_hardness_mg_l_caco3=target
    )
    regenerations_per_ml = 1000.0 / found.throughput_m3
    assert regenerations_per_ml * found.salt_kg_per_regeneration == pytest.approx(found.salt_mg_l)
    assert regenerations_per_ml * 2.0 * 48.0 == pytest.approx(raw - target)
    assert found.sodium_added_mg_l == pytest.approx(0.4594 * (raw - target), rel=1e-3)
    assert found.salt_mg_l >= 1.168 * (raw - target)


def test_soft_enough_needs_no_salt():
    found = ion_exchange.salt_need(
        resin_m3=2.0, capacity_kg_m3=48.0, salt_kg_m3=96.0, hardness_mg_l_caco3=np.array([60.0, 300.0]),
        target_hardness_mg_l_caco3=80.0,
    )  # fmt: skip
    assert found.salt_mg_l.tolist() == [0.0, pytest.approx(440.0)]
    assert found.throughput_m3[0] == np.inf


def test_working_capacity_only_between_its_points():
    assert ion_exchange.working_capacity_kg_m3(96.0) == 48.0
    assert ion_exchange.working_capacity_kg_m3(128.0) == 55.0
    with pytest.raises(errors.OutOfRange, match="two published points"):
        ion_exchange.working_capacity_kg_m3(200.0)


def test_brine_balances():
    found = ion_exchange.regenerant_brine(220.0, 10.0, 1071.0, hardness_taken_kg_caco3=96.0)
    assert found.brine_m3 * 1071.0 == pytest.approx(2200.0)
    assert found.water_kg == pytest.approx(1980.0)
    assert found.spent_sodium_chloride_kg == pytest.approx(220.0 - 96.0 * 1.1678, rel=1e-3)
    with pytest.raises(errors.ChemistryError, match="more than this salt"):
        ion_exchange.regenerant_brine(100.0, 10.0, 1071.0, hardness_taken_kg_caco3=96.0)


def test_bed_standards():
    """Recommended Standards: 3 ft, 7 gal/min/ft2 (17.1 m/h), 5 NTU."""
    good = ion_exchange.bed_check(0.92, 17.1, 5.0)
    assert (good.depth_ok, good.loading_ok, good.turbidity_ok) == (True, True, True)
    bad = ion_exchange.bed_check(0.9, 17.2, 5.1)
    assert (bad.depth_ok, bad.loading_ok, bad.turbidity_ok) == (False, False, False)


@pytest.mark.parametrize(
    "call",
    [
        lambda: ion_exchange.salt_efficiency_kg_per_kg(30.0, 48.0),
        lambda: ion_exchange.throughput_m3(2.0, 48.0, 20.0, leakage_mg_l_caco3=20.0),
        lambda: ion_exchange.throughput_m3(-1.0, 48.0, 200.0),
        lambda: ion_exchange.throughput_m3(2.0, 48.0, float("nan")),
        lambda: ion_exchange.bypass_share(200.0, 3.0, leakage_mg_l_caco3=5.0),
        lambda: ion_exchange.total_capacity_kg_m3(5.0),
        lambda: ion_exchange.regenerant_brine(100.0, 30.0, 1071.0),
    ],
)
def test_nonsense_is_refused(call):
    with pytest.raises(errors.ChemistryError):
        call()
