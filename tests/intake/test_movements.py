"""Delivery and transfer files, and the same typed at the works: checked, never overfilled, reversed rather than changed."""

from __future__ import annotations

import datetime as dt
import uuid
from io import StringIO
from pathlib import Path

import pytest
from django.core.management import call_command

from plant import clock
from plant.intake import movements, records
from plant.ledger import verify
from plant.readings import marks
from plant.stock import queries
from plant.stock.models import Delivery, Transfer
from plant.works import queries as works
from tests import people

DATA = Path(__file__).resolve().parents[1] / "data"
NOW = dt.datetime(2026, 4, 2, 8, 0, tzinfo=dt.UTC)
HEADER = "timestamp,vessel,product,quantity,unit,lot,strength,strength_basis,density_kg_per_L,manufactured_on,cost,currency,supplier,document"
GOOD = "2026-03-30T10:00,NAOH-BULK,NAOH,1273,kg,L1,25.0,weight_pct,1.273,2026-03-29,,,Invented Supplies,D1"


def bring(book, path, kind=movements.DELIVERIES, **wanted):
    return movements.bring_in(
        kind=kind,
        book=book,
        sheet=movements.open_file(kind, path),
        wanted=records.Wanted(**wanted),
        by=None,
        now=NOW,
        judge=False,
    )


class TestADeliveryFile:
    def test_comes_in_and_the_second_time_changes_nothing(self, example):
        path = DATA / "three_days" / "deliveries.csv"
        assert bring(example, path).added == 1
        again = bring(example, path)
        assert (again.added, again.outcomes["same again"]) == (0, 1)
        load = Delivery.objects.get()
        assert (load.quantity, load.unit, load.strength, load.strength_basis, load.quantity_sd_pct) == (
            1273,
            "kg",
            25,
            "weight_pct",
            0.5,
        )
        assert load.taken_at == dt.datetime(2026, 3, 30, 8, 0, tzinfo=dt.UTC)
        example.refresh_from_db()
        assert list(verify.chain(example)) == []

    @pytest.mark.parametrize(
        ("old", "new", "said"),
        [
            ("NAOH-BULK", "GONE", "code of a vessel"),
            ("NAOH,", "SUGAR,", "code of a product"),
            ("NAOH,1273", "PEROX,1273", "which is what NAOH-BULK holds"),
            ("1273,kg", "1273,bags", "one of: kg, t, L, m3, lb, US_gal"),
            ("1273,kg", "-5,kg", "above 0"),
            ("1273,kg", "some,kg", "a number above 0"),
            ("1273,kg", ",kg", "a number"),
            ("25.0,weight_pct", "25.0,", "one of: g_per_L"),
            ("25.0,weight_pct", "250,weight_pct", "at most 100"),
            ("1.273,2026", "12.73,2026", "at most 3"),
            ("2026-03-29", "2026-04-29", "not after the delivery"),
            ("2026-03-29", "last week", "a date"),
        ],
    )
    def test_refuses_what_cannot_be(self, example, sheet, old, new, said):
        counted = bring(example, sheet(GOOD.replace(old, new, 1), header=HEADER))
        assert counted.refused == 1
        assert said in counted.refusal_lines()[0]
        assert Delivery.objects.count() == 0

    def test_takes_a_date_alone_as_noon_and_says_so(self, example, sheet):
        counted = bring(example, sheet(GOOD.replace("T10:00", ""), header=HEADER))
        assert counted.remarks == {"a date alone was taken as noon": 1}
        assert Delivery.objects.get().taken_at == dt.datetime(2026, 3, 30, 10, 0, tzinfo=dt.UTC)

    def test_marks_the_same_load_with_another_quantity(self, example, sheet):
        counted = bring(example, sheet(GOOD, GOOD.replace("1273,kg", "1723,kg"), header=HEADER))
        assert counted.outcomes["conflict"] == 1
        assert [load.marks for load in Delivery.objects.order_by("line")] == [[], [marks.CONFLICT]]

    def test_marks_a_load_larger_than_the_whole_vessel(self, example, sheet):
        bring(example, sheet(GOOD.replace("1273,kg", "12730,kg"), header=HEADER))
        assert Delivery.objects.get().marks == [marks.IMPOSSIBLE]

    def test_keeps_nothing_where_all_or_nothing_was_asked(self, example, sheet):
        with pytest.raises(records.NothingKept):
            bring(example, sheet(GOOD, GOOD.replace("NAOH-BULK", "GONE"), header=HEADER), all_or_nothing=True)
        assert Delivery.objects.count() == 0

    def test_reversed_and_brought_in_again_stays_reversed(self, example, sheet):
        from plant.intake import corrections

        path = sheet(GOOD, header=HEADER)
        bring(example, path)
        corrections.reverse(
            book=example, movement=Delivery.objects.get(), reason="other works", by=None, now=NOW, client_id=uuid.uuid4().hex
        )
        assert bring(example, path).added == 0
        assert queries.deliveries(example, start=NOW - dt.timedelta(days=9), end=NOW) == []

    def test_by_command(self, example):
        out = StringIO()
        call_command("import_deliveries", str(DATA / "three_days" / "deliveries.csv"), "--works", "EXA", stdout=out)
        assert "1 added" in out.getvalue()


class TestATransferFile:
    HEADER = "timestamp,from_vessel,to_vessel,quantity,unit,carrier_water_L"

    def test_keeps_product_and_water_apart(self, example, sheet):
        """Pitfall 17: a make-up of 1:4."""
        path = sheet("2026-03-30T10:00,NAOH-BULK,PEROX-IBC,40,L,160", header=self.HEADER)
        assert bring(example, path, movements.TRANSFERS).added == 1
        assert bring(example, path, movements.TRANSFERS).added == 0
        moved = Transfer.objects.get()
        assert (moved.quantity, moved.unit, moved.carrier_water_l) == (40, "L", 160)

    def test_refuses_a_vessel_into_itself(self, example, sheet):
        counted = bring(example, sheet("2026-03-30T10:00,NAOH-BULK,NAOH-BULK,40,L,", header=self.HEADER), movements.TRANSFERS)
        assert "two different vessels" in counted.refusal_lines()[0]

    def test_by_command(self, example, sheet):
        out = StringIO()
        path = sheet("2026-03-30T10:00,NAOH-BULK,PEROX-IBC,40,L,", header=self.HEADER)
        call_command("import_transfers", str(path), "--works", "EXA", stdout=out)
        assert "1 added" in out.getvalue()


class TestAtTheWorks:
    @pytest.fixture
    def book(self, db, monkeypatch, sheet):
        book = people.small_works()
        monkeypatch.setattr(clock, "now", lambda: NOW)
        path = sheet("NAOH-BULK,2026-04-02T07:00,level,2.000,m", header="site,timestamp,parameter,value,unit")
        records.bring_in(book=book, sheet=records.open_file(path), wanted=records.Wanted(), by=None, now=NOW, judge=False)
        return book

    def send(self, client, path="delivery", **typed):
        return client.post(f"/w/TST/{path}/", self.fields() | typed)

    def fields(self):
        return {
            "client_id": uuid.uuid4().hex,
            "timestamp": "2026-04-02T09:30",
            "vessel": "NAOH-BULK",
            "product": "NAOH",
            "quantity": "1000",
            "unit": "kg",
            "lot": "N-7",
            "strength": "",
            "strength_basis": "",
            "checked": "on",
            "others_locked": "on",
            "second_person": "P. Oak",
        }

    def test_a_delivery_is_recorded(self, book):
        assert self.send(people.signed_in("olga")).status_code == 302
        load = Delivery.objects.get()
        assert (load.vessel, load.quantity, load.second_person, load.marks) == ("NAOH-BULK", 1000, "P. Oak", [])

    def test_the_cautions_come_first(self, book):
        page = people.signed_in("olga").get("/w/TST/delivery/").content.decode()
        assert page.index("Never acid and hypochlorite") < page.index("Record the delivery")

    def test_the_checks_have_to_be_done(self, book):
        answered = self.send(people.signed_in("olga"), checked="")
        assert answered.status_code == 422
        assert Delivery.objects.count() == 0

    def test_another_product_is_refused_and_there_is_no_way_round(self, book):
        answered = self.send(people.signed_in("sam"), product="HYPO")
        page = answered.content.decode()
        assert answered.status_code == 422
        assert "Do not connect" in page
        assert 'value="1000"' in page
        assert Delivery.objects.count() == 0

    def test_an_overfill_is_refused_with_the_room_there_is(self, book):
        # 2.000 m of 3.000 m at 1 L a millimetre, 95 % of 3,000 L may be filled: room for 850 L; 1,273 kg are 1,000 L.
        answered = self.send(people.signed_in("olga"), quantity="1273")
        page = answered.content.decode()
        assert "The load is 1,000 L; there is room for 850 L up to 95 %" in page
        assert Delivery.objects.count() == 0

    def test_what_came_since_the_dip_counts(self, book):
        assert self.send(people.signed_in("olga"), quantity="1000", lot="A").status_code == 302
        answered = self.send(people.signed_in("olga"), quantity="200", lot="B", timestamp="2026-04-02T09:45")
        assert "room for 64 L" in answered.content.decode()

    def test_what_has_gone_in_is_recorded_marked_and_the_vessel_taken_out_of_service(self, book):
        olga = people.signed_in("olga")
        first = self.send(olga, product="HYPO").content.decode()
        assert first.index("Close the valves") < first.index("Record what has gone in")
        assert self.send(olga, product="HYPO", already_in="yes", checked="").status_code == 302
        assert Delivery.objects.get().marks == [marks.WRONG_PRODUCT]
        assert works.stated(book).state("vessel", "NAOH-BULK", NOW) == "off"

    def test_a_double_tap_is_one_delivery(self, book):
        olga, fields = people.signed_in("olga"), self.fields()
        olga.post("/w/TST/delivery/", fields)
        assert olga.post("/w/TST/delivery/", fields).status_code == 302
        assert Delivery.objects.count() == 1

    def test_one_that_went_elsewhere_is_reversed_with_a_reason(self, book):
        """Pitfall 41."""
        olga = people.signed_in("olga")
        self.send(olga)
        address = f"/w/TST/movement/delivery/{Delivery.objects.get().ref}/reverse/"
        assert olga.get(address).status_code == 200
        assert olga.post(address, {"reason": "", "client_id": uuid.uuid4().hex}).status_code == 422
        assert olga.post(address, {"reason": "went into the other tank", "client_id": uuid.uuid4().hex}).status_code == 302
        assert queries.deliveries(book, start=NOW - dt.timedelta(days=1), end=NOW + dt.timedelta(days=1)) == []
        again = olga.post(address, {"reason": "once more", "client_id": uuid.uuid4().hex})
        assert "Olga" in again.content.decode()
        assert Delivery.objects.count() == 2

    def test_somebody_else_s_is_reversed_by_a_supervisor_only(self, book):
        self.send(people.signed_in("sam"))
        address = f"/w/TST/movement/delivery/{Delivery.objects.get().ref}/reverse/"
        assert people.signed_in("olga").get(address).status_code == 403
        assert people.signed_in("ira").get(address).status_code == 403
        assert people.signed_in("sam").get(address).status_code == 200

    @pytest.mark.parametrize("path", ["movement/delivery/9.9", "movement/party/1.1", "movement/delivery/x"])
    def test_of_nothing_there_is_nothing_to_reverse(self, book, path):
        assert people.signed_in("sam").get(f"/w/TST/{path}/reverse/").status_code == 404
