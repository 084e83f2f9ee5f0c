"""The list of deviations."""

from __future__ import annotations

from typing import Any

import django_tables2 as tables
from django.template.loader import render_to_string
from django.utils.html import format_html

from plant.deviations import queries, words

WORDS = {"td": {"class": "words"}}


class DeviationTable(tables.Table):
    """One row an episode, worst first unless sorted."""

    level = tables.Column(order_by="rank")
    title = tables.Column(verbose_name="What", attrs=WORDS)
    since = tables.Column(verbose_name="Since", order_by="since_at", attrs={"td": {"class": "nowrap"}})
    value = tables.Column(verbose_name="Found", orderable=False)
    limit = tables.Column(verbose_name="Limit", orderable=False)
    cause = tables.Column(verbose_name="Most likely", orderable=False, attrs=WORDS, default="")
    state = tables.Column(verbose_name="State")

    class Meta:
        template_name = "components/datatable.html"
        attrs = {"class": "tight"}
        empty_text = "Nothing of this kind."

    def render_level(self, value: str) -> str:
        return render_to_string("components/level.html", {"level": value})

    def render_title(self, value: str, record: dict[str, Any]) -> str:
        return format_html('<a href="{}">{}</a>', record["path"], value)


def row(view: queries.DeviationView, *, title: str, path: str, since: str, causes: bool) -> dict[str, Any]:
    """A deviation as the table wants it. Operators are not shown likelihoods, so no cause either."""
    state = words.STATES.get(view.state, view.state)
    if view.awaiting_approval:
        state += ", correction awaits approval"
    if view.tellings_owed:
        state += ", somebody must be told"
    return {
        "rank": queries.WORST_FIRST.get(view.level, 9),
        "level": view.level,
        "title": title,
        "path": path,
        "since": since,
        "since_at": view.since,
        "value": view.value,
        "limit": view.limit,
        "cause": words.CAUSES.get(view.likely_causes[0], "") if causes and view.likely_causes else "",
        "state": state,
    }
