"""Which back-ups are kept: all of a fortnight, then one a week for eight weeks, then one a month for two years."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable
from pathlib import Path

ALL_FOR = dt.timedelta(days=14)
WEEKLY_FOR = dt.timedelta(weeks=8)
MONTHLY_FOR = dt.timedelta(days=731)

_NAME = re.compile(r"^weirbook-(\d{8}T\d{6}Z)\.tar\.gz(\.sealed)?$")


def name_of(made_at: dt.datetime, *, sealed: bool) -> str:
    """What a back-up of this moment is called."""
    return f"weirbook-{made_at.astimezone(dt.UTC):%Y%m%dT%H%M%SZ}.tar.gz{'.sealed' if sealed else ''}"


def moment_of(path: Path) -> dt.datetime | None:
    """When a back-up was made, from its name; None for any other file."""
    found = _NAME.match(path.name)
    return dt.datetime.strptime(found[1], "%Y%m%dT%H%M%SZ").replace(tzinfo=dt.UTC) if found else None


def superfluous(moments: Iterable[dt.datetime], now: dt.datetime) -> set[dt.datetime]:
    """The moments whose back-ups may go. The newest always stays, and of a week or month the first."""
    ordered = sorted(moments)
    kept: set[dt.datetime] = set(ordered[-1:])
    weeks: set[tuple[int, int]] = set()
    months: set[tuple[int, int]] = set()
    for moment in ordered:
        age = now - moment
        week, month = moment.isocalendar()[:2], (moment.year, moment.month)
        if age <= ALL_FOR:
            kept.add(moment)
        if age <= WEEKLY_FOR and week not in weeks:
            weeks.add(week)
            kept.add(moment)
        if age <= MONTHLY_FOR and month not in months:
            months.add(month)
            kept.add(moment)
    return set(ordered) - kept


def remove_superfluous(folder: Path, now: dt.datetime) -> list[Path]:
    """Removes them. Files with other names are left alone."""
    dated = {path: moment for path in folder.iterdir() if (moment := moment_of(path)) is not None}
    going = superfluous(dated.values(), now)
    removed = [path for path, moment in sorted(dated.items()) if moment in going]
    for path in removed:
        path.unlink()
    return removed
