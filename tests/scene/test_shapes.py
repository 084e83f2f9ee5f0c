"""Pictures: what is drawn, what is said, and that a strict content security policy holds."""

from __future__ import annotations

import datetime as dt
import itertools
import re
from xml.etree import ElementTree as ET
from zoneinfo import ZoneInfo

import pytest

from plant import scene
from plant.scene import column, numbers, run, strip, svg

ZONE = ZoneInfo("Europe/Berlin")
START = dt.datetime(2026, 3, 1, tzinfo=ZONE)


def day(n: int) -> dt.datetime:
    return START + dt.timedelta(days=n)


def flat(shapes):
    for one in shapes:
        if isinstance(one, scene.Group):
            yield from flat(one.shapes)
        else:
            yield one


def of(picture: scene.Scene, kind: type, **attributes):
    return [
        one
        for one in flat(picture.shapes)
        if isinstance(one, kind) and all(getattr(one, name) == value for name, value in attributes.items())
    ]


def words(picture: scene.Scene) -> list[str]:
    return [one.words for one in of(picture, scene.Text)]


def hypo(**changes) -> scene.Scene:
    given = {
        "title": "Hypochlorite", "unit": "mg/L", "used": 1.17, "used_sd": 0.04, "design": 1.1, "need": 1.05,
    } | changes  # fmt: skip
    return strip.dose_strip(**given)


class TestNumbers:
    @pytest.mark.parametrize(
        ("value", "text"),
        [
            (0, "0"),
            (0.0432, "0.0432"),
            (1.117, "1.12"),
            (12.34, "12.3"),
            (1234.4, "1\u202f234"),
            (-0.5, "−0.500"),
            (0.00001, "0"),
        ],
    )
    def test_a_number_shows_three_figures(self, value, text):
        assert numbers.tidy(value) == text

    @pytest.mark.parametrize(
        ("value", "spread", "text"),
        [(0.959, 0.523, "0.96 ± 0.52"), (1.17, 0.0812, "1.17 ± 0.08"), (-16.9, 46.6, "−17 ± 47"), (184.2, 8, "184 ± 8")],
    )
    def test_a_spread_shows_two_figures_and_no_more_than_the_value(self, value, spread, text):
        assert numbers.with_spread(value, spread) == text

    def test_a_scale_has_round_steps_inside(self):
        assert numbers.scale(0, 1.76, 4) == [0, 0.5, 1.0, 1.5]
        assert numbers.scale(3, 3) == [3]

    def test_a_tick_has_the_decimals_of_its_scale(self):
        assert numbers.tick(0.25, [0, 0.25, 0.5]) == "0.25"
        assert numbers.tick(2000, [0, 1000, 2000]) == "2\u202f000"


class TestDoseStrip:
    def test_the_scale_ends_at_the_larger_of_design_and_largest_value(self):
        # 1.6 x 1.1 = 1.76 is more than 1.15 x (1.17 + 0.08); the dot stands at 1.17 / 1.76 of the scale.
        picture = hypo()
        axis = of(picture, scene.Line, stroke="edge")[0]
        dot = of(picture, scene.Circle)[0]
        assert (dot.x - axis.x1) / (axis.x2 - axis.x1) == pytest.approx(1.17 / 1.76)

    def test_a_value_far_above_design_still_fits(self):
        picture = hypo(used=9.0, used_sd=0.1)
        axis = of(picture, scene.Line, stroke="edge")[0]
        dot = of(picture, scene.Circle)[0]
        assert (dot.x - axis.x1) / (axis.x2 - axis.x1) == pytest.approx(9.0 / (1.15 * 9.2))

    def test_the_band_is_the_design_with_its_tolerance(self):
        picture = hypo(tolerance_pct=10)
        axis = of(picture, scene.Line, stroke="edge")[0]
        band = of(picture, scene.Rect, fill="band")[0]
        assert band.w / (axis.x2 - axis.x1) == pytest.approx(0.2 * 1.1 / 1.76)

    def test_the_whisker_is_two_standard_uncertainties_either_way(self):
        picture = hypo()
        axis = of(picture, scene.Line, stroke="edge")[0]
        whisker = of(picture, scene.Line, stroke="water", width=3)[0]
        assert (whisker.x2 - whisker.x1) / (axis.x2 - axis.x1) == pytest.approx(4 * 0.04 / 1.76)

    def test_an_operator_sees_no_whisker(self):
        picture = hypo(whisker=False)
        assert of(picture, scene.Line, stroke="water") == []
        assert not any("±" in one for one in words(picture))
        assert "±" not in picture.summary

    def test_a_weak_day_is_a_hollow_dot(self):
        assert of(hypo(weak=True), scene.Circle)[0].fill == "card"
        assert of(hypo(), scene.Circle)[0].fill == "water"

    def test_unknown_is_a_dashed_outline_and_words_never_zero(self):
        picture = hypo(used=None, why_unknown="no level at either end of the day")
        assert of(picture, scene.Circle) == []
        assert any(one.dash for one in of(picture, scene.Rect))
        assert "not known" in words(picture)
        assert "not known (no level at either end of the day)" in picture.summary

    def test_nothing_known_draws_no_scale(self):
        picture = hypo(used=None, design=None, need=None)
        assert of(picture, scene.Line) == []
        assert "nothing known yet" in words(picture)

    def test_a_true_zero_is_shown_as_zero(self):
        assert hypo(used=0.0, used_sd=None).summary.startswith("Used 0 mg/L")


class TestRun:
    def picture(self, values, **more) -> scene.Scene:
        points = [run.Point(day(n), value) for n, value in enumerate(values)]
        return run.run(
            title="Dose", quantity="Dose used", unit="mg/L", points=points, start=day(0), end=day(len(values)), **more
        )

    def test_a_missing_value_breaks_the_line(self):
        lines = of(self.picture([1.0, 1.1, None, 1.2, 1.1]), scene.Poly, stroke="water")
        assert [len(line.points) for line in lines] == [2, 2]

    def test_a_long_step_breaks_the_line(self):
        points = [run.Point(day(n), 1.0 + n / 100) for n in (0, 1, 4, 5)]
        picture = run.run(
            title="t", quantity="q", unit="", points=points, start=day(0), end=day(6), longest_step=dt.timedelta(days=2)
        )
        assert [len(line.points) for line in of(picture, scene.Poly, stroke="water")] == [2, 2]

    def test_a_lone_value_between_gaps_is_a_dot(self):
        picture = self.picture([1.0, None, 1.1, None, 1.2, 1.2])
        assert len([one for one in of(picture, scene.Circle) if one.r == 2]) == 2

    def test_a_value_outside_a_limit_carries_its_mark_and_is_counted(self):
        points = [run.Point(day(0), 1.0), run.Point(day(1), 1.6, level="action"), run.Point(day(2), 1.1)]
        limit = run.Limit(1.5, "action high", "action")
        picture = run.run(title="t", quantity="Dose used", unit="mg/L", points=points, start=day(0), end=day(3), limits=[limit])
        assert of(picture, scene.Poly, fill="action")
        assert "action high" in words(picture)
        assert "1 outside a limit; action high at 1.50 mg/L" in picture.summary

    def test_a_far_limit_is_named_and_not_drawn(self):
        picture = self.picture([1.0, 1.1, 1.05], limits=[run.Limit(90, "certified maximum", "alert")])
        assert "certified maximum" not in words(picture)
        assert "certified maximum at 90.0 mg/L" in picture.summary

    def test_the_summary_names_lowest_highest_and_last(self):
        summary = self.picture([1.0, 1.3, None, 0.9]).summary
        assert "3 of 4 values known" in summary
        assert "lowest 0.900 mg/L on 4 March 2026" in summary
        assert "highest 1.30 mg/L on 2 March 2026" in summary

    def test_with_no_value_it_says_so(self):
        assert self.picture([None, None]).summary.endswith("no value is known.")

    def test_the_cursor_stops_at_every_value_and_reads_gaps_out(self):
        stops = self.picture([1.0, None, 1.2]).cursor
        assert [stop.y is None for stop in stops] == [False, True, False]
        assert stops[1].words == "2 Mar 2026: not known"

    def test_flags_open(self):
        picture = self.picture([1.0, 1.1], flags=[run.Flag(day(1), "design 1.20 mg/L", "water", "/w/X/settings/")])
        group = next(one for one in picture.shapes if isinstance(one, scene.Group))
        assert (group.href, group.title) == ("/w/X/settings/", "2 Mar: design 1.20 mg/L")

    def test_time_labels_do_not_touch(self):
        picture = self.picture([1.0 + n / 1000 for n in range(90)])
        labels = sorted((one for one in of(picture, scene.Text, anchor="middle") if one.y > 250), key=lambda one: one.x)
        assert len(labels) > 5
        for left, right in itertools.pairwise(labels):
            assert right.x - left.x > numbers.width_of(left.words) / 2 + numbers.width_of(right.words) / 2


class TestLevelColumn:
    def test_it_keeps_its_own_proportions(self):
        picture = column.level_column(title="t", width_m=2.0, height_m=3.2, level=0.5)
        outline = next(one for one in of(picture, scene.Poly) if one.stroke == "edge")
        xs, ys = zip(*outline.points, strict=True)
        assert (max(ys) - min(ys)) / (max(xs) - min(xs)) == pytest.approx(3.2 / 2.0)

    def test_the_water_reaches_its_level(self):
        picture = column.level_column(title="t", width_m=2.0, height_m=3.2, level=0.25)
        water = of(picture, scene.Poly, fill="water")[0]
        outline = next(one for one in of(picture, scene.Poly) if one.stroke == "edge")
        height = [max(y for _, y in one.points) - min(y for _, y in one.points) for one in (water, outline)]
        assert height[0] / height[1] == pytest.approx(0.25)

    def test_an_unknown_level_is_dashed_with_words(self):
        picture = column.level_column(title="t", width_m=2.0, height_m=3.2, level=None)
        assert of(picture, scene.Poly, fill="water") == []
        assert next(one for one in of(picture, scene.Poly) if one.stroke == "edge").dash
        assert "level not known" in words(picture)

    def test_a_cone_narrows_and_the_hatching_stays_inside(self):
        picture = column.level_column(title="t", width_m=3, height_m=8, cone_m=2.4, level=0.7, heel=0.1)
        water = of(picture, scene.Poly, fill="water")[0]
        assert len(water.points) == 6
        xs = [x for x, _ in water.points]
        for hatch in of(picture, scene.Line, stroke="card"):
            assert min(xs) - 0.1 <= min(hatch.x1, hatch.x2) <= max(hatch.x1, hatch.x2) <= max(xs) + 0.1

    @pytest.mark.parametrize(("level", "room"), [(0.15, "a load fits"), (0.3, "no room for a load")])
    def test_it_says_whether_a_load_fits(self, level, room):
        picture = column.level_column(title="t", width_m=2, height_m=3, level=level, load_from=0.2, fill_to=0.92)
        assert room in words(picture)

    def test_a_load_that_never_fits_is_said(self):
        picture = column.level_column(title="t", width_m=2, height_m=3, level=0.1, load_from=-0.3)
        assert "a whole load never fits" in picture.summary


class TestSvg:
    def test_marks_and_text_are_painted_without_style_or_script(self):
        picture = hypo(title='Hypo <"post"> & more')
        text = svg.paint(picture, "one")
        root = ET.fromstring(text)
        assert root.find("title").text == picture.title
        assert root.find("desc").text == picture.summary
        for node in root.iter():
            assert "style" not in node.attrib
            assert not any(name.startswith("on") for name in node.attrib)
        assert node.tag != "script"

    def test_every_role_painted_has_a_colour(self, settings):
        css = (settings.BASE_DIR / "plant/board/static/board/site.css").read_text()
        for role in scene.ROLES:
            assert f".f-{role} " in css
            assert f".s-{role} " in css

    def test_levels_differ_in_shape(self):
        kinds = {level: tuple(type(one).__name__ for one in scene.mark(level, 0, 0)) for level in scene.LEVELS}
        assert len(set(kinds.values())) == len(scene.LEVELS)

    def test_a_picture_with_links_is_not_one_image(self):
        flags = [run.Flag(day(1), "delivery", href="/x/?a=1&b=2")]
        picture = run.run(
            title="t", quantity="q", unit="m", points=[run.Point(day(0), 1.0)], start=day(0), end=day(2), flags=flags
        )
        text = svg.paint(picture, "two")
        assert 'role="group"' in text
        assert re.search(r'<a href="/x/\?a=1&amp;b=2" aria-label="2 Mar: delivery">', text)
        assert 'role="img"' in svg.paint(hypo(), "three")
