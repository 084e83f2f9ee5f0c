"""Every sheet gives a published answer, refuses what it can't answer in words, and keeps what was typed."""

import pytest

from plant.sheets import book
from plant.sheets.sheet import Sheet
from tests import people


def starting(sheet: Sheet, **changed):
    """A sheet's own example values, some of them changed."""
    values = {field.name: (field.start if field.start is not None else 0.0) for field in sheet.fields}
    return values | changed


def result(slug, label, **changed):
    sheet = book.named(slug)
    answer = sheet.work(starting(sheet, **changed))
    return next(item.value for item in answer.results if item.label == label)


@pytest.mark.parametrize("sheet", book.SHEETS, ids=lambda sheet: sheet.slug)
def test_every_sheet_works_out_its_own_example(sheet):
    answer = sheet.work(starting(sheet))
    assert answer.results
    assert answer.cautions or sheet.slug == "hardness"
    assert all(line.source for line in answer.lines)
    assert all(item.shown not in ("nan", "inf") for item in answer.results)


class TestPublishedAnswers:
    def test_hardness(self):
        """SM 2340 B: 2.497 Ca + 4.118 Mg. 100 mg/L Ca is 250 mg/L as CaCO3, 14.0 °dH (17.85 mg/L each)."""
        assert result("hardness", "Total hardness", calcium=100, magnesium=0) == pytest.approx(249.7, abs=0.1)
        assert result("hardness", "In German degrees", calcium=100, magnesium=0) == pytest.approx(14.0, abs=0.02)

    def test_lime(self):
        """ASCE/AWWA Water Treatment Plant Design, eq. 11.10: CaO lb/Mgal = 10.6 CO2 + 4.7 alkalinity, all carbonate hardness taken."""
        water = {"calcium": 60.0, "magnesium": 0.0, "alkalinity": 150.0, "ph": 7.5, "temperature": 25.0, "target": 0.0}
        co2 = 1.6 * 10 ** (6 - 7.5) * 150 * 1.22
        assert result("lime-soda", "Lime, as CaO", **water) == pytest.approx((10.6 * co2 + 4.7 * 149.8) / 8.345, rel=0.02)

    def test_breakpoint(self):
        """5.06 mg Cl2 per mg N is all monochloramine; 7.6 is breakpoint (both by electrons)."""
        assert result("breakpoint", "On the breakpoint curve", chlorine=2.0, ammonia=0.4) == "monochloramine"

    def test_peroxide(self):
        """H2O2 + HOCl: 34.015 ÷ 70.906 = 0.480 mg/mg."""
        assert result("peroxide", "Peroxide that takes this chlorine", chlorine=1.0) == pytest.approx(0.480, abs=0.0005)

    def test_contact(self):
        """0.8 mg/L over 60 min is CT 48; table 1.3 of 40 CFR 141.74 at 10 °C, pH 7.5 gives 131: ratio 0.3664, 1.099 logs."""
        given = {
            "volume": 1000.0,
            "flow": 500.0,
            "baffling": 0.5,
            "chlorine": 0.8,
            "ph": 7.5,
            "temperature": 10.0,
            "required": 3.0,
        }
        assert result("contact", "CT", **given) == pytest.approx(48)
        assert result("contact", "Giardia by disinfection", **given) == pytest.approx(1.0992, abs=0.001)

    def test_feeder(self):
        """FeCl3 at 50 mg/L in 38,000 m3/d, 40 % by weight, 1.44 kg/L: 4,750 kg/d and 0.1374 m3/h (Davis 2010, example 5-4)."""
        given = {"dose": 50.0, "flow": 38000 / 24, "active": 40.0, "density": 1.44}
        assert result("feeder", "Product per day", **given) == pytest.approx(4750, abs=0.5)
        assert result("feeder", "Feeder", **given) == pytest.approx(137.4, abs=0.1)

    def test_hypochlorite(self):
        """125 g/L at 35 °C keeps about 60 % after 30 days (an independent table, second-hand)."""
        assert result("hypochlorite-keeping", "Of what it was", strength=125.0, temperature=35.0, days=30.0) == pytest.approx(
            60.5, abs=1.5
        )

    def test_alum(self):
        """1 mg of dry alum takes 0.505 mg of alkalinity as CaCO3."""
        assert result("coagulant", "Alkalinity used", coagulant="Al2(SO4)3.14H2O", dose=20.0) == pytest.approx(10.1, abs=0.05)

    def test_fluoride(self):
        """0.5 mg/L from acid of 23 % with 79.2 % fluoride: 0.5 ÷ (0.792 × 0.23) = 2.745 mg/L."""
        assert result("fluoride", "Additive as bought", target=0.7, natural=0.2, purity=23.0) == pytest.approx(2.745, abs=0.005)


@pytest.mark.django_db
class TestPages:
    @pytest.fixture
    def client(self):
        people.small_works()
        return people.signed_in("olga")

    def test_the_index_and_the_table_of_checks(self, client):
        page = client.get("/w/TST/sheets/").content.decode()
        assert all(sheet.title in page for sheet in book.SHEETS)
        assert "still from memory" in client.get("/w/TST/sheets/checked/").content.decode().lower()

    @pytest.mark.parametrize("sheet", book.SHEETS, ids=lambda sheet: sheet.slug)
    def test_each_shows_its_answer_and_its_caution(self, client, sheet):
        page = client.get(f"/w/TST/sheets/{sheet.slug}/").content.decode()
        assert "never an instruction" in page
        assert sheet.work(starting(sheet)).results[0].shown in page

    def test_out_of_range_is_said_and_nothing_typed_is_lost(self, client):
        page = client.get(
            "/w/TST/sheets/contact/?volume=900&flow=500&baffling=0.5&chlorine=7&ph=7.5&temperature=10&required=0.5"
        ).content.decode()
        assert "Not worked out" in page
        assert 'value="7"' in page

    def test_words_for_a_number_are_answered_under_the_field(self, client):
        page = client.get("/w/TST/sheets/breakpoint/?chlorine=two&ammonia=0,4").content.decode()
        assert "Enter a number" in page
        assert 'value="two"' in page

    def test_a_decimal_comma_is_a_decimal_comma(self, client):
        page = client.get("/w/TST/sheets/breakpoint/?chlorine=2&ammonia=0,4").content.decode()
        assert "5.00" in page

    def test_a_stranger_sees_none(self, client):
        assert people.signed_in("stan").get("/w/TST/sheets/").status_code == 404
        assert client.get("/w/TST/sheets/nothing-like-it/").status_code == 404
