"""The plain form of a round: its fields by line, and what stands in each row of the page."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from plant.intake import rounds, rules, walk
from plant.readings.queries import Point

NOT_TAKEN = (
    "instrument off or faulty",
    "no flow",
    "no access",
    "no reagent",
    "out of service",
    "no time",
)
"""Reasons offered with one tap; a note may say more."""


@dataclass(frozen=True)
class Row:
    """One line as the page shows it: the line itself, what is typed, and what is said about it."""

    number: int
    line: walk.Line
    value: str
    unit: str
    clock: str
    not_taken: str
    note: str
    confirmed: bool
    error: str
    doubt: str
    limit: dict[str, Any] | None
    limit_do: str

    @property
    def units(self) -> list[str]:
        return list(self.line.rules["units"])

    @property
    def taken(self) -> Point | None:
        return self.line.taken[-1] if self.line.taken else None


def typed_lines(posted: Mapping[str, str], walked: walk.Round) -> dict[str, dict[str, Any]]:
    """The lines in which something was typed, as a tablet would send them, by key."""
    out: dict[str, dict[str, Any]] = {}
    for number, line in enumerate(walked.lines):
        value, why_not = (posted.get(f"{name}-{number}", "").strip() for name in ("value", "not_taken"))
        if not value and not why_not:
            continue
        unit = posted.get(f"unit-{number}", line.rules["unit"])
        sent = {
            "site": line.site,
            "parameter": rounds.site_sent(line.parameter, unit),
            "value": value,
            "unit": unit,
            "clock": posted.get(f"clock-{number}", "").strip(),
            "not_taken": why_not,
            "note": posted.get(f"note-{number}", "").strip(),
        }
        if posted.get(f"confirmed-{number}"):
            sent["confirmed"] = True
        out[line.key] = sent
    return out


def still_open(walked: walk.Round, typed: Mapping[str, Any]) -> list[str]:
    """The lines that stay without an answer when a round is closed."""
    return [line.key for line in walked.lines if not line.answered and line.key not in typed]


def row(number: int, line: walk.Line, typed: Mapping[str, Any], found: rules.Answer | None, problem: str) -> Row:
    """One row of the page."""
    texts = line.rules["texts"]
    error = problem
    limit, side = None, "low"
    if found is not None and found.state == rules.STOPPED and not typed.get("not_taken"):
        error = problem or texts["stopped"]
    if found is not None and found.limit:
        limit = next(item for item in line.rules["as"]["kept"]["limits"] if item["code"] == found.limit)
        side = found.side
    return Row(
        number,
        line,
        str(typed.get("value", "")),
        str(typed.get("unit", line.rules["unit"])),
        str(typed.get("clock", "")),
        str(typed.get("not_taken", "")),
        str(typed.get("note", "")),
        bool(typed.get("confirmed")),
        error,
        texts[found.doubt] if found is not None and found.doubt else "",
        limit,
        limit["do"][side] if limit else "",
    )
