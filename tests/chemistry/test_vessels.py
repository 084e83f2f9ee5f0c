"""Vessel volumes against closed forms and numerical integration, and back again."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate

from chemistry import errors, vessels

HEADS = ("flat", "elliptical_2_1", "torispherical", "hemispherical")
lengths = st.floats(0.2, 12.0)


def upright(diameter=2.0, height=3.2, **more):
    return {"shape": "vertical_cylinder", "diameter_m": diameter, "height_m": height, **more}


def lying(heads="flat", diameter=2.0, length=4.0, **more):
    return {
        "shape": "horizontal_cylinder", "diameter_m": diameter, "length_m": length, "heads": heads, **more
    }  # fmt: skip


def coned(diameter=2.0, height=2.0, cone=1.0):
    return {"shape": "cone_bottom", "diameter_m": diameter, "height_m": height, "cone_height_m": cone}


STRAPPED = {"shape": "strapping", "table": [[0.1, 20.0], [0.5, 400.0], [2.0, 2600.0]]}
shapes = st.one_of(
    st.builds(upright, lengths, lengths),
    st.builds(lying, st.sampled_from(HEADS), lengths, lengths),
    st.builds(coned, lengths, lengths, lengths),
)


def test_an_upright_cylinder_holds_a_litre_per_millimetre_at_one_square_metre():
    tank = upright(diameter=1.1283792, height=3.0)
    assert vessels.volume_l(tank, 1.0) == pytest.approx(1000.0, abs=1e-4)
    assert vessels.dvolume_dlevel_l_per_m(tank, 1.5) == pytest.approx(1000.0, abs=1e-3)


@pytest.mark.parametrize(("depth", "share"), [(0.25, 0.196), (0.10, 0.052), (0.5, 0.5)])
def test_a_lying_cylinder_fills_as_the_segment_does(depth, share):
    tank = lying()
    assert vessels.volume_l(tank, 2.0 * depth) / vessels.full_volume_l(tank) == pytest.approx(share, abs=5e-4)


@pytest.mark.parametrize(
    ("heads", "head_m3"),
    [
        ("flat", 0.0),
        ("hemispherical", 2 * np.pi / 3),
        ("elliptical_2_1", np.pi / 3),
        # To four digits, the profile's integral; the slices below check it level by level.
        ("torispherical", 0.0810 * 8),
    ],
)
def test_full_heads_hold_their_closed_form(heads, head_m3):
    total = vessels.full_volume_l(lying(heads)) / 1000
    assert total == pytest.approx(4 * np.pi + 2 * head_m3, rel=2e-4)


def torispherical_radius(x, diameter, dish, knuckle):
    """Profile by where a circle of the head meets the knuckle or the dish, written from the drawing of the head."""
    r, crown, small = diameter / 2, dish * diameter, knuckle * diameter
    depth = crown - ((crown - small) ** 2 - (r - small) ** 2) ** 0.5
    seam = small * (1 - ((r - small) / (crown - small)) ** 2) ** 0.5
    if x <= seam:
        return r - small + (small**2 - x**2) ** 0.5
    return (crown**2 - (x - depth + crown) ** 2) ** 0.5 if x <= depth else 0.0


@pytest.mark.parametrize("ratios", [(1.0, 0.06), (1.0, 0.10), (0.8, 0.154)])
@pytest.mark.parametrize("level", [0.05, 0.3, 0.9, 1.0, 1.4, 1.95, 2.0])
def test_torispherical_heads_equal_slices_added_up(ratios, level):
    tank = lying("torispherical", dish_radius_ratio=ratios[0], knuckle_radius_ratio=ratios[1])
    x = np.linspace(0, 0.6, 400_001)
    radius = np.array([torispherical_radius(v, 2.0, *ratios) for v in x[::40]])
    height = np.clip((level - 1.0) / np.maximum(radius, 1e-12), -1, 1)
    area = radius**2 * (np.pi - np.arccos(height) + height * np.sqrt(1 - height**2))
    heads = 2 * integrate.trapezoid(area, x[::40])
    barrel = vessels.volume_l(lying(), level) / 1000
    assert vessels.volume_l(tank, level) / 1000 - barrel == pytest.approx(heads, abs=3e-5)


def test_spherical_caps_of_full_depth_are_hemispheres():
    levels = np.linspace(0, 2, 41)
    caps = vessels.volume_l(lying("spherical_cap", head_depth_m=1.0), levels)
    np.testing.assert_allclose(caps, vessels.volume_l(lying("hemispherical"), levels), rtol=1e-9, atol=1e-9)


def test_a_cone_holds_a_third_of_its_cylinder():
    tank = coned()
    assert vessels.volume_l(tank, 1.0) == pytest.approx(1000 * np.pi / 3)
    assert vessels.full_volume_l(tank) == pytest.approx(1000 * np.pi * (2 + 1 / 3))
    assert vessels.volume_l(tank, 0.5) == pytest.approx(1000 * np.pi / 24)


def test_a_hanging_conical_bottom_is_the_cone():
    straight = upright(2.0, 3.0, bottom="conical", bottom_depth_m=1.0)
    levels = np.linspace(0, 3, 31)
    np.testing.assert_allclose(vessels.volume_l(straight, levels), vessels.volume_l(coned(), levels))


def test_a_strapping_table_is_read_along_straight_lines_and_nowhere_else():
    assert vessels.volume_l(STRAPPED, 0.3) == pytest.approx(210.0)
    assert vessels.level_m(STRAPPED, 1500.0) == pytest.approx(1.25)
    assert vessels.dvolume_dlevel_l_per_m(STRAPPED, 0.3) == pytest.approx(950.0)
    assert vessels.full_volume_l(STRAPPED) == 2600.0
    for outside in (0.05, 2.01):
        with pytest.raises(errors.OutOfRange):
            vessels.volume_l(STRAPPED, outside)


@settings(max_examples=60, deadline=None)
@given(shape=shapes, share=st.floats(0.0, 1.0))
def test_level_and_volume_are_inverse_rising_and_the_same_for_arrays(shape, share):
    top, full = vessels.full_level_m(shape), vessels.full_volume_l(shape)
    level = share * top
    volume = vessels.volume_l(shape, level)
    assert 0.0 <= volume <= full * (1 + 1e-12)
    assert vessels.volume_l(shape, vessels.level_m(shape, volume)) == pytest.approx(volume, rel=1e-6, abs=1e-6 * full)
    levels = np.array([level, top / 3, top])
    volumes = vessels.volume_l(shape, levels)
    assert volumes.shape == levels.shape
    assert volumes[0] == pytest.approx(volume, rel=1e-12, abs=1e-12)
    many = vessels.volume_l(shape, np.linspace(0, top, 30))
    assert np.all(np.diff(many) > 0)
    assert not np.any(np.isnan(many))


@settings(max_examples=40, deadline=None)
@given(shape=shapes, share=st.floats(0.05, 0.95))
def test_the_slope_is_the_change_of_volume(shape, share):
    top = vessels.full_level_m(shape)
    level, step = share * top, 1e-4 * top
    rise = vessels.volume_l(shape, level + step) - vessels.volume_l(shape, level - step)
    assert vessels.dvolume_dlevel_l_per_m(shape, level) == pytest.approx(rise / (2 * step), rel=1e-3)


@pytest.mark.parametrize("level", [-0.01, 3.3, float("nan")])
def test_levels_outside_are_refused(level):
    with pytest.raises(errors.OutOfRange):
        vessels.volume_l(upright(), level)


@pytest.mark.parametrize(
    "shape",
    [
        {"shape": "barrel"},
        {},
        upright(diameter=0),
        upright(height=None),
        upright(diameter="2"),
        lying("dished"),
        lying("spherical_cap"),
        lying("torispherical", knuckle_radius_ratio=0.6),
        upright(bottom="ellipsoidal"),
        upright(bottom="round", bottom_depth_m=0.5),
        coned(cone=0),
        {"shape": "strapping", "table": [[0, 0]]},
        {"shape": "strapping", "table": [[0, 0], [1, 10], [1, 20]]},
        {"shape": "strapping", "table": [[0, 5], [1, 4]]},
        {"shape": "strapping", "table": ["ab"]},
        {"shape": "scale", "tare_kg": -1},
    ],
)
def test_impossible_shapes_are_refused(shape):
    with pytest.raises(errors.ChemistryError):
        vessels.check_shape(shape)


def test_a_scale_shows_net_and_refuses_what_it_cannot_weigh():
    scale = {"shape": "scale", "tare_kg": 60.0, "weight_sd_kg": 1.0, "capacity_kg": 1200.0}
    vessels.check_shape(scale)
    assert vessels.net_mass_kg(scale, 889.0) == 829.0
    assert vessels.net_mass_kg(scale, 58.5) == -1.5  # within three uncertainties: shown, not clipped
    np.testing.assert_array_equal(vessels.net_mass_kg(scale, np.array([60.0, 160.0])), [0.0, 100.0])
    for gross in (50.0, 1300.0):
        with pytest.raises(errors.OutOfRange):
            vessels.net_mass_kg(scale, gross)
    with pytest.raises(errors.ChemistryError):
        vessels.volume_l(scale, 1.0)
    with pytest.raises(errors.ChemistryError):
        vessels.net_mass_kg(upright(), 1.0)


def test_questions_to_the_wrong_vessel_are_refused():
    assert vessels.full_level_m(STRAPPED) == 2.0
    for shape in ({"shape": "scale"}, {"shape": "barrel"}, {"shape": None}):
        with pytest.raises(errors.ChemistryError):
            vessels.full_level_m(shape)
        with pytest.raises(errors.ChemistryError):
            vessels.level_m(shape, 1.0)


def test_contents_follow_density_or_scale():
    assert vessels.contents_kg(upright(1.1283792, 3.0), 1.0, 1.273) == pytest.approx(1273.0, abs=1e-3)
    assert vessels.contents_kg({"shape": "scale", "tare_kg": 60.0}, 100.0, 1.13) == 40.0
    assert vessels.level_from_pct(upright(), 50.0) == pytest.approx(1.6)
