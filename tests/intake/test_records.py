"""A record file brought in: counted, marked, never doubled, refused line by line."""

from __future__ import annotations

import datetime as dt
import gc
from io import StringIO
from pathlib import Path

import pytest
from django.core.management import CommandError, call_command

from plant.intake import actions, ground, records, sheets
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.readings import marks, queries
from plant.readings.models import Reading
from plant.works import load
from plant.works import queries as works

DATA = Path(__file__).resolve().parents[1] / "data"
BARE_CITY = """
[works]
code = "CITY"
name = "City network"
timezone = "America/New_York"
operating_day_starts = "00:00"
[[parameter]]
name = "coliform"
unit = "MPN/100mL"
"""
"""A works of which no station is stated yet."""


def in_force(book):
    return list(Reading.objects.filter(book=book).as_known().order_by("taken_at", "seq", "line"))


class TestTheThreeDays:
    def test_come_in_whole_and_as_typed(self, example, bring):
        counted = bring(example, DATA / "three_days" / "records.csv")
        assert (counted.lines, counted.added, counted.refused, counted.not_taken) == (21, 21, 0, 1)
        totaliser = queries.series(
            example,
            "FT-TREATED",
            "totaliser",
            start=dt.datetime(2026, 3, 28, tzinfo=dt.UTC),
            end=dt.datetime(2026, 4, 1, tzinfo=dt.UTC),
        )
        assert [point.typed for point in totaliser][:3] == ["95000", "00500", "06500"]
        # 08:00 on the day the clocks went forward is 06:00 UTC, eleven hours after 19:00 the evening before.
        assert totaliser[2].at == dt.datetime(2026, 3, 29, 6, 0, tzinfo=dt.UTC)
        assert all(point.unit == "m3" for point in totaliser)
        assert not any(reading.marks for reading in in_force(example))

    def test_brought_in_twice_add_nothing(self, example, bring):
        bring(example, DATA / "three_days" / "records.csv")
        entries = Entry.objects.count()
        again = bring(example, DATA / "three_days" / "records.csv")
        assert (again.added, again.outcomes["same again"]) == (0, 21)
        assert Entry.objects.count() == entries

    def test_touch_the_days_they_belong_to_and_their_neighbours(self, example, bring):
        counted = bring(example, DATA / "three_days" / "records.csv")
        assert min(counted.days) == dt.date(2026, 3, 27)
        assert max(counted.days) == dt.date(2026, 4, 1)

    def test_leave_a_book_that_verifies(self, example, bring):
        bring(example, DATA / "three_days" / "records.csv")
        assert list(verify.everything()) == []


class TestTheSameSampleAgain:
    LINE = "ENTRY,2026-03-28T07:00,pH,{value},,{note},{sample},{replaces}"

    def line(self, value, note="", sample="", replaces=""):
        return self.LINE.format(value=value, note=note, sample=sample, replaces=replaces)

    def test_with_the_same_value_is_counted_not_added(self, example, bring, sheet):
        counted = bring(example, sheet(self.line("7.3"), self.line("7.30"), self.line("7.3")))
        assert (counted.added, counted.outcomes["same again"]) == (1, 2)

    def test_in_another_unit_is_still_the_same(self, example, bring, sheet):
        counted = bring(
            example,
            sheet(
                "NAOH-BULK,2026-03-28T07:00,level,1.50,m",
                "NAOH-BULK,2026-03-28T07:00,level,150,cm",
                header="site,timestamp,parameter,value,unit",
            ),
        )
        assert (counted.added, counted.outcomes["same again"]) == (1, 1)

    def test_with_another_value_is_a_conflict_kept_and_marked(self, example, bring, sheet):
        counted = bring(example, sheet(self.line("7.3"), self.line("7.9")))
        assert (counted.outcomes["added"], counted.outcomes["conflict"]) == (1, 1)
        assert [reading.marks for reading in in_force(example)] == [[], [marks.CONFLICT]]

    def test_in_a_later_file_is_a_conflict_too(self, example, bring, sheet):
        bring(example, sheet(self.line("7.3")))
        counted = bring(example, sheet(self.line("7.9")))
        assert counted.outcomes["conflict"] == 1

    def test_told_apart_by_its_sample_is_another_reading(self, example, bring, sheet):
        counted = bring(example, sheet(self.line("7.3", sample="A"), self.line("7.9", sample="B")))
        assert (counted.added, counted.outcomes["conflict"]) == (2, 0)

    def test_that_replaces_is_a_correction_with_its_reason(self, example, bring, sheet):
        bring(example, sheet(self.line("7.3")))
        counted = bring(example, sheet(self.line("7.9", note="misread", replaces="yes")))
        assert counted.outcomes["corrected"] == 1
        (now_holds,) = in_force(example)
        assert (now_holds.value_text, now_holds.reason, now_holds.supersedes.value_text, now_holds.marks) == (
            "7.9",
            "misread",
            "7.3",
            [],
        )

    def test_that_replaces_a_line_of_the_same_file(self, example, bring, sheet):
        path = sheet(
            self.line("7.3"), self.line("7.9", note="misread", replaces="yes"), self.line("8.0", note="again", replaces="yes")
        )
        counted = bring(example, path)
        assert (counted.outcomes["added"], counted.outcomes["corrected"]) == (1, 2)
        assert [reading.value_text for reading in in_force(example)] == ["8.0"]
        again = bring(example, path)
        assert (again.added, again.outcomes["same again"]) == (0, 3)
        assert list(verify.everything()) == []

    def test_brought_in_from_an_old_file_does_not_undo_a_correction(self, example, bring, sheet):
        old = sheet(self.line("7.3"))
        bring(example, old)
        bring(example, sheet(self.line("7.9", note="misread", replaces="yes")))
        bring(example, old)
        assert [reading.value_text for reading in in_force(example)] == ["7.9"]

    def test_that_replaces_nothing_is_simply_added(self, example, bring, sheet):
        counted = bring(example, sheet(self.line("7.9", note="misread", replaces="yes")))
        assert counted.outcomes["added"] == 1


class TestPhAndChlorine:
    def lines(self, ph, chlorine):
        return [f"ENTRY,2026-03-28T07:00,free_chlorine,{chlorine},mg/L", f"ENTRY,2026-03-28T07:00,pH,{ph},"]

    @pytest.mark.parametrize("turned", [False, True])
    def test_of_the_same_value_doubt_the_ph(self, example, bring, sheet, turned):
        lines = self.lines("0.80", "0.8")
        bring(example, sheet(*(lines[::-1] if turned else lines), header="site,timestamp,parameter,value,unit"))
        doubts = {reading.parameter: reading.marks for reading in in_force(example)}
        assert doubts["pH"] == [marks.PH_IS_CHLORINE]
        assert doubts["free_chlorine"] == []

    def test_doubt_the_chlorine_too_where_it_can_hardly_be_one(self, example, bring, sheet):
        bring(example, sheet(*self.lines("7.4", "7.4"), header="site,timestamp,parameter,value,unit"))
        assert all(reading.marks == [marks.PH_IS_CHLORINE] for reading in in_force(example))

    def test_in_two_files_are_still_seen(self, example, bring, sheet):
        chlorine, ph = self.lines("0.80", "0.8")
        header = "site,timestamp,parameter,value,unit"
        bring(example, sheet(chlorine, header=header))
        counted = bring(example, sheet(ph, header=header))
        assert counted.marked == {marks.PH_IS_CHLORINE: 1}

    def test_that_differ_are_left_alone(self, example, bring, sheet):
        counted = bring(example, sheet(*self.lines("7.4", "0.8"), header="site,timestamp,parameter,value,unit"))
        assert not counted.marked


class TestRefusals:
    def test_name_file_line_what_was_read_and_what_was_expected(self, example, bring, sheet):
        path = sheet(
            "ENTRY,2026-03-28T07:00,pH,7.3,", "NOWHERE,2026-03-28T07:00,pH,7.3,", "ENTRY,2026-03-28T08:00,pH,7.3,furlong"
        )
        counted = bring(example, path)
        assert counted.added == 1
        assert counted.refusal_lines() == [
            f"{path.name}:3: read site 'NOWHERE'; expected the code of a sample point, meter, vessel or dosing point of this works",
            f"{path.name}:4: read unit 'furlong' for pH; expected one of: pH, (empty)",
        ]

    def test_of_an_unknown_parameter_are_told_once_with_their_count(self, example, bring, sheet):
        counted = bring(example, sheet(*[f"ENTRY,2026-03-{day:02d}T07:00,doc,2,mg/L" for day in range(1, 6)]))
        assert counted.refused == 5
        assert len(counted.refusal_lines()) == 1
        assert "'doc' (5 lines, the first here)" in counted.refusal_lines()[0]

    def test_keep_nothing_where_all_or_nothing_was_asked(self, example, bring, sheet):
        path = sheet("ENTRY,2026-03-28T07:00,pH,7.3,", "NOWHERE,2026-03-28T07:00,pH,7.3,")
        head = example.head_seq
        with pytest.raises(records.NothingKept):
            bring(example, path, all_or_nothing=True, add_sites=False)
        example.refresh_from_db()
        assert example.head_seq == head
        assert in_force(example) == []

    def test_of_a_line_with_an_unquoted_decimal_comma_say_so(self, example, bring, sheet):
        counted = bring(example, sheet("ENTRY,2026-03-28T07:00,pH,7,32,,,,,"))
        assert counted.refused == 1

    def test_decimal_commas_and_semicolons_go_together(self, example, bring, sheet):
        path = sheet("ENTRY;2026-03-28T07:00;pH;7,32;", header="site;timestamp;parameter;value;unit")
        counted = bring(example, path, spelling=ground.Spelling(decimal="comma"))
        assert counted.added == 1
        assert in_force(example)[0].value_text == "7.32"


class TestFilesThatAreNotSheets:
    def refused(self, path):
        with pytest.raises(sheets.NotASheet) as problem:
            list(records.open_file(path))
        return str(problem.value)

    def test_an_empty_file(self, tmp_path):
        path = tmp_path / "empty.csv"
        path.write_bytes(b"")
        assert "empty.csv is empty; expected a header line" in self.refused(path)

    def test_a_file_that_is_not_there(self, tmp_path):
        assert "can't be read" in self.refused(tmp_path / "gone.csv")

    def test_a_wrong_header(self, sheet):
        said = self.refused(sheet(header="place,when,what,value,unit"))
        assert "lacks site, timestamp, parameter" in said
        assert "read: place,when,what,value,unit" in said

    def test_a_column_named_twice(self, sheet):
        assert "twice" in self.refused(sheet(header="site,timestamp,parameter,value,unit,value"))

    def test_another_encoding(self, tmp_path):
        path = tmp_path / "latin.csv"
        path.write_bytes("site,timestamp,parameter,value,unit\nENTRY,2026-03-28,temperature,7,°C\n".encode("latin-1"))
        assert "latin.csv, line 2: byte 0xB0 is not UTF-8" in self.refused(path)

    def test_utf_16(self, tmp_path):
        path = tmp_path / "wide.csv"
        path.write_bytes("site,timestamp,parameter,value,unit\n".encode("utf-16"))
        assert "UTF-16" in self.refused(path)

    def test_an_open_quote(self, sheet):
        assert "not a CSV line" in self.refused(sheet('ENTRY,"2026-03-28T07:00,pH,7.3,'))

    def test_a_byte_order_mark_is_no_harm(self, tmp_path):
        path = tmp_path / "bom.csv"
        path.write_text("site,timestamp,parameter,value,unit\nENTRY,2026-03-28,pH,7,\n", encoding="utf-8-sig")
        assert [row.cells["site"] for row in records.open_file(path)] == ["ENTRY"]

    def test_columns_that_are_not_read_are_named(self, example, bring, sheet):
        counted = bring(
            example, sheet("ENTRY,2026-03-28T07:00,pH,7.3,,x", header="site,timestamp,parameter,value,unit,colour_of_sky")
        )
        assert counted.ignored_columns == ("colour_of_sky",)


class TestAStopInTheMiddle:
    def many(self, sheet, count=250):
        start = dt.datetime(2026, 1, 1)  # local, as a file has it
        return sheet(
            *[f"ENTRY,{start + dt.timedelta(hours=hour):%Y-%m-%dT%H:%M},pH,{7 + hour % 50 / 100:.2f}," for hour in range(count)]
        )

    def test_keeps_whole_entries_and_the_next_run_adds_the_rest(self, example, bring, sheet, monkeypatch):
        monkeypatch.setattr(records, "ENTRY_LINES", 100)
        path = self.many(sheet)
        take, calls = actions.take, []

        def cut_off(**asked):
            calls.append(1)
            if len(calls) == 2:
                raise KeyboardInterrupt
            return take(**asked)

        monkeypatch.setattr(actions, "take", cut_off)
        with pytest.raises(KeyboardInterrupt):
            bring(example, path)
        assert Reading.objects.count() == 100
        monkeypatch.setattr(actions, "take", take)
        counted = bring(example, path)
        assert (counted.added, counted.outcomes["same again"]) == (150, 100)
        assert Reading.objects.count() == 250
        assert list(verify.everything()) == []

    def test_of_a_file_that_breaks_further_down_keeps_what_stood_above(self, example, bring, sheet, monkeypatch):
        monkeypatch.setattr(records, "ENTRY_LINES", 100)
        path = self.many(sheet)
        path.write_bytes(path.read_bytes() + b"ENTRY,2026-02-02T07:00,pH,7\xb0,\n")
        with pytest.raises(sheets.NotASheet, match="line 252"):
            bring(example, path)
        assert Reading.objects.count() == 200

    def test_of_a_file_to_be_taken_whole_keeps_nothing(self, example, bring, sheet, monkeypatch):
        monkeypatch.setattr(records, "ENTRY_LINES", 100)
        path = self.many(sheet)
        path.write_bytes(path.read_bytes() + b"ENTRY,2026-02-02T07:00,pH,7\xb0,\n")
        with pytest.raises(sheets.NotASheet):
            bring(example, path, all_or_nothing=True)
        assert Reading.objects.count() == 0


class TestRealOpenData:
    @pytest.fixture
    def city(self, db, now):
        return load.load(data=BARE_CITY.encode(), by=None, now=now).book

    def test_a_month_of_a_city(self, city, bring):
        spelling = ground.Spelling(units=sheets.pairs(DATA / "open" / "units.csv"))
        path = DATA / "open" / "city_network_2015_08.csv"
        counted = bring(city, path, spelling=spelling, add_sites=True)
        assert counted.lines == 1675
        assert counted.refusal_lines() == []
        assert counted.added == 1675
        assert len(counted.sites_added) == 16
        assert not any(code != code.strip() for code in counted.sites_added)
        assert counted.censored == 751
        over = [point for point in in_force(city) if point.qualifier == ">"]
        assert [(point.value_text, point.typed) for point in over] == [("200.5", ">200.5")] * 4
        assert bring(city, path, spelling=spelling, add_sites=True).added == 0

    def test_the_same_month_without_a_list_of_units_says_what_it_cannot_read(self, city, bring):
        counted = bring(city, DATA / "open" / "city_network_2015_08.csv", add_sites=True)
        assert counted.refused == 760
        assert "'MPN/100 mL'" in counted.refusal_lines()[0]
        assert counted.added == 915

    def test_blanks_dashes_and_words_of_such_a_file_are_told_apart(self, city, bring, sheet):
        lines = [" 1S07,2015-08-01T13:05,turbidity,{},NTU", "1S07,2015-08-02T13:05,turbidity,{},NTU"]
        values = ["", "-", "<1 ", "0.69"]
        path = sheet(
            *[f" 1S07,2015-08-{day:02d}T13:05,turbidity,{value},NTU" for day, value in enumerate([*values, "cloudy"], start=1)],
            header="site,timestamp,parameter,value,unit",
        )
        counted = bring(city, path, add_sites=True)
        assert len(lines) == 2
        assert (counted.not_taken, counted.not_stated, counted.dashes, counted.censored, counted.words) == (1, 1, 1, 1, 1)

    def test_two_years_of_a_river_by_date(self, city, bring):
        spelling = ground.Spelling(units=sheets.pairs(DATA / "open" / "units.csv"))
        counted = bring(city, DATA / "open" / "river_2010_2011.csv", spelling=spelling, add_sites=True)
        assert counted.lines == 575
        assert sorted(counted.unknown) == ["doc", "sulphate"]
        assert counted.refused == 45 + 45 + 44
        assert counted.marked == {marks.IMPOSSIBLE: 1}
        readings = in_force(city)
        assert all(reading.date_only for reading in readings)
        (missing,) = [reading for reading in readings if reading.marks]
        assert (missing.typed, missing.parameter) == ("-999.999", "temperature")
        assert {reading.unit for reading in readings if reading.parameter == "hardness"} == {"mg/L as CaCO3"}


class TestTheCommand:
    def run(self, *arguments):
        out, err = StringIO(), StringIO()
        call_command("import_records", *[str(item) for item in arguments], stdout=out, stderr=err)
        return out.getvalue(), err.getvalue()

    def test_tells_what_came_of_a_file(self, example, sheet):
        path = sheet("ENTRY,2026-03-28T07:00,pH,7.3,", "ENTRY,2026-03-28T08:00,pH,,,", "NOWHERE,2026-03-28T07:00,pH,7.3,")
        out, err = self.run(path, "--works", "EXA", "--now", "2026-04-02T09:00Z")
        assert "3 lines read" in out
        assert "2 added" in out
        assert "1 not taken (1 of them without a reason)" in out
        assert f"{path.name}:4: read site 'NOWHERE'" in err
        assert Reading.objects.first().entry.recorded_at == dt.datetime(2026, 4, 2, 9, 0, tzinfo=dt.UTC)

    def test_adds_sites_and_renames_them(self, example, sheet, tmp_path):
        renamed = tmp_path / "map.csv"
        renamed.write_text("from,to\nOUT,ENTRY\n")
        path = sheet("OUT,2026-03-28T07:00,pH,7.3,", "TAP-9,2026-03-28T07:00,pH,7.5,")
        out, _ = self.run(path, "--works", "EXA", "--add-sites", "--site-map", renamed)
        assert "1 sample points added: TAP-9" in out
        assert works.stated(example).site_kind("TAP-9", dt.datetime(2020, 1, 1, tzinfo=dt.UTC)) == "sample_point"
        assert sorted(Reading.objects.values_list("site", flat=True)) == ["ENTRY", "TAP-9"]

    def test_refuses_an_empty_file_in_one_sentence(self, example, tmp_path):
        path = tmp_path / "empty.csv"
        path.write_bytes(b"")
        with pytest.raises(CommandError, match="is empty"):
            self.run(path, "--works", "EXA")

    def test_exits_with_an_error_where_nothing_was_kept(self, example, sheet):
        path = sheet("NOWHERE,2026-03-28T07:00,pH,7.3,")
        with pytest.raises(CommandError, match="nothing was kept"):
            self.run(path, "--works", "EXA", "--all-or-nothing")


def test_a_long_file_is_taken_an_entry_at_a_time_and_never_held_in_memory(example, tmp_path, now, monkeypatch):
    """Six thousand lines in six entries of a thousand; what is held at once doesn't grow with the file."""
    monkeypatch.setattr(records, "ENTRY_LINES", 1000)
    path = tmp_path / "long.csv"
    start = dt.datetime(2020, 1, 1)
    with path.open("w") as file:
        file.write("site,timestamp,parameter,value,unit\n")
        for minute in range(6_000):
            file.write(f"ENTRY,{start + dt.timedelta(minutes=5 * minute):%Y-%m-%dT%H:%M}Z,pH,{7 + minute % 90 / 100:.2f},\n")
    sheet = records.open_file(path)
    alive = []

    def watch(text):
        # Asked of the type: isinstance would wake whatever lazy object another test has left behind.
        alive.append(sum(type(thing) is Reading for thing in gc.get_objects()))

    counted = records.bring_in(
        book=example, sheet=sheet, wanted=records.Wanted(), by=None, now=now, progress=watch, judge=False
    )
    assert (counted.lines, counted.added) == (6_000, 6_000)
    assert Entry.objects.filter(kind="file").count() == 6
    assert len(alive) == 6
    assert max(alive) <= 2_000
