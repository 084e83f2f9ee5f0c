"""Loads and transfers against the checks: product, what stands beside it, room, the papers against the vessel's own rise."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile

from plant import clock
from plant.deviations import queries as deviations
from plant.deviations import verifying
from plant.files.models import Document
from plant.intake import meeting, records
from plant.readings import marks
from plant.readings.models import Reading
from plant.stock.models import Delivery, Transfer
from plant.works import actions as works_actions
from plant.works import described
from plant.works import queries as works
from tests import people
from tests.files.test_documents import picture

NOW = dt.datetime(2026, 4, 2, 8, 0, tzinfo=dt.UTC)
DAY_TANK = {
    "name": "Caustic day tank", "product": "NAOH", "role": "day", "shape": "vertical_cylinder", "diameter_m": 1.1283792,
    "height_m": 1.0, "max_fill_pct": 90, "fed_from": "NAOH-BULK",
}  # fmt: skip


@pytest.fixture
def book(db, monkeypatch, sheet, settings, tmp_path):
    settings.WEIRBOOK_FILES = tmp_path / "files"
    book = people.small_works()
    monkeypatch.setattr(clock, "now", lambda: NOW)
    path = sheet("NAOH-BULK,2026-04-02T07:00,level,1.000,m", header="site,timestamp,parameter,value,unit")
    records.bring_in(book=book, sheet=records.open_file(path), wanted=records.Wanted(), by=None, now=NOW, judge=False)
    return book


def state(book, kind, subject, value):
    works_actions.state(
        book=book, kind=kind, subject=subject, value=value, effective_from=NOW - dt.timedelta(hours=2), by=people.person("sam"),
        now=NOW, reason="for the test",
    )  # fmt: skip


def delivery(**typed):
    return {
        "client_id": uuid.uuid4().hex, "timestamp": "2026-04-02T09:30", "vessel": "NAOH-BULK", "product": "NAOH",
        "quantity": "1273", "unit": "kg", "lot": "N-7", "strength": "", "strength_basis": "", "checked": "on",
        "others_locked": "on", "second_person": "P. Oak",
    } | typed  # fmt: skip


def transfer(**typed):
    return {
        "client_id": uuid.uuid4().hex, "timestamp": "2026-04-02T09:30", "from_vessel": "NAOH-BULK", "to_vessel": "NAOH-DAY",
        "quantity": "200", "unit": "L", "carrier_water_L": "", "note": "",
    } | typed  # fmt: skip


def deliver(who="olga", **typed):
    return people.signed_in(who).post("/w/TST/delivery/", delivery(**typed))


def move(who="olga", **typed):
    return people.signed_in(who).post("/w/TST/transfer/", transfer(**typed))


class TestBeforeConnecting:
    def test_a_wrong_product_is_said_even_while_the_form_is_not_complete(self, book):
        answer = deliver(product="HYPO", checked="", second_person="")
        page = answer.content.decode()
        assert "Do not connect" in page
        assert "holds NAOH, the load is HYPO" in page
        assert Delivery.objects.count() == 0

    def test_what_comes_of_the_two_together_is_named_with_its_source(self, book):
        state(book, "product", "ALUM", {"name": "Alum", "chemical": "Al2(SO4)3.14H2O", "strength": 48.0,
              "strength_basis": "weight_pct", "density_kg_per_L": 1.33, "dose_basis": "product"})  # fmt: skip
        page = deliver(vessel="HYPO-BULK", product="ALUM").content.decode()
        assert "Together they give chlorine gas (US Chemical Safety Board" in page

    def test_an_incompatible_neighbour_in_the_bund_refuses_and_there_is_no_way_round(self, book):
        state(book, "product", "ACID", {"name": "Sulfuric acid", "chemical": "H2SO4", "strength": 96.0,
              "strength_basis": "weight_pct", "density_kg_per_L": 1.84, "dose_basis": "product"})  # fmt: skip
        acid = {"name": "Acid tank", "product": "ACID", "containment": "BUND-B", "fed_from": None}
        state(book, "vessel", "ACID-TANK", {key: value for key, value in (DAY_TANK | acid).items() if value is not None})
        answer = deliver("sam")
        page = answer.content.decode()
        assert answer.status_code == 422
        assert "stands on the same bund BUND-B" in page
        assert "violent heat" in page
        assert Delivery.objects.count() == 0

    def test_a_shared_fill_line_counts_like_a_bund(self, book):
        stated = works.stated(book)
        for code in ("HYPO-BULK", "PEROX-IBC"):
            state(book, "vessel", code, dict(stated.value("vessel", code, NOW), fill_line="WEST"))
        stated = works.stated(book)
        vessel = described.vessel("PEROX-IBC", stated.value("vessel", "PEROX-IBC", NOW))
        (said,) = meeting.problems(stated, vessel, "PEROX", NOW, what="load")
        assert "same fill line WEST" in said
        assert "oxygen" in said

    def test_a_pair_nobody_listed_reads_not_known_and_stops_nothing(self, book):
        hypo = works.stated(book).value("vessel", "HYPO-BULK", NOW)
        state(book, "vessel", "HYPO-BULK", dict(hypo, containment="BUND-B"))
        assert "is not known here: ask the supplier" in people.signed_in("olga").get("/w/TST/delivery/").content.decode()
        assert deliver().status_code == 302

    @pytest.mark.parametrize("left_out", ["checked", "others_locked", "second_person"])
    def test_locks_second_person_and_checks_are_asked_for(self, book, left_out):
        assert deliver(**{left_out: ""}).status_code == 422
        assert Delivery.objects.count() == 0


class TestRise:
    """1 mm of the caustic tank is 1 L; 1,273 kg are 1,000 L."""

    def test_papers_and_rise_agree_and_both_levels_are_readings(self, book):
        client = people.signed_in("olga")
        answer = client.post("/w/TST/delivery/", delivery(level_before="1.000", level_after="1.995"), follow=True)
        assert "The papers say 1,000 L, the vessel rose by 995" in answer.content.decode()
        assert "They agree." in answer.content.decode()
        assert list(Reading.objects.filter(note__startswith="at the delivery").values_list("value", flat=True)) == [1.0, 1.995]

    def test_a_load_that_is_short_is_said(self, book):
        client = people.signed_in("olga")
        answer = client.post("/w/TST/delivery/", delivery(level_before="1.000", level_after="1.930"), follow=True)
        assert "70 L less. Look at the papers, the gauge and the fill line" in answer.content.decode()

    @pytest.mark.parametrize(
        ("typed", "said"),
        [
            ({"level_before": "1.0"}, "before and the level after"),
            ({"level_before": "1.9", "level_after": "1.0"}, "more after than before"),
            ({"level_before": "1.0", "level_after": "much"}, "Read"),
            ({"level_before": "1.0", "level_after": "<2"}, "Read"),
        ],
    )
    def test_levels_that_say_nothing_are_refused_beside_their_field(self, book, typed, said):
        answer = deliver(**typed)
        assert answer.status_code == 422
        assert said in answer.content.decode()
        assert Delivery.objects.count() == 0


class TestCertificate:
    def test_is_kept_with_its_delivery(self, book):
        deliver(certificate=SimpleUploadedFile("coa.jpg", picture(), "image/jpeg"))
        kept, load = Document.objects.get(), Delivery.objects.get()
        assert kept.about == load.entry.client_id
        assert kept.entry_id == load.entry_id
        assert f"/documents/{kept.ref}/" in people.signed_in("olga").get("/w/TST/delivery/").content.decode()

    def test_what_is_no_document_is_refused_and_nothing_is_written(self, book):
        answer = deliver(certificate=SimpleUploadedFile("coa.pdf", b"<script>", "application/pdf"))
        assert "no JPEG, PNG, WebP or PDF" in answer.content.decode()
        assert Delivery.objects.count() == 0


class TestTransfer:
    @pytest.fixture(autouse=True)
    def day_tank(self, book):
        state(book, "vessel", "NAOH-DAY", DAY_TANK)

    def test_is_recorded(self, book):
        assert move(quantity="12,5").status_code == 302
        assert Transfer.objects.get().quantity == 12.5

    def test_caustic_into_hypochlorite_is_refused(self, book):
        answer = move(to_vessel="HYPO-BULK")
        assert answer.status_code == 422
        assert "holds HYPO, the transfer is NAOH. Do not connect." in answer.content.decode()
        assert Transfer.objects.count() == 0

    def test_the_dilution_water_counts_against_the_room(self, book):
        """The day tank holds 1,000 L, 900 L of them may be filled."""
        assert move(quantity="800", carrier_water_L="150").status_code == 422
        assert "The transfer is 950 L" in move(quantity="800", carrier_water_L="150").content.decode()
        assert move(quantity="800", carrier_water_L="50").status_code == 302

    def test_what_has_been_moved_is_recorded_marked_and_raised(self, book):
        assert move(to_vessel="HYPO-BULK", already_in="yes").status_code == 302
        assert Transfer.objects.get().marks == [marks.WRONG_PRODUCT]
        assert works.stated(book).state("vessel", "HYPO-BULK", NOW) == "off"
        assert [view.subject for view in deviations.open_ones(book) if view.kind == "suspicious_reading"] == ["HYPO-BULK"]


class TestAfterTheEvent:
    def test_a_wrong_load_raises_an_action_deviation_that_only_a_clean_vessel_ends(self, book):
        deliver(product="HYPO", already_in="yes", checked="", others_locked="", second_person="")
        (view,) = (one for one in deviations.open_ones(book) if one.kind == "suspicious_reading")
        assert (view.subject, view.level) == ("NAOH-BULK", "action")
        assert not verifying.back_inside(book, view, NOW).inside
        works_actions.state(
            book=book, kind="state", subject="vessel:NAOH-BULK", value={"is": "in_service"}, effective_from=NOW,
            by=people.person("sam"), now=NOW, reason="emptied, rinsed, tested",
        )  # fmt: skip
        assert verifying.back_inside(book, view, NOW).words == "the vessel has been stated back in service"

    def test_reversing_it_ends_it_too(self, book):
        deliver(product="HYPO", already_in="yes", checked="", others_locked="", second_person="")
        (view,) = (one for one in deviations.open_ones(book) if one.kind == "suspicious_reading")
        address = f"/w/TST/movement/delivery/{Delivery.objects.get().ref}/reverse/"
        people.signed_in("sam").post(address, {"client_id": "r", "reason": "it went elsewhere"})
        assert verifying.back_inside(book, view, NOW).inside
