"""Readings that tell a flow and a feeder's delivery."""

from __future__ import annotations

import datetime as dt
import uuid

from plant import clock
from plant.intake import actions
from plant.readings.models import Reading


def flow_of(book, *, m3_h: float) -> None:
    """Two totaliser readings ten hours apart, and a draw-down of 51 mL/min at 40 %."""
    now = clock.now()
    values = [
        ("FT-TREATED", "totaliser", 120000, "m3", now - dt.timedelta(hours=11)),
        ("FT-TREATED", "totaliser", 120000 + 10 * m3_h, "m3", now - dt.timedelta(hours=1)),
        ("HYPO-POST", "feeder_setting", 40, "%", now - dt.timedelta(hours=5)),
        ("HYPO-POST", "drawdown", 51, "mL/min", now - dt.timedelta(hours=5)),
    ]
    rows = [
        Reading(
            site=site,
            parameter=parameter,
            taken_at=at,
            value=value,
            value_text=f"{value:g}",
            unit=unit,
            typed=f"{value:g}",
            typed_unit=unit,
        )
        for site, parameter, value, unit, at in values
    ]
    rows[1].value_text = rows[1].typed = str(int(rows[1].value))
    actions.take(book=book, client_id=uuid.uuid4().hex, kind="round", received={}, rows=rows, by=None, now=now, judge=False)
