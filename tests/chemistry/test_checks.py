"""The table of checks keeps its promises: each worst difference is measured again here or in the test named."""

import csv
from pathlib import Path

import numpy as np
import periodictable
import pytest

from chemistry import checks, constants, decay, densities, disinfection, errors, sources, vessels
from chemistry.disinfection import regressions

DATA = Path(__file__).parent / "data"
TABLES = Path(constants.__file__).parent / "tables"


def _rows(path):
    with path.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def _molar_masses():
    return max(
        abs(weight / getattr(periodictable, element).mass - 1) for element, weight in constants.ATOMIC_WEIGHTS_G_MOL.items()
    )


def _hypochlorite_loss():
    worst = 0.0
    for row in _rows(DATA / "hypochlorite-loss.csv"):
        start, temperature = float(row["start_g_l"]), float(row["temperature_c"])
        for days in (7, 14, 30, 60, 90):
            left = decay.hypochlorite_strength_after(start, [temperature], [days], extrapolate=True)
            worst = max(worst, abs(left / float(row[f"day_{days}"]) - 1))
    return worst


def _densities():
    """Over every published row not marked doubtful, rounded or contradicted: the same choice as in test_densities."""
    contradicted = {("FeCl3", "1267.9"), ("NaOH", "1515"), ("NH3", "900"), ("liquid alum", "1335")}
    worst = 0.0
    for row in _rows(DATA / "densities-published.csv"):
        chemical, strength = row["chemical"], float(row["strength_pct"])
        model_of_strong_caustic = row["seen"].startswith("computed") and chemical == "NaOH" and strength >= 40
        doubtful = any(word in row["seen"] for word in ("DOUBTFUL", "INVALID"))
        named = (chemical, row["density_kg_m3"]) in contradicted
        if doubtful or named or model_of_strong_caustic or row["note"] == "rounded in source":
            continue
        if chemical == "liquid alum":
            chemical, strength = densities.DRY_ALUM, strength * 17 / 17.155
        try:
            ours = densities.density_kg_l(chemical, strength, float(row["temperature_c"]))
        except errors.ChemistryError:
            continue
        worst = max(worst, abs(1000 * ours / float(row["density_kg_m3"]) - 1))
    return worst


def _ct_tables():
    worst = 0.0
    for row in _rows(TABLES / "ct.csv"):
        place = [float(row[k]) if row[k] else None for k in ("log_inactivation", "temperature_c", "ph_to", "residual_mg_l")]
        for method in ("conservative", "interpolate"):
            found = disinfection.required_ct_mg_min_l(row["organism"], row["disinfectant"], *place, method=method)
            worst = max(worst, abs(found - float(row["ct_mg_min_l"])))
    return worst


def _giardia_regression():
    rows = [r for r in _rows(TABLES / "ct.csv") if (r["organism"], r["disinfectant"]) == ("Giardia", "free chlorine")]
    place = [np.array([float(r[k]) for r in rows]) for k in ("temperature_c", "ph_to", "residual_mg_l")]
    ratio = regressions.giardia_free_chlorine_ct(3.0, *place) / np.array([float(r["ct_mg_min_l"]) for r in rows])
    return ratio.max() - 1


def _vessel_volumes():
    inch, gallon = 0.0254, 3.785411784
    upright = {"shape": "vertical_cylinder", "height_m": 10.0, "bottom_depth_m": 33 * inch}
    lying = {"shape": "horizontal_cylinder", "heads": "spherical_cap", "head_depth_m": 42 * inch}
    published = [
        ({**lying, "diameter_m": 108 * inch, "length_m": 156 * inch}, 36, 2303.96),
        ({**upright, "diameter_m": 132 * inch, "bottom": "ellipsoidal"}, 24, 783.36),
        ({**upright, "diameter_m": 113 * inch, "bottom": "concave_conical"}, 15, 251.16),
    ]
    return max(abs(vessels.volume_l(shape, level * inch) / gallon - printed) for shape, level, printed in published)


MEASURED = {
    "molar_masses": _molar_masses,
    "hypochlorite_loss": _hypochlorite_loss,
    "densities": _densities,
    "ct_tables": _ct_tables,
    "giardia_regression": _giardia_regression,
    "vessel_volumes": _vessel_volumes,
}


@pytest.mark.parametrize("key", MEASURED)
def test_the_worst_difference_stated_is_the_one_measured(key):
    (row,) = [check for check in checks.checks() if check.key == key]
    measured = MEASURED[key]()
    assert measured <= row.worst_difference * 1.005
    if row.worst_difference > 1e-5:
        assert measured > 0.8 * row.worst_difference, "the table is worse than the truth: write the better figure"


def test_memory_is_counted_right():
    (row,) = [check for check in checks.checks() if check.key == "ct_tables"]
    seen = [r["evidence"] for r in _rows(TABLES / "ct.csv")]
    opened = {mark: seen.count(mark) for mark in ("opened-law", "opened-secondary")}
    assert row.still_from_memory.startswith(f"{len(seen) - sum(opened.values())} of {len(seen)} cells")
    assert f"{opened['opened-law']} seen in the law, {opened['opened-secondary']} on a secondary" in row.still_from_memory


def test_rows_name_their_sources_and_differ():
    rows = checks.checks()
    assert len({row.key for row in rows}) == len(rows)
    for row in rows:
        assert row.functions
        assert row.checked_against
        for key in row.source.split(", "):
            assert key in sources.SOURCES, (row.key, key)
