"""The month's figures reckoned a second time, by pandas from the record file alone. Nothing of the program is used."""

from __future__ import annotations

import datetime as dt
import io

import pandas as pd

from tests.reports import plan


def frame(rows: list[tuple[str, ...]]) -> pd.DataFrame:
    """The record file as a table: instants in UTC, qualifier and number apart, the operating day (from 07:00 local)."""
    table = pd.read_csv(io.StringIO(plan.text(rows)), dtype=str, keep_default_na=False)
    wall = pd.to_datetime(table["timestamp"])
    table["at"] = wall.dt.tz_localize("Europe/Berlin").dt.tz_convert("UTC")
    table["day"] = (wall - pd.Timedelta(hours=7)).dt.date
    table["below"] = table["value"].str.startswith("<")
    table["number"] = pd.to_numeric(table["value"].str.lstrip("<"), errors="coerce")
    return table


def days(table: pd.DataFrame, first: dt.date, last: dt.date) -> pd.DataFrame:
    """Volume, caustic and peroxide of each operating day: the differences of the readings at its two 07:00 boundaries."""
    at_seven = table[table["timestamp"].str.endswith("07:00")]
    wide = at_seven.pivot_table(index="day", columns="site", values="number", aggfunc="last", observed=True)
    totals = at_seven[at_seven["parameter"] == "totaliser"].set_index("day")["number"]
    levels = at_seven[(at_seven["site"] == "NAOH-BULK") & (at_seven["parameter"] == "level")].set_index("day")["number"]
    out = pd.DataFrame(index=pd.Index([first + dt.timedelta(days=n) for n in range((last - first).days + 1)], name="day"))
    out["volume_ml"] = [(totals[day + dt.timedelta(days=1)] - totals[day]) / 1000 for day in out.index]
    caustic_kg = [(levels[day] - levels[day + dt.timedelta(days=1)]) * plan.CAUSTIC_KG_PER_M for day in out.index]
    out["caustic_kg"] = caustic_kg
    delivered = dt.date.fromisoformat(plan.DELIVERED[:10])
    if delivered in out.index:
        out.loc[delivered, "caustic_kg"] += plan.DELIVERED_KG
    out["peroxide_kg"] = [wide["PEROX-IBC"][day] - wide["PEROX-IBC"][day + dt.timedelta(days=1)] for day in out.index]
    out["caustic_mg_l"] = out["caustic_kg"] * plan.CAUSTIC_SHARE / out["volume_ml"]
    out["peroxide_mg_l"] = out["peroxide_kg"] * plan.PEROXIDE_SHARE / out["volume_ml"]
    return out


def of(table: pd.DataFrame, site: str, parameter: str, first: dt.date, last: dt.date) -> pd.DataFrame:
    """The rows of one parameter within operating days."""
    return table[(table["site"] == site) & (table["parameter"] == parameter) & (table["day"] >= first) & (table["day"] <= last)]
