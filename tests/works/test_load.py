"""Works files: loaded twice, dated, withdrawn, wrong in every way."""

import datetime as dt
import re
from io import StringIO

import pytest
from django.core.management import CommandError, call_command

from plant import clock
from plant.ledger import queries as books
from plant.ledger.models import Book, Entry
from plant.works import load, models, queries
from tests import people

pytestmark = pytest.mark.django_db
SMALL = people.SMALL.read_text()
NOW = people.OPENED
LATER = NOW + dt.timedelta(days=40)


def again(text: str, **options):
    return load.load(data=text.encode(), by=None, **({"now": LATER} | options))


def refused(text: str) -> list[str]:
    with pytest.raises(load.FileRefused) as problem:
        again(text)
    return problem.value.messages


def changed(old: str, new: str, text: str = SMALL) -> str:
    assert text.count(old) >= 1, old
    return text.replace(old, new, 1)


def test_the_first_load_opens_the_book_and_holds_from_the_beginning():
    book = people.open_works(SMALL)
    stated = queries.stated(book)
    assert stated.works(clock.BEGINNING).name == "Testing Ford Water Works"
    assert stated.vessel("NAOH-BULK", clock.BEGINNING).form["diameter_m"] == 1.1283792
    assert [shift.name for shift in stated.shifts(NOW)] == ["day", "night"]
    assert len(stated.round_lines(NOW)) == 7
    assert stated.round_lines(NOW)[1].site == "ENTRY"


def test_a_date_without_offset_is_the_works_own_time():
    stated = queries.stated(people.open_works(SMALL))
    seven_in_berlin = dt.datetime(2026, 1, 1, 6, 0, tzinfo=dt.UTC)
    assert stated.design_dose_mg_l("CAUSTIC-PH", seven_in_berlin) == 8.0
    assert stated.design_dose_mg_l("CAUSTIC-PH", seven_in_berlin - dt.timedelta(seconds=1)) is None
    assert stated.history("opening_stock", "HYPO-BULK")[0].effective_from == seven_in_berlin


def test_a_date_alone_is_the_start_of_that_operating_day():
    text = changed("effective_from = 2026-01-01T07:00:00", "effective_from = 2026-07-01")
    stated = queries.stated(people.open_works(text))
    assert stated.history("design_dose", "HYPO-POST")[0].effective_from == dt.datetime(2026, 7, 1, 5, tzinfo=dt.UTC)


def test_loading_twice_changes_nothing():
    book = people.open_works(SMALL)
    entries, rows = Entry.objects.count(), models.Statement.objects.count()
    done = again(SMALL)
    assert (done.entry, done.unchanged) == (None, rows)
    assert (Entry.objects.count(), models.Statement.objects.count()) == (entries, rows)
    assert done.book == book


def test_only_what_differs_is_stated_and_from_now():
    book = people.open_works(SMALL)
    done = again(
        changed(
            "dose_mg_per_L = 8.0\neffective_from = 2026-01-01T07:00:00",
            "dose_mg_per_L = 9.0\neffective_from = 2026-02-01T07:00:00",
        ).replace('name = "Raw water"', 'name = "Raw water, wells 1 to 4"')
    )
    assert done.stated == 2
    stated = queries.stated(book)
    assert stated.design_dose_mg_l("CAUSTIC-PH", dt.datetime(2026, 2, 1, 6, tzinfo=dt.UTC)) == 9.0
    assert stated.design_dose_mg_l("CAUSTIC-PH", dt.datetime(2026, 2, 1, 5, tzinfo=dt.UTC)) == 8.0
    assert next(point.name for point in stated.sample_points(LATER)) == "Raw water, wells 1 to 4"
    assert next(point.name for point in stated.sample_points(LATER - dt.timedelta(seconds=1))) == "Raw water"


def test_a_file_with_a_subject_twice_loads_twice_without_change():
    text = SMALL + '[[meter]]\ncode = "FT-TREATED"\nunit = "m3"\ndigits = 8\neffective_from = 2026-01-20T07:00:00\n'
    people.open_works(text)
    assert again(text).entry is None


def test_absent_withdraws_nothing_and_withdrawn_withdraws():
    book = people.open_works(SMALL)
    head = SMALL[: SMALL.index("[[shift]]")]
    assert again(head).entry is None
    gone = head + '[[limit]]\ncode = "entry-ph"\nwithdrawn = true\neffective_from = 2026-02-01T07:00:00\n'
    assert again(gone).stated == 1
    assert again(gone).entry is None
    stated = queries.stated(book)
    assert stated.value("limit", "entry-ph", dt.datetime(2026, 1, 31, tzinfo=dt.UTC)) is not None
    assert stated.value("limit", "entry-ph", dt.datetime(2026, 2, 2, tzinfo=dt.UTC)) is None


def test_as_known_before_the_second_load():
    book = people.open_works(SMALL)
    again(changed("dose_mg_per_L = 8.0", "dose_mg_per_L = 7.5"))
    day = dt.datetime(2026, 1, 10, tzinfo=dt.UTC)
    before = books.seq_known_at(book, LATER - dt.timedelta(hours=1))
    assert queries.stated(book).design_dose_mg_l("CAUSTIC-PH", day) == 7.5
    assert queries.stated(book, known=before).design_dose_mg_l("CAUSTIC-PH", day) == 8.0


def test_a_limit_keeps_its_own_digits():
    stated = queries.stated(people.open_works(SMALL))
    assert {limit.code: limit.keys["decimals"] for limit in stated.limits(NOW)} == {
        "entry-free-chlorine-low": 2,
        "entry-ph": 1,
    }


ONE_WRONG = [
    ('code = "TST"', 'code = "T S T"', "[works]", "code 'T S T'"),
    ('timezone = "Europe/Berlin"', 'timezone = "Europe/Nowhere"', "[works]", "Europe/Nowhere"),
    ('operating_day_starts = "07:00"', 'operating_day_starts = "7 am"', "[works]", "local time such as 07:00"),
    ('units = "si"', 'units = "metric"', "[works]", "one of si, us"),
    ('stage = "entry"', 'stage = "exit"', "[[sample_point]] number 3 (ENTRY)", "raw, process, entry, network"),
    ('unit = "m3"\n', 'unit = "cubic metres"\n', "[[meter]] number 1 (FT-TREATED)", "m3, ML, L"),
    ("digits = 7", "digits = 7.5", "[[meter]]", "whole number"),
    ("max_flow_m3_per_h = 1200", "max_flow_m3_per_h = 0", "[[meter]]", "greater than 0"),
    ("strength = 125.0", "strength = -125.0", "[[product]] number 1 (HYPO)", "greater than 0"),
    ("strength = 125.0", "strength = nan", "[[product]] number 1 (HYPO)", "a number greater than 0"),
    ("strength = 25.0", "strength = 250.0", "[[product]] number 2 (NAOH)", "at most 100"),
    ('strength_basis = "weight_pct"', 'strength_basis = "percent"', "[[product]]", "trade_pct"),
    ("density_kg_per_L = 1.20\n", "", "[[product]] number 1 (HYPO)", "density_kg_per_L is missing"),
    ("density_kg_per_L = 1.273\n", "", "[[vessel]] number 2 (NAOH-BULK)", "has no density_kg_per_L"),
    ('dose_basis = "Cl2"', 'dose_basis = "chlorine"', "[[product]]", "product, active, Cl2"),
    ('no_delivery_days = ["Sat", "Sun"]', 'no_delivery_days = ["Samstag"]', "[[product]]", "Mon, Tue"),
    ("diameter_m = 1.6\n", "", "[[vessel]] number 1 (HYPO-BULK)", "diameter_m is missing"),
    ("diameter_m = 1.6", 'diameter_m = "1.6"', "[[vessel]]", "read '1.6'"),
    ('shape = "scale"', 'shape = "sphere"', "[[vessel]] number 3 (PEROX-IBC)", "vertical_cylinder"),
    ("tare_kg = 60.0", "diameter_m = 2.0", "[[vessel]] number 3 (PEROX-IBC)", "unknown key diameter_m for shape"),
    ('product = "PEROX"\nrole', 'product = "PEROXIDE"\nrole', "[[vessel]] number 3", "no product 'PEROXIDE' is stated"),
    ('vessels = ["HYPO-BULK"]', "vessels = []", "[[dosing_point]] number 1 (HYPO-POST)", "list of codes"),
    ('vessels = ["HYPO-BULK"]', 'vessels = ["HYPO-DAY"]', "[[dosing_point]]", "no vessel 'HYPO-DAY' is stated"),
    ('vessels = ["HYPO-BULK"]', 'vessels = ["NAOH-BULK"]', "[[dosing_point]]", "holds NAOH, expected HYPO"),
    ('model = "oxidant_demand"', 'model = "guess"', "[[dosing_point]]", "unknown model 'guess'"),
    ("demand_mg_per_L = 0.6, ", "", "[[dosing_point]]", "either demand_mg_per_L or demand_from"),
    ("target_ph = 8.2", "target_ph = 82", "[[dosing_point]] number 2 (CAUSTIC-PH)", "not above 14"),
    ("target_ph = 8.2", "target_ph = 8.2, ph = 3", "[[dosing_point]]", "unknown key ph for model target_ph"),
    ('dosing_point = "PEROX-PRE"', 'dosing_point = "PEROX"', "[[design_dose]] number 3", "no dosing point 'PEROX'"),
    ("dose_mg_per_L = 8.0", "dose_mg_per_l = 8.0", "[[design_dose]] number 2", "unknown key dose_mg_per_l"),
    ('kind = "bound"', 'kind = "limit"', "[[limit]] number 1", "held_below"),
    ('level = "action"', 'level = "severe"', "[[limit]] number 1", "regulatory"),
    ("low = 0.30\n", "", "[[limit]] number 1", "expected low, high or both"),
    ("low = 7.8\nhigh = 8.6", "low = 8.6\nhigh = 7.8", "[[limit]] number 2 (entry-ph)", "low 8.6 is above high 7.8"),
    ("low = 7.8", "low = 7.8\nhours = 4", "[[limit]] number 2 (entry-ph)", "unknown key hours for kind bound"),
    ('unit = "mg/L"\nsource', 'unit = "NTU"\nsource', "[[limit]] number 1", "NTU"),
    ('parameter = "free_chlorine"\nkind', 'parameter = "chlorine"\nkind', "[[limit]]", "'chlorine' is not known"),
    ("within_hours = 24", 'within = "a day"', "[[limit]]", "key within_hours is missing"),
    ('parameter = "weight"', 'parameter = "pH"', "[[round_line]] number 6 (PEROX-IBC)", "not read at a vessel"),
    ('due = "shift"', 'due = "hourly"', "[[round_line]] number 1 (RAW)", "shift, day, week, month"),
    ('is = "in_service"', 'is = "on"', "[[state]]", "in_service, standby, off"),
    ("baffling_factor = 0.5", "baffling_factor = 5", "[[contact_segment]]", "not above 1"),
    ('unit = "mg/L"\n\n[[opening', 'unit = "furlong"\n\n[[opening', "[[parameter]] number 1 (tannin)", "furlong"),
    ('name = "tannin"', 'name = "iron"', "[[parameter]] number 1 (iron)", "built in"),
    ("timestamp = 2026-01-01T07:00:00", 'timestamp = "in January"', "[[opening_stock]]", "'in January'"),
    ("effective_from = 2026-01-01T07:00:00", "effective_from = 2026-03-29T02:30:00", "[[design_dose]]", "does not exist"),
    ("effective_from = 2026-01-01T07:00:00", "effective_from = 2026-10-25T02:30:00", "[[design_dose]]", "happened twice"),
    ("due_day = 10", "due_day = 31", "[report]", "not above 28"),
    ('code = "RAW"\n', "", "[[sample_point]] number 1", "key code is missing"),
    ('code = "RAW"', 'code = "FT-TREATED"', "FT-TREATED", "names a sample point already"),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "block", "words"), ONE_WRONG)
def test_one_wrong_thing_is_named_and_nothing_is_written(old, new, block, words):
    messages = refused(changed(old, new))
    assert any(block in message and words in message for message in messages), messages
    assert not Book.objects.exists()


def test_all_that_is_wrong_is_said_at_once():
    text = changed("strength = 125.0", "strength = 0").replace('stage = "entry"', 'stage = "exit"')
    text = text.replace("low = 0.30\n", "")
    messages = refused(text)
    assert [re.match(r"\[+\w+", message)[0] for message in messages] == ["[[sample_point", "[[product", "[[limit"]


def test_vessels_that_fill_each_other_are_refused():
    day = (
        '[[vessel]]\ncode = "HYPO-DAY"\nproduct = "HYPO"\nrole = "day"\nshape = "vertical_cylinder"\n'
        'diameter_m = 0.8\nheight_m = 1.0\nfed_from = "HYPO-BULK"\n'
    )
    text = changed("heel_L = 150", 'heel_L = 150\nfed_from = "HYPO-DAY"') + day
    messages = refused(text)
    assert any("in a circle: HYPO-BULK ← HYPO-DAY ← HYPO-BULK" in message for message in messages), messages
    assert people.open_works(SMALL + day).code == "TST"


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "the file is empty"),
        (b" \n\n", "the file is empty"),
        (SMALL.replace("Testing", "Tésting").encode("latin-1"), "not UTF-8"),
        (b"\xff\xfe" + SMALL.encode("utf-16-le"), "not UTF-8"),
        (b"[works\n", "not TOML"),
        (SMALL.encode() + b"x" * load.MOST_BYTES, "expected at most"),
        (b'[works]\ncode = "A"\nx = ' + b"[" * 20000, "nests"),
        (b".".join([b"a"] * 100_000) + b" = 1", "more than 16 parts"),
        (b"[[vessel]]\n" * 6000, "expected at most 5,000"),
        (b"vessel = 3\n", "expected a block"),
        (b"[[tank]]\n", "unknown block 'tank'"),
        (b'[[membership]]\nusername = "stan"\nrole = "manager"\n', "unknown block 'membership'"),
        (b'[[shift]]\nname = "day"\nstarts = "07:00"\n', "expected one [works] block"),
        (b"[works]\n", "key code is missing"),
        (b'[works]\ncode = "A"\nx = ' + b"9" * 5000, "not TOML"),
    ],
)
def test_a_file_that_is_no_works_file(data, words):
    with pytest.raises(load.FileRefused) as problem:
        load.load(data=data, by=None, now=NOW)
    assert words in str(problem.value)
    assert not Book.objects.exists()


def test_the_same_thing_twice_in_one_file_must_agree():
    block = SMALL[SMALL.index("[[contact_segment]]") : SMALL.index("[[parameter]]")]
    assert people.open_works(SMALL + block).code == "TST"
    other = SMALL + block.replace("volume_m3 = 900", "volume_m3 = 800")
    assert any("states this twice, differently" in message for message in refused(other))


def test_the_command(tmp_path, settings):
    path = tmp_path / "small.toml"
    path.write_text(SMALL)
    out = StringIO()
    call_command("load_works", path, now="2026-01-01T06:00:00", stdout=out)
    call_command("load_works", path, now="2026-01-02T06:00:00", stdout=out)
    assert "opened its book" in out.getvalue().splitlines()[0]
    assert "nothing new" in out.getvalue().splitlines()[1]
    assert Book.objects.get().head_at == dt.datetime(2026, 1, 1, 5, tzinfo=dt.UTC)
    dated = 'dose_mg_per_L = 8.0\neffective_from = 2026-01-01T07:00:00\nreason = "commissioning"'
    path.write_text(changed(dated, "dose_mg_per_L = 8.5"))
    with pytest.raises(CommandError, match="earlier than the book's last entry"):
        call_command("load_works", path, now="2025-12-31T06:00:00")
    call_command("load_works", path, now="2026-02-02T06:00:00", effective_from="2026-02-01T07:00", reason="trial", stdout=out)
    last = models.Statement.objects.order_by("seq").last()
    assert (last.reason, last.effective_from) == ("trial", dt.datetime(2026, 2, 1, 6, tzinfo=dt.UTC))
    settings.WEIRBOOK_ALLOW_NOW = False
    with pytest.raises(CommandError, match="WEIRBOOK_ALLOW_NOW"):
        call_command("load_works", path, now="2026-03-02T06:00:00")


def test_the_command_names_the_file_and_every_fault(tmp_path):
    path = tmp_path / "wrong.toml"
    path.write_text(changed("strength = 125.0", "strength = 0").replace('stage = "entry"', 'stage = "exit"'))
    with pytest.raises(CommandError) as problem:
        call_command("load_works", path)
    lines = str(problem.value).splitlines()
    assert str(path) in lines[0]
    assert len(lines) == 3
    with pytest.raises(CommandError, match="can't be read"):
        call_command("load_works", tmp_path / "absent.toml")


def test_the_opener_is_the_first_administrator():
    call_command("first_administrator", "rita", stdout=StringIO())
    book = people.open_works(SMALL)
    assert queries.stated(book).value("membership", "rita", NOW)["role"] == "administrator"
