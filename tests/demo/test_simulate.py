"""The simulator: mass balances, the same twice, and what is written is the truth with the error of a gauge."""

import datetime as dt

import numpy as np
import pytest

from chemistry import vessels
from plant.demo import files, heath, kestrel, simulate, tanks
from plant.demo.plan import Incident

FIRST, LAST = dt.date(2026, 1, 1), dt.date(2026, 4, 30)
DAYS = (LAST - FIRST).days + 1


@pytest.fixture(scope="module")
def quiet():
    """Four months of the demo works in which nothing goes wrong."""
    return simulate.simulate(kestrel.KESTREL, seed=4, first=FIRST, last=LAST)


def with_one(what, subject, start, end, size, plan=kestrel.KESTREL, cause=""):
    incident = Incident(what, cause, subject, start, end, size, "told by the test")
    return simulate.simulate(plan, seed=4, first=FIRST, last=LAST, incidents=[incident])


def feed(history, code):
    return next(item for item in history.histories if item.feed.code == code)


def rows(history, site, parameter):
    return [row for item in history.book.rounds for row in item.rows if (row.site, row.parameter) == (site, parameter)]


@pytest.mark.parametrize("plan", [kestrel.KESTREL, heath.HEATH], ids=lambda plan: plan.code)
@pytest.mark.parametrize("seed", [1, 2])
def test_masses_balance(plan, seed):
    """held at first + loads + containers = held at last + fed + leaked, to a gram."""
    leak = Incident("leak", "leak", str(plan.feeds[0].tank["code"]), 20, 25, 0.8, "")
    history = simulate.simulate(plan, seed=seed, first=FIRST, last=LAST, incidents=[leak])
    for item in history.histories:
        first = sum(held.start_kg[0] for held in item.held.values())
        last = sum(held.end_kg[-1] for held in item.held.values())
        came = sum(load.kg for load in item.loads)
        came += sum(change.new_gross_kg - change.old_gross_kg for change in item.changes)
        hours = history.grid.hour_of_day(25) - history.grid.hour_of_day(20)
        leaked = 0.8 * hours if item.feed.tank["code"] == leak.subject else 0.0
        assert first + came - last == pytest.approx(item.product_kg.sum() + leaked, abs=1e-3), item.feed.code


def test_the_same_seed_writes_the_same_and_another_does_not(tmp_path):
    def text(seed, name):
        history = simulate.simulate(heath.HEATH, seed=seed, first=FIRST, last=LAST)
        files.write(history, tmp_path / name)
        return (tmp_path / name / "records.csv").read_bytes()

    assert text(5, "a") == text(5, "b")
    assert text(5, "c") != text(6, "d")


def test_the_hour_of_asking_only_cuts_the_end_off():
    until = dt.datetime(2026, 4, 20, 11, 0, tzinfo=dt.UTC)
    whole = simulate.simulate(heath.HEATH, seed=5, first=FIRST, last=LAST)
    cut = simulate.simulate(heath.HEATH, seed=5, first=FIRST, last=LAST, until=until)
    assert cut.book.rounds == whole.book.rounds[: len(cut.book.rounds)]
    assert max(row.at for item in cut.book.rounds for row in item.rows) < until
    assert len(cut.book.rounds) == len([item for item in whole.book.rounds if item.at < until])


def test_doses_are_what_was_fed_into_what_was_treated(quiet):
    day = next(item for item in quiet.true_days() if item.dosing_point == "LIME-SOFT" and item.day == dt.date(2026, 2, 3))
    start, end = (quiet.grid.hour_of(moment) for moment in quiet.grid.calendar.bounds(day.day))
    lime = feed(quiet, "LIME-SOFT")
    hours = slice(int(start), int(end))
    assert day.product_kg == pytest.approx(lime.product_kg[hours].sum())
    assert day.volume_ml == pytest.approx(quiet.flow_ml_h[hours].sum() * simulate.RAW_SHARE)
    assert day.active_kg == pytest.approx(day.product_kg * 0.93, rel=0.03)


def test_a_day_of_23_hours(quiet):
    edges = np.diff(quiet.grid.day_edges)
    number = (dt.date(2026, 3, 28) - FIRST).days
    assert edges[number] == 23
    assert set(np.delete(edges, number)) == {24}


def test_levels_are_the_truth_with_the_error_of_the_gauge(quiet):
    lime = rows(quiet, "NAOH-BULK", "level")
    held = feed(quiet, "NAOH-PH").held["NAOH-BULK"]
    hours = quiet.grid.hours_of([row.at for row in lime])
    true = vessels.level_m(held.block, held.kg_at(hours) / 1.273)
    errors = np.array([float(row.text) for row in lime]) - true
    assert abs(errors.mean()) < 0.001
    assert errors.std() == pytest.approx(0.002, rel=0.25)


def test_hypochlorite_weakens_in_store_and_residual_follows_the_true_dose(quiet):
    hypo = feed(quiet, "HYPO-POST")
    held = hypo.held["HYPO-BULK"]
    load = hypo.loads[0]
    assert held.fraction[load.hour - 1] < hypo.nominal_fraction < 0.105
    stopped = with_one("feeder_stop", "HYPO-POST", 60.2, 60.6, 0.5)
    at = int(stopped.grid.hour_of_day(60.5))
    less = [history.truth["ENTRY", "free_chlorine"][at] for history in (quiet, stopped)]
    given = [feed(history, "HYPO-POST").dose_mg_l(history.flow_ml_h)[at - 2 : at + 1].mean() for history in (quiet, stopped)]
    assert given[1] == pytest.approx(given[0] / 2, rel=0.02)
    assert less[0] - less[1] == pytest.approx(min(given[0] - given[1], less[0]), abs=0.02)


def test_the_water_makes_chemical_sense(quiet):
    truth = quiet.truth
    hardness = 2.497 * truth["RAW", "calcium"] + 4.118 * truth["RAW", "magnesium"]
    assert np.allclose(truth["RAW", "hardness"], hardness, rtol=1e-3)
    assert (truth["RAW", "alkalinity"] < truth["RAW", "hardness"]).all()
    assert 165 < np.median(truth["ENTRY", "hardness"]) < 195
    assert np.median(truth["ENTRY", "pH"]) == pytest.approx(8.2, abs=0.08)
    assert np.median(truth["ENTRY", "fluoride"]) == pytest.approx(0.7, abs=0.03)
    assert np.percentile(truth["ENTRY", "free_chlorine"], 1) > 0.3


def test_a_drift_a_leak_and_a_weak_lot_do_what_they_say(quiet):
    drifted = with_one("feeder_drift", "FSA-POST", 60, 74, 0.015)
    ratio = feed(drifted, "FSA-POST").product_kg / feed(quiet, "FSA-POST").product_kg
    assert ratio[int(drifted.grid.hour_of_day(59))] == pytest.approx(1.0)
    assert ratio[int(drifted.grid.hour_of_day(70))] == pytest.approx(1.15, abs=0.01)
    leaking = with_one("leak", "PEROX-TANK", 60, 66, 0.8)
    lost = feed(quiet, "PEROX-PRE").held["PEROX-TANK"].end_kg - feed(leaking, "PEROX-PRE").held["PEROX-TANK"].end_kg
    loads = [load.hour for load in feed(leaking, "PEROX-PRE").loads if load.hour > leaking.grid.hour_of_day(60)]
    at = min(int(leaking.grid.hour_of_day(63)), (loads or [10**6])[0] - 1)
    assert lost[at] == pytest.approx(0.8 * (at + 1 - leaking.grid.hour_of_day(60)), abs=1.0)
    weak = with_one("weak_lot", "HYPO-BULK", 30, 60, 0.8)
    load = next(item for item in feed(weak, "HYPO-POST").loads if item.incident)
    assert load.fraction == pytest.approx(0.8 * load.certified)


def test_what_people_do_wrong_stands_on_the_paper_only(quiet):
    wrong = with_one("wrong_reading", "RAW:pH", 40, 41, 100)
    changed = [
        (old.text, new.text)
        for old, new in zip(rows(quiet, "RAW", "pH"), rows(wrong, "RAW", "pH"), strict=True)
        if old.text != new.text
    ]
    assert len(changed) == 1
    assert changed[0][1] == changed[0][0].replace(".", "")
    assert (wrong.truth["RAW", "pH"] == quiet.truth["RAW", "pH"]).all()
    missing = with_one("missing_round", "", 40.45, 40.75, 0)
    assert len(missing.book.rounds) == len(quiet.book.rounds) - 1
    stuck = with_one("stuck", "FERRIC-BULK:level", 40, 43, 0)
    texts = [row.text for row in rows(stuck, "FERRIC-BULK", "level")][80:86]
    assert len(set(texts)) == 1


def test_loads_not_booked_and_booked_wrong():
    late = with_one("unbooked_delivery", "NAOH-BULK", 20, 80, 3)
    load = next(item for item in late.book.loads if item.load.incident)
    assert load.written - load.at == dt.timedelta(days=3, hours=1)
    never = with_one("unbooked_delivery", "NAOH-BULK", 20, 80, 0)
    assert next(item for item in never.book.loads if item.load.incident).written is None
    wrong = with_one("wrong_booking", "NAOH-BULK", 20, 80, 0.1)
    booked = next(item for item in wrong.book.loads if item.load.incident)
    assert booked.first_kg == round(booked.kg / 10)


def test_the_totaliser_counts_on_after_the_meter_is_exchanged():
    history = with_one("meter_change", "FT-RAW", 50.1, 51, 120)
    resets = rows(history, "FT-RAW", "totaliser_reset")
    assert len(resets) == 1
    counts = [float(row.text) for row in rows(history, "FT-RAW", "totaliser") if row.at >= resets[0].at]
    assert counts[0] == 120
    assert 4000 < np.diff(counts)[:20].mean() < 9000


def test_incidents_are_drawn_by_seed_and_fit_their_works():
    first = heath.drawn_incidents(heath.HEATH, seed=8, days=360)
    assert first == heath.drawn_incidents(heath.HEATH, seed=8, days=360)
    assert first != heath.drawn_incidents(heath.HEATH, seed=9, days=360)
    codes = {item for feed in heath.HEATH.feeds for item in (feed.code, feed.tank["code"])} | {"FT-TREATED", "RAW", ""}
    assert {incident.subject.partition(":")[0] for incident in first} <= codes
    assert len(first) > 8


def test_no_tank_overflows_or_runs_dry(quiet):
    for item in quiet.histories:
        for held in item.held.values():
            assert held.start_kg.max() <= tanks.capacity_kg(held.block, item.feed.product) + 1e-6
            assert held.end_kg.min() >= tanks.heel_kg(held.block, item.feed.product) - 1e-6
