"""The shape of a series: changing too fast, or not at all."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from decimal import Decimal
from itertools import pairwise

from plant.deviations.rules.observed import Breach, Observed


def rate_of_change(
    values: Sequence[Observed], *, per_hour: Decimal, longest: dt.timedelta = dt.timedelta(hours=26)
) -> list[Breach]:
    """Neighbours that differ by more than ``per_hour`` x elapsed hours. Pairs further apart than ``longest`` say
    nothing about a rate. Common practice, no source.
    """
    out = []
    for before, after in pairwise(sorted(values, key=lambda item: item.at)):
        elapsed = after.at - before.at
        if before.qualifier or after.qualifier or not dt.timedelta(0) < elapsed <= longest:
            continue
        hours = Decimal(elapsed // dt.timedelta(seconds=1)) / 3600
        rate = (after.value - before.value) / hours
        if abs(rate) > per_hour:
            out.append(
                Breach(
                    since=before.at,
                    until=after.at,
                    value=f"{rate:+.3g} per h",
                    limit=f"≤ {per_hour} per h",
                    sentence=f"from {before.text} to {after.text} in {float(hours):.1f} h",
                    refs=(before.ref, after.ref),
                )
            )
    return out


def stuck(values: Sequence[Observed], *, readings: int) -> list[Breach]:
    """Runs of ``readings`` or more identical values, as typed. A held last value after a lost signal looks the same.
    Common practice, no source.
    """
    out: list[Breach] = []
    run: list[Observed] = []
    for item in [*sorted(values, key=lambda each: each.at), None]:
        if item is not None and (not run or (item.value, item.qualifier) == (run[0].value, run[0].qualifier)):
            run.append(item)
            continue
        if len(run) >= readings:
            out.append(
                Breach(
                    since=run[0].at,
                    until=item.at if item is not None else None,
                    value=f"{len(run)} × {run[0].text}",
                    limit=f"< {readings} identical in a row",
                    sentence=f"{len(run)} readings in a row are {run[0].text}",
                    refs=tuple(each.ref for each in run),
                )
            )
        run = [item] if item is not None else []
    return out
