"""The board's pages as they are answered: what stands in them, for whom, and with how many questions to the database."""

from __future__ import annotations

import csv
import datetime as dt
import html
import io
import re

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from plant import clock
from plant.ledger import actions as ledger
from plant.readings.models import Reading
from tests import people
from tests.board import books

NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
DAY = "2026-03-09"


@pytest.fixture
def at_ten(monkeypatch):
    """It is 10:00 in the morning of 10 March 2026, local."""
    monkeypatch.setattr(clock, "now", lambda: NOW)


@pytest.fixture
def book(db, at_ten):
    return books.with_history(days=20, now=NOW)


def page(username: str, path: str) -> str:
    answer = people.signed_in(username).get(path)
    assert answer.status_code == 200, (path, answer.status_code)
    return html.unescape(answer.content.decode())


class TestBoard:
    def test_nothing_open_says_so(self, book):
        assert "Nothing needs anyone." in page("sam", "/w/TST/")

    def test_a_deviation_is_listed_with_cause_since_and_who(self, book):
        row = books.raise_one(book, now=NOW)
        text = page("sam", "/w/TST/")
        assert "1 thing needs someone." in text
        assert "Free chlorine, Works outlet: outside its limit" in text
        assert "Most likely the product is weak." in text
        assert "since 07:00" in text
        assert "nobody yet" in text
        assert f'href="/w/TST/deviations/{row.ref}/"' in text

    def test_the_newest_values_stand_along_the_line_of_water(self, book):
        text = page("sam", "/w/TST/")
        places = [text.index(name) for name in ("Raw water", "After filtration", "Works outlet")]
        assert places == sorted(places)
        newest = Reading.objects.get(book=book, site="ENTRY", parameter="pH", taken_at=books.local(dt.date(2026, 3, 10), 7))
        assert f'href="/w/TST/reading/{newest.ref}/">{newest.typed}</a>' in text

    def test_the_value_a_deviation_speaks_of_carries_its_mark(self, book):
        assert 'aria-label="action"' not in page("sam", "/w/TST/")
        books.raise_one(book, now=NOW)
        assert page("sam", "/w/TST/").count('aria-label="action"') == 1

    def test_a_dose_shows_its_strip_and_each_number_opens(self, book):
        text = page("sam", "/w/TST/")
        assert f'href="/w/TST/trail/?key=used%3ACAUSTIC-PH%3A{DAY}"' in text
        assert text.count('<svg class="scene"') == 3

    def test_an_operator_sees_no_whisker(self, book):
        assert "±" in page("sam", "/w/TST/")
        assert "±" not in page("olga", "/w/TST/")

    def test_a_dosing_point_on_standby_shows_no_dose(self, book):
        from plant.works import actions

        actions.state(
            book=book, kind="state", subject="dosing_point:PEROX-PRE", value={"is": "standby"}, effective_from=NOW,
            reason="not needed in winter", by=None, now=NOW,
        )  # fmt: skip
        text = page("sam", "/w/TST/")
        assert "on standby" in text
        assert text.count('<svg class="scene"') == 2

    def test_a_missing_shift_is_named_line_by_line(self, db, monkeypatch):
        monkeypatch.setattr(clock, "now", lambda: NOW)
        books.with_history(days=5, now=NOW - dt.timedelta(hours=20))
        text = page("olga", "/w/TST/")
        assert "7 values of the round are missing" in text
        assert "Free chlorine at ENTRY (9 Mar night shift)" in text
        assert 'href="/w/TST/round/">Enter them' in text
        assert 'href="/w/TST/round/">Enter them' not in page("ira", "/w/TST/")

    def test_an_empty_works_says_what_to_do_first(self, db, at_ten):
        people.small_works()
        assert "No readings in the last three days." in page("sam", "/w/TST/")

    def test_what_is_fetched_again_is_the_inside_of_the_page(self, book):
        inside = page("sam", "/w/TST/now/")
        assert "<html" not in inside
        assert inside.strip() in page("sam", "/w/TST/")

    def test_the_list_of_works_shows_the_worst_first(self, book):
        books.raise_one(book, now=NOW)
        text = page("olga", "/")
        assert "1 thing needs someone." in text
        assert "you are operator" in text


class TestFewQuestions:
    """As many questions with a year as with a week: a screen costs what it shows."""

    def asked(self, path: str) -> int:
        client = people.signed_in("sam")
        client.get(path)
        with CaptureQueriesContext(connection) as found:
            client.get(path)
        return len(found)

    @pytest.mark.parametrize(
        ("path", "most"),
        [
            ("/", 8),
            ("/w/TST/", 16),
            ("/w/TST/stock/", 18),
            ("/w/TST/dosing/HYPO-POST/", 16),
            ("/w/TST/readings/", 8),
            (f"/w/TST/trail/?key=used:HYPO-POST:{DAY}", 20),
        ],
    )
    def test_pages_ask_little(self, db, at_ten, path, most):
        book = books.with_history(days=100, now=NOW)
        for _ in range(3):
            books.raise_one(book, now=NOW)
        assert self.asked(path) <= most


class TestDosingPoint:
    def test_it_answers_in_a_sentence_and_shows_ninety_days(self, book):
        text = page("sam", "/w/TST/dosing/CAUSTIC-PH/")
        assert re.search(r"On 9 March [\d.]+ mg/L was used, \d+ % (above|below) the design of 8.00", text)
        assert "Dose as NaOH from 10 December 2025 to" in text

    def test_the_table_has_a_row_a_day_and_exports_as_the_command_does(self, book):
        answer = people.signed_in("sam").get("/w/TST/dosing/CAUSTIC-PH/?export=csv")
        rows = list(csv.DictReader(io.StringIO(answer.content.decode())))
        assert len(rows) == 90
        last = rows[-1]
        assert (last["operating_day"], last["dosing_point"]) == (DAY, "CAUSTIC-PH")
        assert float(last["volume_ml"]) == pytest.approx(6.0)
        assert float(last["used_mg_per_L"]) == pytest.approx(8.0, rel=0.06)
        assert rows[0]["used_mg_per_L"] == ""

    def test_what_happened_is_listed_and_flagged(self, book):
        from plant.works import actions

        actions.state(
            book=book, kind="design_dose", subject="CAUSTIC-PH", value={"dose_mg_per_L": 7.5},
            effective_from=NOW - dt.timedelta(days=3), reason="softer water", by=None, now=NOW,
        )  # fmt: skip
        books.raise_one(
            book, now=NOW, kind="dose_vs_design", level="alert", subject="CAUSTIC-PH", parameter="", code="c",
            subject_kind="dosing_point",
        )  # fmt: skip
        text = page("sam", "/w/TST/dosing/CAUSTIC-PH/")
        assert "design dose 7.5 mg/L: softer water" in text
        assert "alert: dose away from design, raised" in text
        assert '<a href="/w/TST/settings/" aria-label="7 Mar: setting: design dose 7.5 mg/L: softer water">' in text

    def test_an_earlier_day_can_be_asked_for(self, book):
        text = page("sam", "/w/TST/dosing/CAUSTIC-PH/?day=2026-03-05")
        assert "Operating day 5 Mar" in text
        assert "Day after" in text
        assert "Operating day 9 Mar" in page("sam", "/w/TST/dosing/CAUSTIC-PH/?day=2027-01-01")
        assert "Operating day 9 Mar" in page("sam", "/w/TST/dosing/CAUSTIC-PH/?day=nonsense")

    def test_one_that_is_not_stated_is_not_there(self, book):
        assert people.signed_in("sam").get("/w/TST/dosing/NOPE/").status_code == 404

    def test_days_sort_by_the_number_not_by_the_words(self, book):
        text = page("sam", "/w/TST/dosing/CAUSTIC-PH/?sort=-product")
        body = text[text.index('id="days"') :]
        masses = [float(one) for one in re.findall(r"key=product[^>]*>([\d.]+) kg", body)]
        assert len(masses) > 10
        assert masses == sorted(masses, reverse=True)


class TestStock:
    def test_each_vessel_has_its_column_and_its_row(self, book):
        text = page("mira", "/w/TST/stock/")
        for name in ("Hypochlorite bulk tank", "Caustic tank, 1 mm is 1 L", "Peroxide container on a scale"):
            assert text.count(name) >= 2
        assert text.count("days of supply") >= 3

    def test_the_file_has_the_columns_of_the_command(self, book):
        answer = people.signed_in("mira").get("/w/TST/stock/?export=csv")
        rows = {row["vessel"]: row for row in csv.DictReader(io.StringIO(answer.content.decode()))}
        # On the scale at 07:00: gross less the tare is what the dip says.
        weight = Reading.objects.filter(book=book, site="PEROX-IBC").order_by("-taken_at")[0].value
        assert float(rows["PEROX-IBC"]["dip_kg"]) == pytest.approx(weight - 60.0)

    def test_it_opens_as_a_spreadsheet(self, book):
        answer = people.signed_in("mira").get("/w/TST/stock/?export=xlsx")
        assert answer.content[:2] == b"PK"


class TestReadings:
    def test_the_newest_stand_first_and_can_be_narrowed(self, book):
        text = page("sam", "/w/TST/readings/?site=ENTRY&parameter=pH")
        # Seven operating days back from today, two readings each but one today.
        assert "13 readings" in text
        assert "Turbidity</td>" not in text

    def test_days_are_operating_days(self, book):
        text = page("sam", f"/w/TST/readings/?site=ENTRY&parameter=pH&first={DAY}&last={DAY}")
        assert "2 readings" in text

    @pytest.mark.parametrize(
        ("span", "words"),
        [
            ("first=2026-03-09&last=2026-03-01", "lies before the first"),
            ("first=2020-01-01&last=2026-03-01", "At most 400 days at once"),
            ("first=yesterday", "Enter a valid date"),
        ],
    )
    def test_a_span_that_cannot_be_is_answered_under_its_field(self, book, span, words):
        assert words in page("sam", f"/w/TST/readings/?{span}")

    def test_a_correction_is_shown_and_said(self, book):
        old = Reading.objects.filter(book=book, site="ENTRY", parameter="pH").order_by("-taken_at")[0]
        new = books.reading(old.taken_at, "ENTRY", "pH", 7.99, "", 2, supersedes=old, reason="misread the display")
        ledger.append(book=book, client_id="c", kind="correction", received={}, rows=[new], by=people.person("sam"), now=NOW)
        text = page("sam", "/w/TST/readings/?site=ENTRY&parameter=pH")
        assert "13 readings" in text
        assert len(re.findall(r'<tr class="[^"]*corrected', text)) == 1
        assert ">7.99</a>" in text

    def test_the_file_can_be_brought_in_again(self, book):
        answer = people.signed_in("sam").get(f"/w/TST/readings/?first={DAY}&last={DAY}&export=csv")
        rows = list(csv.DictReader(io.StringIO(answer.content.decode())))
        assert len(rows) == 26
        assert rows[0]["timestamp"] == "2026-03-09T07:00:00+01:00"
        assert {"site", "timestamp", "parameter", "value", "unit"} <= set(rows[0])


class TestTrail:
    def test_it_goes_down_to_readings_with_who_and_when(self, book):
        text = page("ira", f"/w/TST/trail/?key=used:CAUSTIC-PH:{DAY}")
        assert "Dose used, CAUSTIC-PH, operating day 2026-03-09" in text
        assert "Dose is mass over volume" in text
        start = Reading.objects.get(
            book=book, site="NAOH-BULK", parameter="level", taken_at=books.local(dt.date(2026, 3, 9), 7)
        )
        assert f'<a href="/w/TST/reading/{start.ref}/">NAOH-BULK, level: typed {start.typed} m</a>' in text
        assert f"(Olga Ottesen, recorded yesterday 20:00; no. {start.ref} of the book)" in text
        assert "setting: vessel NAOH-BULK, in force from the beginning" in text

    def test_a_corrected_reading_says_what_it_was_and_why(self, book):
        old = Reading.objects.get(book=book, site="FT-TREATED", taken_at=books.local(dt.date(2026, 3, 9), 7))
        new = books.reading(
            old.taken_at, "FT-TREATED", "totaliser", old.value + 10, "m3", 0, supersedes=old, reason="two digits swapped"
        )
        ledger.append(book=book, client_id="c", kind="correction", received={}, rows=[new], by=people.person("sam"), now=NOW)
        text = page("ira", f"/w/TST/trail/?key=volume:CAUSTIC-PH:{DAY}")
        assert f"corrected: was {old.typed} m3, because two digits swapped" in text
        assert "Sam Sundby" in text

    def test_sources_are_cited_in_full(self, book):
        from chemistry import sources

        text = page("ira", f"/w/TST/trail/?key=need:CAUSTIC-PH:{DAY}")
        cited = re.findall(r"Source: ([^<]+)</p>", text)
        assert cited
        assert not set(cited) & set(sources.SOURCES)
        assert any(one.strip() in sources.SOURCES.values() for one in cited)
        assert "FILTERED, pH: typed 7.31" in text

    def test_the_panel_is_the_inside_of_the_page(self, book):
        inside = page("sam", f"/w/TST/trail/?panel=1&key=need:HYPO-POST:{DAY}")
        assert "<html" not in inside
        assert "Need model “oxidant_demand”" in inside

    @pytest.mark.parametrize("key", ["", "used", "used:NOPE:2026-03-09", "used:HYPO-POST:then", "used:HYPO-POST:2026-03-09..x"])
    def test_a_figure_that_is_not_there_is_not_found(self, book, key):
        assert people.signed_in("sam").get("/w/TST/trail/", {"key": key}).status_code == 404


class TestHelp:
    def test_every_page_of_the_list_is_there_and_says_something(self, db):
        from plant.board import guide

        for slug, topic in guide.TOPICS.items():
            text = page("stan", f"/help/{slug}/")
            words = re.sub(r"<[^>]+>", " ", text[text.index('class="prose') : text.index("</main>")])
            assert len(words.split()) > 40, slug
            assert topic.title in text
        assert people.signed_in("stan").get("/help/nothing/").status_code == 404

    def test_the_cautions_defer_to_those_who_answer_for_it(self, db):
        text = page("stan", "/help/cautions/")
        assert "The operator in charge and the supplier’s safety data sheet decide." in text
        assert "The local regulator’s rules govern." in text
        assert "Never let an acid" in text


class TestErrors:
    def test_a_page_that_is_not_there(self, db):
        answer = people.signed_in("stan").get("/nothing/")
        assert (answer.status_code, "No such page" in answer.content.decode()) == (404, True)

    def test_what_a_role_may_not_says_which_right_is_wanted(self, book):
        answer = people.signed_in("ira").get("/w/TST/import/")
        assert answer.status_code == 403
        assert "Nothing was changed." in answer.content.decode()

    def test_a_broken_page_says_what_became_of_what_was_sent(self, db, monkeypatch):
        from plant.board import views

        client = people.signed_in("stan")
        client.raise_request_exception = False
        monkeypatch.setattr(views.guide, "GROUPS", None)
        monkeypatch.setattr(views, "render", lambda *_: 1 / 0)
        answer = client.get("/help/")
        assert answer.status_code == 500
        assert "What you sent may not have been kept." in answer.content.decode()
