"""The instant answers: what each rule says, that the limits judge like the server, and that the tablet agrees."""

from __future__ import annotations

import datetime as dt
import json
import random
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.deviations.rules import bounds
from plant.deviations.rules.observed import Observed
from plant.intake import definitions, lines, numbers, rules, walk
from plant.intake import ground as grounds
from plant.works import parameters
from plant.works import queries as works
from tests import people

SCRIPT = Path(__file__).resolve().parents[2] / "plant" / "intake" / "static" / "intake" / "rules.js"
AT = dt.datetime(2026, 3, 10, 8, 0, tzinfo=dt.UTC)


def limit(code="low", level="action", low=None, high=None, digits=None):
    return {"code": code, "level": level, "low": low, "high": high, "digits": digits}


def made(*limits, possible=(None, None), usual=(None, None), lost=None, counter=None, commas=True, units=None):
    kept = {"possible": list(possible), "usual": list(usual), "lost": lost, "counter": counter, "limits": list(limits)}
    scales = units or {"mg/L": {"scale": "1", "offset": "0", "as": "kept"}}
    return {"commas": commas, "units": scales, "as": {"kept": kept}}


class TestWhatIsStopped:
    @pytest.mark.parametrize("typed", ["abc", "1.2.3", "1,234.5", "<", "--", "1e3", "1 2", "٣", ".", "<>1", "9" * 31])
    def test_is_what_is_not_a_number(self, typed):
        assert rules.answer(made(), typed, "mg/L").state == rules.STOPPED

    def test_and_a_unit_that_is_not_offered(self):
        assert rules.answer(made(), "1", "lb").state == rules.STOPPED

    def test_and_a_comma_where_points_are_written(self):
        assert rules.answer(made(commas=False), "7,3", "mg/L").state == rules.STOPPED
        assert rules.answer(made(commas=True), "7,3", "mg/L").plain == "7.3"

    @pytest.mark.parametrize("typed", ["", " ", "\u00a0"])
    def test_but_nothing_is_only_nothing(self, typed):
        assert rules.answer(made(), typed, "mg/L").state == rules.EMPTY


class TestWhatIsDoubted:
    def test_the_impossible(self):
        assert rules.answer(made(possible=("0", "14")), "14.1", "mg/L").doubt == rules.IMPOSSIBLE
        assert rules.answer(made(possible=("0", "14")), "14", "mg/L").doubt == ""

    def test_a_lost_decimal_point(self):
        found = made(lost=["0.28", "0.33"])
        assert rules.answer(found, "30", "mg/L").doubt == rules.LOST_POINT
        assert rules.answer(found, "30.0", "mg/L").doubt == ""
        assert rules.answer(found, "1", "mg/L").doubt == ""

    def test_the_unusual(self):
        assert rules.answer(made(usual=("6", "9")), "9.01", "mg/L").doubt == rules.UNUSUAL

    def counter(self, most="1200", modulo="10000000"):
        return made(counter={"last": "9998750", "at_s": 0, "modulo": modulo, "most_per_hour": most})

    def test_not_a_rollover_that_is_possible(self):
        """Pitfall 27: 2,500 m3 in twelve hours over the end of seven digits."""
        assert rules.answer(self.counter(), "1250", "mg/L", 12 * 3600).doubt == ""

    def test_a_fall_no_flow_explains(self):
        assert rules.answer(self.counter(), "9990000", "mg/L", 12 * 3600).doubt == rules.LOWER
        assert rules.answer(self.counter(modulo=None), "1250", "mg/L", 12 * 3600).doubt == rules.LOWER

    def test_more_than_the_meter_passes(self):
        found = made(counter={"last": "1000", "at_s": 0, "modulo": None, "most_per_hour": "1200"})
        assert rules.answer(found, "3400", "mg/L", 2 * 3600).doubt == ""
        assert rules.answer(found, "3401", "mg/L", 2 * 3600).doubt == rules.FASTER

    def test_nothing_censored_but_the_impossible(self):
        assert rules.answer(made(usual=("6", "9")), "<5", "mg/L").doubt == ""


class TestLimits:
    def test_name_the_worst_and_its_side(self):
        found = made(limit("r", "regulatory", low="0.2"), limit("a", "action", low="0.3", high="1.5"))
        assert (rules.answer(found, "0.1", "mg/L").limit, rules.answer(found, "0.25", "mg/L").limit) == ("r", "a")
        assert rules.answer(found, "1.6", "mg/L").side == "high"
        assert rules.answer(found, "0.30", "mg/L").limit == ""

    def test_hold_exactly_in_another_unit(self):
        units = {"µg/L": {"scale": "0.001", "offset": "0", "as": "kept"}}
        found = made(limit(high="0.3"), units=units)
        assert rules.answer(found, "300", "µg/L").limit == ""
        assert rules.answer(found, "300.1", "µg/L").limit == "low"

    def test_may_be_rounded_to_first(self):
        """Pitfall 37: 4.04 against 4.0."""
        assert rules.answer(made(limit(high="4.0")), "4.04", "mg/L").limit == "low"
        assert rules.answer(made(limit(high="4.0", digits=1)), "4.04", "mg/L").limit == ""
        assert rules.answer(made(limit(high="4.0", digits=1)), "4.05", "mg/L").limit == "low"

    numbers_ = st.decimals(min_value=-5, max_value=5, places=3, allow_nan=False, allow_infinity=False)

    @given(value=numbers_, low=numbers_, high=numbers_, qualifier=st.sampled_from(["", "<", ">"]), rounds=st.booleans())
    def test_judge_like_the_server_judges_the_stored_value(self, value, low, high, qualifier, rounds):
        low, high = sorted((round(low, 1), round(high, 1)))
        found = made(limit(low=str(low), high=str(high), digits=1 if rounds else None))
        at_once = rules.answer(found, f"{qualifier}{value}", "mg/L")
        later = bounds.outside(Observed(AT, value, qualifier), bounds.Bound(low, high, rounds))
        assert at_once.side == (later if later in ("low", "high") else "")


@given(st.text(alphabet="0123456789.,<>+-−eE \u00a0x", max_size=12))
def test_what_is_a_number_beside_the_field_is_a_number_at_the_door(typed):
    found = rules.parse(typed, commas=True)
    if found is not None:
        read = numbers.read(typed, decimal=numbers.EITHER)
        assert isinstance(read, numbers.Number)
        assert (read.decimal, read.qualifier) == (Decimal(found[0]), found[1])


class TestADefinition:
    @pytest.fixture
    def stated(self, db):
        return works.stated(people.small_works())

    def of(self, stated, site, parameter):
        return definitions.definition(stated, AT, site, parameter, [], known=parameters.known(stated, AT)[parameter])

    def test_is_plain_json(self, stated):
        for line in stated.round_lines(AT):
            json.dumps(self.of(stated, line.site, line.parameter))

    def test_carries_the_stated_limits_worst_first(self, stated):
        for item in stated.limits(AT):
            if item.kind != "bound":
                continue
            carried = self.of(stated, item.subject, item.parameter)["as"]["kept"]["limits"]
            assert item.code in [one["code"] for one in carried]
            levels = [definitions.LEVELS.index(one["level"]) for one in carried]
            assert levels == sorted(levels)

    def test_of_a_level_takes_metres_percent_and_litres_of_that_vessel(self, stated):
        found = self.of(stated, "NAOH-BULK", "level")
        assert list(found["units"]) == ["m", "cm", "%", "L"]
        assert rules.answer(found, "3.2", "m").doubt == rules.IMPOSSIBLE
        assert rules.answer(found, "320", "cm").doubt == rules.IMPOSSIBLE
        assert rules.answer(found, "150", "cm").doubt == ""
        assert rules.answer(found, "101", "%").doubt == rules.IMPOSSIBLE
        assert rules.answer(found, "3200", "L").doubt == rules.IMPOSSIBLE
        assert found["shows"]["table"][-1] == pytest.approx([3.0, 3000.0], abs=0.01)

    def test_offers_only_units_that_the_door_takes(self, stated):
        here = grounds.Ground(stated, stated.calendar(AT))
        for site, parameter in [
            ("ENTRY", "free_chlorine"),
            ("ENTRY", "hardness"),
            ("ENTRY", "alkalinity"),
            ("RAW", "temperature"),
            ("RAW", "iron"),
            ("RAW", "conductance"),
            ("FT-TREATED", "totaliser"),
            ("PEROX-IBC", "weight"),
            ("NAOH-BULK", "level"),
            ("HYPO-POST", "feeder_setting"),
            ("HYPO-BULK", "strength"),
            ("ENTRY", "pH"),
        ]:
            found = self.of(stated, site, parameter)
            for unit in found["units"]:
                sent = found["sends"].get(unit, parameter)
                taken = lines.read_line(lines.Typed(site, "2026-03-10T07:00", sent, "2", unit), here, line=1)
                assert isinstance(taken, lines.Taken), (site, parameter, unit, taken)
                scale = found["units"][unit]
                value = Fraction(2) * Fraction(scale["scale"]) + Fraction(scale["offset"])
                assert float(taken.reading.value_text) == pytest.approx(float(value), rel=1e-9)

    def test_of_what_nobody_knows_is_none(self, stated):
        book = people.Book.objects.get()
        assert walk.rules_of(book, stated, AT, "GONE", "pH") is None
        assert walk.rules_of(book, stated, AT, "ENTRY", "sparkle") is None


def random_definition(chance):
    def number(low=-20, high=2000):
        return str(Decimal(chance.randint(low * 1000, high * 1000)).scaleb(-chance.randint(0, 3)))

    def pair():
        low, high = sorted((Decimal(number()), Decimal(number())))
        return [chance.choice([None, str(low)]), chance.choice([None, str(high)])]

    def one_limit(place):
        low, high = pair()
        return limit(f"L{place}", chance.choice(definitions.LEVELS), low, high, chance.choice([None, None, 0, 1, 2]))

    counter = chance.choice(
        [
            None,
            {
                "last": number(0, 99999),
                "at_s": chance.randint(0, 10**6),
                "modulo": chance.choice([None, "100000"]),
                "most_per_hour": chance.choice([None, number(0, 1500)]),
            },
        ]
    )
    lost = chance.choice([None, sorted((number(0, 9), number(0, 9)), key=Decimal)])
    units = {
        "mg/L": {"scale": "1", "offset": "0", "as": "kept"},
        "°F": {"scale": "0.555555555556", "offset": "-17.7777777778", "as": "kept"},
        "µg/L": {"scale": "0.001", "offset": "0", "as": "kept"},
    }
    return made(
        *[one_limit(place) for place in range(chance.randint(0, 4))],
        possible=pair(),
        usual=pair(),
        lost=lost,
        counter=counter,
        commas=chance.random() < 0.7,
        units=units,
    )


def random_typed(chance, definition):
    kept = definition["as"]["kept"]
    marks = [text for item in kept["limits"] for text in (item["low"], item["high"]) if text is not None]
    marks += [text for text in (*kept["possible"], *kept["usual"], *(kept["lost"] or [])) if text is not None]
    kind = chance.random()
    if kind < 0.45 and marks:
        near = Decimal(chance.choice(marks)) + Decimal(chance.choice([0, 0, 1, -1])).scaleb(-chance.randint(0, 4))
        near *= chance.choice([1, 1, 1, 10, 100, 1000])
        text = format(near, "f")
    elif kind < 0.8:
        text = format(Decimal(chance.randint(-(10**6), 10**8)).scaleb(-chance.randint(0, 5)), "f")
    else:
        return "".join(chance.choice("0123456789.,<>+-−eE \u00a0\tx") for _ in range(chance.randint(0, 34)))
    if chance.random() < 0.2:
        text = text.replace(".", ",")
    return chance.choice(["", "", "", "<", ">", " ", "< "]) + text + chance.choice(["", "", " "])


@pytest.mark.browser
def test_the_tablet_answers_as_the_server_does(new_page):
    """Ten thousand random values, many of them on a limit or a hair beside it."""
    chance = random.Random(20260310)
    cases = []
    for _ in range(500):
        definition = random_definition(chance)
        for _ in range(20):
            unit = chance.choice(["mg/L", "mg/L", "°F", "µg/L", "toString"])
            cases.append([definition, random_typed(chance, definition), unit, chance.randint(0, 2 * 10**6)])
    here = [rules.answer(*case) for case in cases]
    page = new_page()
    page.set_content("<p>rules</p>")
    page.add_script_tag(content=SCRIPT.read_text().replace("export function", "function") + "\nwindow.answer = answer;")
    there = page.evaluate("cases => cases.map(([d, t, u, at]) => window.answer(d, t, u, at))", cases)
    for case, own, other in zip(cases, here, there, strict=True):
        assert other == {
            "state": own.state,
            "plain": own.plain,
            "qualifier": own.qualifier,
            "doubt": own.doubt,
            "limit": own.limit,
            "side": own.side,
        }, case
    assert {found.state for found in here} == {rules.EMPTY, rules.STOPPED, rules.READ}
    assert {found.doubt for found in here} == {"", rules.IMPOSSIBLE, rules.LOST_POINT, rules.LOWER, rules.FASTER, rules.UNUSUAL}
    assert sum(bool(found.limit) for found in here) > 500
