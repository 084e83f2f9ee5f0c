"""Published and derived examples, one test a row; the source stands beside each in data/worked_compliance.csv."""

from __future__ import annotations

import csv
import datetime as dt
import json
from collections.abc import Callable
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest

from chemistry import units
from plant.deviations.rules import (
    bounds,
    chlorine_dioxide,
    due_dates,
    durations,
    inactivation,
    rounding,
    running,
    shares,
)
from plant.deviations.rules.observed import Observed

DATA = Path(__file__).parent / "data" / "worked_compliance.csv"
ROWS = list(csv.DictReader(DATA.read_text(encoding="utf-8").splitlines()))
DAY = dt.datetime(2026, 3, 1, tzinfo=dt.UTC)


def _at(text: str) -> dt.datetime:
    hours, minutes = text.split(":")
    return DAY + dt.timedelta(hours=int(hours), minutes=int(minutes))


def _percentile(given: dict[str, Any]) -> Any:
    return shares.ninetieth(given["values"]) if "values" in given else shares.rank_of_90th(given["n"])


def _raa(given: dict[str, Any]) -> Any:
    if given.get("first_year"):
        return running.certain_breach(given["quarter_averages_mg_L"], given["limit"])
    return running.annual([running.quarter_mean(months) for months in given["monthly_averages_mg_L"]]).value


def _ninety_fifth(given: dict[str, Any]) -> Any:
    if "readings_NTU_max" in given:
        highest = Observed(DAY, Decimal(str(given["readings_NTU_max"])))
        return bounds.above(highest, bounds.Bound(high=Decimal("1.0")))
    share = shares.Share(given["at_or_below_0.3_NTU"], given["measurements"])
    assert share.at_least(95) is False
    return share.pct


def _undetectable(given: dict[str, Any]) -> Any:
    if "a" in given:
        return shares.undetectable_pct(**given)
    return shares.undetectable_breach(given["V_previous_month"], given["V_this_month"])


def _duration(given: dict[str, Any]) -> Any:
    values = [
        Observed(_at("00:00"), Decimal("0.4")),
        Observed(_at(given["below_0.2_from"]), Decimal("0.15")),
        Observed(_at(given["restored_at"]), Decimal("0.2")),
    ]
    found = durations.held(values, limit=Decimal("0.2"), hours=4, low=True, until=_at("23:00"))
    assert found[0].value == "4.25 h"
    return bool(found)


def _excursions(given: dict[str, Any]) -> Any:
    if "excursion_days_in_six_months" in given:
        return shares.excursion_breach(given["excursion_days_in_six_months"])
    return shares.daily_values({1: given["same_day_readings_pH"]}, [1])[1]


def _unit(given: dict[str, Any]) -> Any:
    return units.convert(given["flow_MGD"], "US_Mgal/d", "US_gal/min")


def _rounded(given: dict[str, Any]) -> Any:
    return float(rounding.half_up(Decimal(str(given["value"])), given["decimals"]))


def _due(given: dict[str, Any]) -> Any:
    year, month = given["report_month"].split("-")
    return due_dates.monthly_report(int(year), int(month)).isoformat()


def _evaluation(given: dict[str, Any]) -> Any:
    return running.operational_evaluation(given["two_before"], given["previous"], given["current"])


def _acute(given: dict[str, Any]) -> Any:
    return chlorine_dioxide.acute(given["entry_point_day1_mg_L"], given["distribution_day2_mg_L"], given["MRDL"])


ANSWERS: dict[str, Callable[[dict[str, Any]], Any]] = {
    "LRAA": lambda given: running.annual(given["quarterly_results"]).value,
    "RAA": _raa,
    "rounding": _rounded,
    "percentile": _percentile,
    "maximum": lambda given: max(given["monthly_max_NTU"].values()),
    "unit conversion": _unit,
    "segments": lambda given: inactivation.total_ratio(given["CT_ratio_by_segment"]),
    "95th percentile": _ninety_fifth,
    "undetectable residual": _undetectable,
    "residual duration": _duration,
    "excursion days": _excursions,
    "benchmark": lambda given: shares.lowest(given["monthly_mean_log"]),
    "OEL": _evaluation,
    "due date": _due,
    "chlorine dioxide": _acute,
}


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['id']}-{row['topic'].replace(' ', '-')}")
def test_example(row: dict[str, str]) -> None:
    answer = ANSWERS[row["topic"]](json.loads(row["given"]))
    if row["expected"] in ("True", "False"):
        assert answer is (row["expected"] == "True")
    elif row["unit"] == "date":
        assert answer == row["expected"]
    else:
        assert answer == pytest.approx(float(row["expected"]), abs=float(row["tolerance"]) + 1e-9)


def test_every_row_has_its_source() -> None:
    assert len(ROWS) >= 33
    assert all(row["source"] for row in ROWS)
