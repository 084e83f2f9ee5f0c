"""The demo works in a database: made once, as written, with people who can sign in and rights as stated."""

import datetime as dt
import stat
from io import StringIO
from zoneinfo import ZoneInfo

import pytest
from django.core.management import CommandError, call_command

from plant import clock
from plant.accounts.models import Person
from plant.demo import files, heath, kestrel, life, make, people, rows, simulate
from plant.demo.make import Demo
from plant.deviations import queries as deviations
from plant.ledger import queries as books
from plant.ledger import verify
from plant.ledger.models import Book, Entry
from plant.readings import queries as readings
from plant.readings.models import Reading
from plant.works import access, load, parameters, queries

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 7, 9, 12, 0, tzinfo=dt.UTC)


@pytest.fixture
def made(settings, tmp_path, monkeypatch):
    settings.WEIRBOOK_DATA = tmp_path
    monkeypatch.setattr(clock, "now", lambda: NOW)
    out = StringIO()
    call_command("make_demo", months=1, stdout=out, stderr=StringIO())
    return out.getvalue()


def test_the_demo(made, tmp_path):
    book = books.book("KFW")
    assert list(verify.everything()) == []
    path = tmp_path / people.PEOPLE_FILE
    assert path.read_text() == made
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    for role in people.CAST:
        line = next(line for line in made.splitlines() if line.split()[:1] == [role.username])
        assert Person.objects.get(username=role.username).check_password(line.split()[1])
        member = access.member(queries.stated(book), role.username, NOW)
        assert member.role == role.role
        assert member.may("report.sign_certified") == role.may_certify
    assert book.head_at <= NOW
    assert Entry.objects.filter(book=book, kind="round").count() > 70
    last = readings.latest(book, "FT-TREATED", "totaliser", before=NOW)
    assert NOW - last.at < dt.timedelta(hours=12)
    out = StringIO()
    call_command("demo_month", stdout=out)
    assert out.getvalue() == "KFW 2026-06\n"
    found = deviations.between(book, dt.date(2026, 6, 1), dt.date(2026, 7, 9))
    assert any(view.state == "closed" for view in found)
    with pytest.raises(CommandError, match="there is a works KFW"):
        call_command("make_demo", months=1)


def test_both_plans_are_works_files_that_load():
    for plan in heath.PLANS.values():
        history = simulate.simulate(plan, seed=1, first=dt.date(2026, 1, 1), last=dt.date(2026, 2, 28))
        text = make.works_file.text(plan, history)
        assert load.load(data=text.encode(), by=None, now=NOW).new_book
        assert load.load(data=text.encode(), by=None, now=NOW).entry is None


def test_every_line_is_due_and_known_in_its_unit():
    for plan in heath.PLANS.values():
        stated = load.load(data=make.works_file.text(plan).encode(), by=None, now=NOW).book
        stated = queries.stated(stated)
        for line in plan.lines:
            unit = parameters.unit_at(stated, NOW, line.site, line.parameter)
            assert line.unit in (unit, "pH") or line.parameter == "feeder_setting", line
        assert len(stated.round_lines(NOW)) == len(plan.lines)
        by_shift = [line for line in stated.round_lines(NOW) if line.due == "shift"]
        assert len(by_shift) >= 15


def test_corrections_settlements_and_reversals_stand_in_the_book():
    first, last = dt.date(2026, 1, 1), dt.date(2026, 3, 15)
    days = (last - first).days + 1
    told = [item for item in kestrel.incidents(days) if item.what in ("second_thoughts", "wrong_reading", "wrong_booking")]
    history = simulate.simulate(kestrel.KESTREL, seed=2, first=first, last=last, incidents=told)
    cast, _ = people.add(now=history.grid.start - dt.timedelta(days=3))
    demo = Demo(history, cast)
    closed = []
    make.replay(demo, progress=lambda _: None, each_day=lambda day, _: closed.append(day))
    assert closed[0] == first
    assert closed == sorted(closed)
    assert list(verify.everything()) == []
    corrected = Reading.objects.filter(supersedes__isnull=False).get()
    assert (corrected.parameter, corrected.reason) == ("hardness", "figures swapped when typing")
    marked = Reading.objects.exclude(marks=[])
    assert marked.count() == 2
    assert {reading.value > 14 for reading in marked} == {True}
    kinds = dict.fromkeys(Entry.objects.values_list("kind", flat=True))
    assert {"works_file", "settings", "round", "line", "correction", "settlement"} <= kinds.keys()
    with pytest.raises(Person.DoesNotExist):
        Person.objects.get(username="stan")


def test_what_a_line_becomes():
    at = dt.datetime(2026, 1, 1, 6, 5, tzinfo=dt.UTC)
    row = make.rows.Row("RAW", "pH", at, "734", "pH")
    kept = rows.reading(row)
    assert (kept.value, kept.unit, kept.typed_unit, kept.marks) == (734.0, "", "pH", ["impossible", "lost_decimal_point"])
    censored = rows.reading(make.rows.Row("ENTRY", "iron", at, "<0.02", "mg/L"))
    assert (censored.value, censored.qualifier, censored.value_text, censored.typed) == (0.02, "<", "0.02", "<0.02")
    empty = rows.reading(make.rows.Row("ENTRY", "iron", at, "", "mg/L", "reagent used up"))
    assert (empty.state, empty.value, empty.note) == ("not_taken", None, "reagent used up")


def test_write_simulation(tmp_path):
    out = StringIO()
    options = {"seed": 3, "months": 2, "plan": "HEW", "last": dt.date(2026, 4, 30), "out": tmp_path / "sim"}
    call_command("write_simulation", stdout=out, **options)
    names = {path.name for path in (tmp_path / "sim").iterdir()}
    assert names == {"works.toml", "records.csv", "deliveries.csv", "transfers.csv", "truth.csv", "truth_days.csv"}
    first = (tmp_path / "sim" / "records.csv").read_text().splitlines()
    assert first[0] == ",".join(files.RECORD_COLUMNS)
    days = (tmp_path / "sim" / "truth_days.csv").read_text().splitlines()
    assert days[1].startswith("2026-03-01,")
    assert days[-1].startswith("2026-04-30,")
    assert not Book.objects.exists()


def test_the_last_full_month_ends_with_its_closing_round():
    zone = ZoneInfo("Europe/Berlin")
    for hour, month in ((6, "2026-05"), (9, "2026-06")):
        now = dt.datetime(2026, 7, 1, hour, 0, tzinfo=zone).astimezone(dt.UTC)
        history = simulate.simulate(kestrel.KESTREL, seed=1, first=dt.date(2026, 5, 1), last=dt.date(2026, 6, 30), until=now)
        assert f"{life.last_full_month(history):%Y-%m}" == month
