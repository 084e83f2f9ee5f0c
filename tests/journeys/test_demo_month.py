"""The demo's month: what the report prints against pandas over the records as the works itself exports them."""

from __future__ import annotations

import datetime as dt
import io
from io import StringIO

import pandas as pd
import pypdf
import pytest
from django.core.management import call_command
from django.test import Client

from plant import clock
from plant.accounts.models import Person
from plant.ledger import queries as books
from plant.reports import content, facts
from plant.reports.month import gather

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 7, 9, 12, 0, tzinfo=dt.UTC)
FIRST, LAST = dt.date(2026, 6, 1), dt.date(2026, 6, 30)


@pytest.fixture
def exported(settings, tmp_path, monkeypatch) -> pd.DataFrame:
    """All readings from the page's own CSV, with the operating day (from 07:00 local)."""
    settings.WEIRBOOK_DATA = tmp_path
    monkeypatch.setattr(clock, "now", lambda: NOW)
    call_command("make_demo", months=2, stdout=StringIO(), stderr=StringIO())
    client = Client()
    client.force_login(Person.objects.get(username="henrik"))
    answer = client.get("/w/KFW/readings/", {"first": "2026-05-25", "last": "2026-07-08", "export": "csv"})
    text = b"".join(answer.streaming_content) if answer.streaming else answer.content
    table = pd.read_csv(io.BytesIO(text), dtype=str, keep_default_na=False)
    table["at"] = pd.to_datetime(table["timestamp"], utc=True)
    table["day"] = (table["at"].dt.tz_convert("Europe/Berlin").dt.tz_localize(None) - pd.Timedelta(hours=7)).dt.date
    table["number"] = pd.to_numeric(table["value"], errors="coerce")
    return table


def test_what_is_printed_is_what_pandas_makes_of_the_exported_records(exported):
    made = content.draft(gather(books.book("KFW"), 2026, 6, now=NOW))
    printed = pd.read_csv(io.StringIO(facts.to_csv(made)), keep_default_na=False)
    text = "".join(page.extract_text() for page in pypdf.PdfReader(io.BytesIO(content.render(made))).pages)

    # The water of the month: the totaliser between its two boundaries, by elapsed hours between the readings beside each.
    counts = exported[(exported["site"] == "FT-TREATED") & (exported["parameter"] == "totaliser")].sort_values("at")
    series = counts.set_index("at")["number"]

    def at_seven(day: dt.date) -> float:
        moment = pd.Timestamp(dt.datetime.combine(day, dt.time(7)), tz="Europe/Berlin").tz_convert("UTC")
        before, after = series[series.index <= moment], series[series.index >= moment]
        if before.index[-1] == after.index[0]:
            return float(before.iloc[-1])
        share = (moment - before.index[-1]) / (after.index[0] - before.index[-1])
        return float(before.iloc[-1] + share * (after.iloc[0] - before.iloc[-1]))

    water_ml = (at_seven(dt.date(2026, 7, 1)) - at_seven(FIRST)) / 1000
    flow = printed[(printed["table"] == "flow") & (printed["row"] == "FT-TREATED") & (printed["quantity"] == "month")].iloc[0]
    assert float(flow["full_value"]) == pytest.approx(water_ml, rel=1e-6)
    assert flow["value"] in text

    # Counts, lowest, middle, highest at each place.
    month = exported[(exported["day"] >= FIRST) & (exported["day"] <= LAST) & (exported["marks"] == "")]
    checked = 0
    for (site, parameter), label in {
        ("ENTRY", "free_chlorine"): "Free chlorine, mg/L",
        ("ENTRY", "pH"): "pH",
        ("FILTERED", "turbidity"): "Turbidity, NTU",
        ("RAW", "hardness"): "Total hardness, mg/L as CaCO3",
        ("RAW", "temperature"): "Temperature, °C",
    }.items():
        own = month[(month["site"] == site) & (month["parameter"] == parameter) & month["number"].notna()]["number"]
        rows = printed[(printed["table"] == f"quality-{site}") & (printed["row"] == label)].set_index("quantity")
        assert float(rows.loc["lowest", "full_value"]) == pytest.approx(own.min())
        assert float(rows.loc["highest", "full_value"]) == pytest.approx(own.max())
        assert float(rows.loc["middle", "full_value"]) == pytest.approx(own.median())
        assert rows.loc["highest", "value"] in text
        checked += 1
    assert checked == 5
