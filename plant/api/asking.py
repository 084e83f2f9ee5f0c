"""What stands behind the ? of an address: days, pages. Nothing unknown is passed over, since a misspelt limit would be none."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from urllib.parse import urlencode

from django.http import HttpRequest

from plant.api.problems import Problem

LONGEST_DAYS = 366
MOST_ROWS, USUAL_ROWS = 500, 100
USUAL_DAYS = 31
EARLIEST, LATEST = dt.date(1990, 1, 1), dt.date(2199, 12, 31)
_DAY = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)
_AFTER = re.compile(r"(\d{4}-\d{2}-\d{2})~([^~\x00]{1,80})", re.ASCII)


@dataclass(frozen=True)
class Days:
    """Operating days, first and last included, and which page of them: up to ``limit`` rows after (day, name)."""

    first: dt.date
    last: dt.date
    limit: int
    after: tuple[dt.date, str] | None
    more: dict[str, str]

    def address_after(self, path: str, day: dt.date, name: str) -> str:
        """The address of the page after the row (day, name)."""
        asked = {"first": self.first, "last": self.last, "limit": self.limit, **self.more, "after": f"{day}~{name}"}
        return f"{path}?{urlencode(asked)}"


def only(request: HttpRequest, *names: str) -> dict[str, str]:
    """The parameters, each once. Raises Problem for one that this address doesn't know."""
    out = {}
    for name, values in request.GET.lists():
        if name not in names:
            raise _wrong(name, f"this address knows {', '.join(names) or 'no parameters'}")
        if len(values) > 1:
            raise _wrong(name, "it is given more than once")
        out[name] = values[0]
    return out


def days(request: HttpRequest, today: dt.date, *names: str) -> Days:
    """first, last, limit, after, and the parameters ``names``. Without days: the last 31. Raises Problem."""
    given = only(request, "first", "last", "limit", "after", *names)
    last = _day(given, "last") or min(today, LATEST)
    first = _day(given, "first") or max(EARLIEST, last - dt.timedelta(days=USUAL_DAYS - 1))
    if first > last:
        raise _wrong("first", f"{first} lies after {last}")
    if (last - first).days >= LONGEST_DAYS:
        raise _wrong("first", f"at most {LONGEST_DAYS} days at a time")
    return Days(first, last, _limit(given), _after(given), {name: given[name] for name in names if name in given})


def _day(given: dict[str, str], name: str) -> dt.date | None:
    text = given.get(name)
    if text is None:
        return None
    try:
        found = dt.date.fromisoformat(text) if _DAY.fullmatch(text) else None
    except ValueError:
        found = None
    if found is None or not EARLIEST <= found <= LATEST:
        raise _wrong(name, f"expected a day YYYY-MM-DD from {EARLIEST} to {LATEST}")
    return found


def _limit(given: dict[str, str]) -> int:
    text = given.get("limit", str(USUAL_ROWS))
    if not (re.fullmatch(r"\d{1,3}", text, re.ASCII) and 1 <= int(text) <= MOST_ROWS):
        raise _wrong("limit", f"expected a number from 1 to {MOST_ROWS}")
    return int(text)


def _after(given: dict[str, str]) -> tuple[dt.date, str] | None:
    if "after" not in given:
        return None
    found = _AFTER.fullmatch(given["after"])
    try:
        if found is not None:
            return dt.date.fromisoformat(found[1]), found[2]
    except ValueError:
        pass
    raise _wrong("after", "expected what stands in “next” of the page before")


def _wrong(name: str, why: str) -> Problem:
    return Problem(422, f"{name}: {why}.", parameter=name)
