"""manage.py deviations: what was outside, one row an episode, as CSV."""

from __future__ import annotations

import datetime as dt
from typing import Any

from plant.deviations import queries
from plant.works import commands

HEADER = (
    "raised_for",
    "since",
    "raised_at",
    "kind",
    "level",
    "subject",
    "parameter",
    "value",
    "limit",
    "likely_causes",
    "state",
)


class Command(commands.WorksCommand):
    """Lists the episodes raised for the days --from to --to."""

    help = "List deviations raised for operating days, as CSV."
    takes_known_at = True
    takes_days = True

    def run(self, asked: commands.Asked, **options: Any) -> None:
        views = queries.raised_for(asked.book, asked.first, asked.last, asked.known)
        self.write_csv(HEADER, [row(view) for view in views])


def row(view: queries.DeviationView) -> tuple[Any, ...]:
    """One deviation as its line."""
    return (
        view.raised_for.isoformat(),
        _utc(view.since),
        _utc(view.raised_at),
        view.kind,
        view.level,
        view.subject,
        view.parameter,
        view.value,
        view.limit,
        ";".join(view.likely_causes),
        view.state,
    )


def _utc(at: dt.datetime) -> str:
    return at.astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
