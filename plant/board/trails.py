"""A trail with its readings and statements looked up: who, when, typed how, corrected or not."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import cast

from django.db.models import Q

from chemistry import sources
from plant.board import shown
from plant.dosing.figures import Figure, Trail
from plant.readings.models import Reading
from plant.stock.models import Delivery, Transfer
from plant.works import access, parameters
from plant.works.models import Statement

SOME = 200
"""References are looked up so many at a time."""


@dataclass(frozen=True)
class Reference:
    """A row of the book that a step stands on."""

    ref: str
    words: str
    when: str
    who: str
    remark: str
    path: str


@dataclass(frozen=True)
class Opened:
    """One step, its references found."""

    words: str
    formula: str
    source: str
    references: tuple[Reference, ...]


@dataclass(frozen=True)
class OpenedTrail:
    """A whole trail."""

    title: str
    figure: Figure
    value: shown.Shown
    value_spread: shown.Shown
    steps: tuple[Opened, ...]


def opened(at: access.At, trail: Trail) -> OpenedTrail:
    """The trail for a page; three questions to the database, however many readings it names."""
    refs = {ref for step in trail.steps for ref in step.readings}
    said = {ref for step in trail.steps for ref in step.statements}
    found = {**_readings(at, refs), **_movements(at, refs), **_statements(at, said)}
    works = at.stated.works(at.now)
    return OpenedTrail(
        trail.title,
        trail.figure,
        shown.figure(trail.figure, works),
        shown.figure(trail.figure, works, spread=True),
        tuple(
            Opened(
                step.words,
                step.formula,
                _cited(step.source),
                tuple(found[ref] for ref in (*step.readings, *step.statements) if ref in found),
            )
            for step in trail.steps
        ),
    )


def _cited(source: str) -> str:
    """A source by its citation where it is named by a key of the bibliography; else as it is."""
    return sources.SOURCES.get(source, source)


def _inside(label: str) -> str:
    """A label in the middle of a sentence: Free chlorine becomes free chlorine, pH and E. coli stay."""
    return label[0].lower() + label[1:] if label[1:2].islower() else label


def _named(refs: Iterable[str]) -> list[Q]:
    """Conditions that pick rows by their seq and line, some at a time."""
    by_seq: dict[int, list[int]] = {}
    for ref in refs:
        seq, _, line = ref.partition(".")
        if seq.isdigit() and line.isdigit():
            by_seq.setdefault(int(seq), []).append(int(line))
    pairs = list(by_seq.items())
    out = []
    for first in range(0, len(pairs), SOME):
        condition = Q(pk__in=[])
        for number, lines in pairs[first : first + SOME]:
            condition |= Q(seq=number, line__in=lines)
        out.append(condition)
    return out


def _readings(at: access.At, refs: set[str]) -> dict[str, Reference]:
    known = parameters.known(at.stated, at.now)
    calendar = at.stated.calendar(at.now)
    out = {}
    for condition in _named(refs):
        rows = Reading.objects.filter(condition, book=at.book).select_related("entry__recorded_by", "supersedes")
        for row in rows:
            label = known[row.parameter].label if row.parameter in known else row.parameter
            typed = "not taken" if row.state == "not_taken" else f"{row.typed} {shown.unit_name(row.typed_unit)}".strip()
            remark = ""
            before = cast("Reading | None", row.supersedes)
            if before is not None:
                remark = f"corrected: was {before.typed} {before.typed_unit}, because {row.reason}"
            out[row.ref] = Reference(
                row.ref,
                f"{row.site}, {_inside(label)}: typed {typed}",
                shown.moment(row.taken_at, at.now, calendar),
                _who(row, at),
                remark,
                f"/w/{at.code}/reading/{row.ref}/",
            )
    return out


def _movements(at: access.At, refs: set[str]) -> dict[str, Reference]:
    calendar = at.stated.calendar(at.now)
    out = {}
    for model in (Delivery, Transfer):
        for condition in _named(refs):
            for row in model.objects.filter(condition, book=at.book).select_related("entry__recorded_by"):
                when = shown.moment(row.taken_at, at.now, calendar)
                remark = f"corrected, because {row.reason}" if row.supersedes_id else ""
                out[row.ref] = Reference(row.ref, str(row), when, _who(row, at), remark, "")
    return out


def _statements(at: access.At, refs: set[str]) -> dict[str, Reference]:
    calendar = at.stated.calendar(at.now)
    out = {}
    for condition in _named(refs):
        for row in Statement.objects.filter(condition, book=at.book).select_related("entry__recorded_by"):
            when = (
                "from the beginning" if row.effective_from.year < 1950 else shown.moment(row.effective_from, at.now, calendar)
            )
            words = f"setting: {row.kind.replace('_', ' ')} {row.subject}, in force {when}"
            out[row.ref] = Reference(row.ref, words, "", _who(row, at), row.reason, f"/w/{at.code}/settings/")
    return out


def _who(row: Reading | Delivery | Transfer | Statement, at: access.At) -> str:
    person = row.entry.recorded_by
    recorded = shown.moment(row.entry.recorded_at, at.now, at.stated.calendar(at.now))
    return f"{person.display_name if person else 'the command line'}, recorded {recorded}"
