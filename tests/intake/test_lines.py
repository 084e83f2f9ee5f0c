"""One typed line: a reading, or a refusal that says what was expected."""

import datetime as dt

import pytest

from plant.intake import ground, lines
from plant.readings import marks
from plant.works import load, queries

MORNING = "2026-03-28T07:30"
WATER = """
[works]
code = "HAL"
name = "Halm Works"
timezone = "Europe/Berlin"
operating_day_starts = "06:00"
[[sample_point]]
code = "ENTRY"
name = "Outlet"
stage = "entry"
[[meter]]
code = "FT-GAL"
name = "Totaliser"
unit = "US_Mgal"
digits = 4
[[product]]
code = "HYPO"
name = "Hypochlorite"
chemical = "NaOCl"
strength = 125.0
strength_basis = "g_per_L_available_chlorine"
density_kg_per_L = 1.2
[[vessel]]
code = "TANK"
name = "Tank"
product = "HYPO"
shape = "vertical_cylinder"
diameter_m = 2.0
height_m = 3.0
[[dosing_point]]
code = "POST"
name = "Post"
product = "HYPO"
vessels = ["TANK"]
meter = "FT-GAL"
need = { model = "none" }
[[parameter]]
name = "tannin"
unit = "mg/L"
"""


@pytest.fixture
def works(db):
    book = load.load(data=WATER.encode(), by=None, now=dt.datetime(2026, 1, 1, tzinfo=dt.UTC)).book
    return queries.stated(book)


@pytest.fixture
def read(works):
    def one(site="ENTRY", timestamp=MORNING, parameter="pH", value="7.32", unit="", spelling=None, **more):
        here = ground.Ground(works, works.calendar(dt.datetime(2026, 4, 1, tzinfo=dt.UTC)), spelling=spelling)
        typed = lines.Typed(site, timestamp, parameter, value, unit, **more)
        return lines.read_line(typed, here, line=7)

    return one


def taken(found):
    assert isinstance(found, lines.Taken), found
    return found.reading


def refused(found):
    assert isinstance(found, lines.Refusal), found
    assert found.line == 7
    return f"{found.read} | {found.expected}"


class TestAValue:
    def test_is_kept_as_typed_and_exactly(self, read):
        reading = taken(read(value=" 7.30", unit="pH"))
        assert (reading.typed, reading.typed_unit) == ("7.30", "pH")
        assert (reading.value_text, reading.value, reading.unit, reading.state) == ("7.30", 7.3, "", "taken")

    def test_below_detection_is_neither_zero_nor_the_limit(self, read):
        """Pitfall 32."""
        reading = taken(read(parameter="iron", value="<0.02 ", unit="mg/L"))
        assert (reading.qualifier, reading.value_text, reading.state) == ("<", "0.02", "taken")

    def test_takes_a_qualifier_from_its_own_column(self, read):
        assert taken(read(parameter="iron", value="0.02", unit="mg/L", qualifier="<")).qualifier == "<"

    def test_refuses_two_qualifiers_that_disagree(self, read):
        assert "one qualifier" in refused(read(value="<1", qualifier=">"))

    def test_empty_is_not_taken_and_not_a_zero(self, read):
        """Pitfall 24."""
        reading = taken(read(value=""))
        assert (reading.state, reading.value, reading.note) == ("not_taken", None, "reason not stated")
        assert taken(read(value=" ", note="display off")).note == "display off"

    def test_a_lone_dash_is_told_apart(self, read):
        reading = taken(read(value="-"))
        assert (reading.state, reading.typed, reading.value) == ("words", "-", None)

    def test_words_are_kept(self, read):
        reading = taken(read(parameter="e_coli", value="absent", unit="CFU/100mL"))
        assert (reading.state, reading.typed) == ("words", "absent")

    def test_with_a_decimal_comma_needs_the_option(self, read):
        assert "decimal comma" in refused(read(value="7,32"))
        assert taken(read(value="7,32", spelling=ground.Spelling(decimal="comma"))).value_text == "7.32"

    def test_outside_the_possible_is_kept_with_a_mark(self, read):
        assert taken(read(value="73")).marks == [marks.IMPOSSIBLE]
        assert taken(read(parameter="temperature", value="-999.999", unit="°C")).marks == [marks.IMPOSSIBLE]
        assert taken(read(parameter="free_chlorine", value="-0.1", unit="mg/L")).marks == [marks.IMPOSSIBLE]


class TestAUnit:
    @pytest.mark.parametrize(
        ("parameter", "value", "unit", "text", "kept"),
        [
            ("iron", "62.50", "µg/L", "0.06250", "mg/L"),
            ("hardness", "10", "°fH", "100", "mg/L as CaCO3"),
            ("hardness", "100", "mg/L as CaCO3", "100", "mg/L as CaCO3"),
            ("temperature", "50", "°F", "10", "°C"),
            ("turbidity", "0.3", "FNU", "0.3", "NTU"),
            ("conductance", "0.5", "mS/cm", "500", "uS/cm"),
            ("tannin", "2", "mg/L", "2", "mg/L"),
        ],
    )
    def test_is_converted_once_and_exactly(self, read, parameter, value, unit, text, kept):
        reading = taken(read(parameter=parameter, value=value, unit=unit))
        assert float(reading.value_text) == float(text)
        assert (reading.unit, reading.typed, reading.typed_unit) == (kept, value, unit)

    def test_that_is_unknown_is_refused_with_the_list(self, read):
        said = refused(read(parameter="iron", value="1", unit="furlong"))
        assert "'furlong'" in said
        assert "mg/L" in said
        assert "µg/L" in said

    def test_of_another_kind_is_refused(self, read):
        assert "°C" in refused(read(parameter="temperature", value="10", unit="mg/L"))

    def test_of_hardness_without_its_basis_is_remarked(self, read):
        """Pitfall 7: taken as CaCO3, and said."""
        found = read(parameter="hardness", value="100", unit="mg/L")
        assert found.remarks
        assert "CaCO3" in found.remarks[0]

    def test_spelt_in_the_file_s_own_way_is_read_with_a_list(self, read):
        spelling = ground.Spelling(units={"DEG C": "°C"})
        assert taken(read(parameter="temperature", value="10", unit="DEG  C", spelling=spelling)).unit == "°C"
        assert "DEG C" in refused(read(parameter="temperature", value="10", unit="DEG C"))


class TestASite:
    def test_loses_its_leading_blanks(self, read):
        assert taken(read(site=" ENTRY ")).site == "ENTRY"

    def test_that_nobody_stated_is_refused(self, read):
        assert "'EXIT'" in refused(read(site="EXIT"))

    def test_is_renamed_by_a_site_map(self, read):
        assert taken(read(site="EXIT", spelling=ground.Spelling(sites={"EXIT": "ENTRY"}))).site == "ENTRY"

    def test_takes_only_what_is_read_there(self, read):
        assert "level at a vessel" in refused(read(parameter="level", value="1", unit="m"))
        assert "totaliser" in refused(read(site="TANK", parameter="totaliser", value="1", unit="m3"))

    def test_with_a_parameter_nobody_knows_says_which(self, read):
        found = read(parameter="sparkle")
        assert isinstance(found, lines.Refusal)
        assert found.parameter == "sparkle"


class TestATime:
    def test_without_an_offset_is_local(self, read):
        assert taken(read()).taken_at == dt.datetime(2026, 3, 28, 6, 30, tzinfo=dt.UTC)

    def test_with_an_offset_is_what_it_says(self, read):
        assert taken(read(timestamp="2026-03-28T07:30Z")).taken_at == dt.datetime(2026, 3, 28, 7, 30, tzinfo=dt.UTC)

    def test_alone_as_a_date_stays_a_date(self, read):
        reading = taken(read(timestamp="2026-03-28"))
        assert reading.date_only
        assert reading.taken_at == dt.datetime(2026, 3, 28, 11, 0, tzinfo=dt.UTC)

    def test_that_the_clocks_skipped_is_reported(self, read):
        assert "does not exist" in refused(read(timestamp="2026-03-29T02:30"))

    def test_that_happened_twice_is_not_guessed(self, read):
        """Pitfall 25."""
        assert "twice" in refused(read(timestamp="2025-10-26T02:30"))
        first = taken(read(timestamp="2025-10-26T02:30", spelling=ground.Spelling(ambiguous="first")))
        second = taken(read(timestamp="2025-10-26T02:30", spelling=ground.Spelling(ambiguous="second")))
        assert second.taken_at - first.taken_at == dt.timedelta(hours=1)

    @pytest.mark.parametrize("typed", ["28.03.2026 07:30", "", "yesterday", "2026-13-01", "2026-03-28T25:00", "0001-01-01"])
    def test_that_cannot_be_read_is_refused_with_an_example(self, read, typed):
        assert "2026-03-01" in refused(read(timestamp=typed)) or "1900" in refused(read(timestamp=typed))


class TestEquipment:
    def test_a_totaliser_counts_in_its_meter_s_own_unit(self, read):
        """Pitfall 5."""
        assert taken(read(site="FT-GAL", parameter="totaliser", value="0125.50", unit="US_Mgal")).value_text == "125.50"
        reading = taken(read(site="FT-GAL", parameter="totaliser", value="3785.411784", unit="m3"))
        assert (reading.unit, float(reading.value_text)) == ("US_Mgal", 1.0)
        assert "US_Mgal" in refused(read(site="FT-GAL", parameter="totaliser", value="1", unit="kg"))

    def test_a_totaliser_beyond_its_digits_is_marked(self, read):
        assert taken(read(site="FT-GAL", parameter="totaliser", value="10000", unit="US_Mgal")).marks == [marks.IMPOSSIBLE]

    @pytest.mark.parametrize(
        ("value", "unit", "text", "kept"),
        [
            ("1.50", "m", "1.50", "m"),
            ("150", "cm", "1.50", "m"),
            ("1500", "mm", "1.500", "m"),
            ("50", "%", "50", "%"),
        ],
    )
    def test_a_level_comes_in_metres_and_percent_stays(self, read, value, unit, text, kept):
        reading = taken(read(site="TANK", parameter="level", value=value, unit=unit))
        assert (float(reading.value_text), reading.unit, reading.marks) == (float(text), kept, [])

    def test_a_level_above_the_rim_is_marked(self, read):
        assert taken(read(site="TANK", parameter="level", value="150", unit="m")).marks == [marks.IMPOSSIBLE]
        assert taken(read(site="TANK", parameter="level", value="101", unit="%")).marks == [marks.IMPOSSIBLE]
        assert taken(read(site="TANK", parameter="level", value="3.01", unit="m")).marks == []

    def test_a_strength_test_stands_in_its_product_s_basis(self, read):
        assert taken(read(site="TANK", parameter="strength", value="118", unit="")).unit == "g/L"
        assert taken(read(site="TANK", parameter="strength", value="118", unit="g/L")).unit == "g/L"
        assert "g/L" in refused(read(site="TANK", parameter="strength", value="11.8", unit="%"))

    @pytest.mark.parametrize(
        ("parameter", "value", "unit"),
        [
            ("feeder_setting", "45", "%"),
            ("feeder_setting", "12", "L/h"),
            ("drawdown", "230", "mL/min"),
            ("run_hours", "11.5", "h"),
            ("bags", "3", ""),
        ],
    )
    def test_a_feeder_s_readings_keep_their_unit(self, read, parameter, value, unit):
        assert taken(read(site="POST", parameter=parameter, value=value, unit=unit)).unit == unit


class TestALostDecimalPoint:
    def typed(self, works, values):
        here = ground.Ground(works, works.calendar(dt.datetime(2026, 4, 1, tzinfo=dt.UTC)))
        for hour, value in enumerate(values):
            stamp = f"2026-03-{1 + hour:02d}T08:00"
            found = taken(lines.read_line(lines.Typed("ENTRY", stamp, "turbidity", value, "NTU"), here, line=7))
        return found.marks

    def test_is_suspected_when_a_tenth_fits_the_series(self, works):
        """Pitfall 42: 740 for 7.40."""
        assert self.typed(works, ["0.31", "0.28", "0.30", "0.33", "29"]) == [marks.LOST_POINT]

    def test_is_not_suspected_of_a_value_that_carries_its_point(self, works):
        assert self.typed(works, ["0.31", "0.28", "0.30", "0.33", "29.0"]) == []

    def test_is_not_suspected_of_a_true_rise(self, works):
        assert self.typed(works, ["0.31", "0.28", "0.30", "0.33", "1"]) == []

    def test_is_not_suspected_where_points_are_not_written(self, works):
        assert self.typed(works, ["3", "2", "3", "3", "30"]) == []


def test_replaces_needs_its_reason(read):
    assert "reason" in refused(read(replaces="yes"))
    assert read(replaces="yes", note="misread").replaces
    assert "yes, no" in refused(read(replaces="perhaps"))


def test_statistics_are_a_short_list(read):
    assert taken(read(statistic="day_max")).statistic == "day_max"
    assert taken(read()).statistic == "reading"
    assert "day_min" in refused(read(statistic="median"))


def test_a_text_too_long_or_with_a_nul_is_refused(read):
    assert "80 characters" in refused(read(value="x" * 81))
    assert "NUL" in refused(read(note="a\x00b"))
