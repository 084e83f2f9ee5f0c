"""What the settings pages show: each subject of a kind, what holds, since when, by whom, why, and what will hold."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

from plant import clock
from plant.ledger.models import Book, Entry
from plant.works import kinds, parameters, words
from plant.works.stated import Saying, Stated


@dataclass(frozen=True)
class Said:
    """One statement on a page. ``when``: now, later, before, or overtaken (restated for the same moment)."""

    saying: Saying
    when: str
    since: dt.datetime | None
    stated_at: dt.datetime
    by: str
    facts: tuple[tuple[str, str], ...]

    @property
    def withdrawn(self) -> bool:
        return self.saying.withdrawn

    @property
    def reason(self) -> str:
        return self.saying.reason


@dataclass(frozen=True)
class Subject:
    """A subject of a kind with all that was, is and will be stated of it."""

    kind: str
    code: str
    now: Said | None
    later: tuple[Said, ...]
    before: tuple[Said, ...]

    @property
    def name(self) -> str:
        """Its stated name, where it has one."""
        return str(self.now.saying.value.get("name", "")) if self.now else ""

    @property
    def latest_ref(self) -> str:
        """The last statement made of it, whatever moment it is for."""
        every = [*self.before, *((self.now,) if self.now else ()), *self.later]
        last = max(every, key=lambda said: (said.saying.seq, said.saying.line), default=None)
        return last.saying.ref if last else ""


def facts(kind: str, value: dict[str, Any]) -> tuple[tuple[str, str], ...]:
    """A value as pairs of label and text, in the order of the kind's keys."""
    order = [key.name for key in kinds.KINDS[kind].keys]
    names = sorted(value, key=lambda name: order.index(name) if name in order else len(order))
    return tuple((words.label(name), _shown(kind, value, name)) for name in names if name not in ("name", "decimals"))


def _shown(kind: str, value: dict[str, Any], name: str) -> str:
    """A value in words; a limit in its own digits, a parameter by its name for people."""
    if kind == "limit" and name in ("low", "high", "limit") and "decimals" in value:
        return f"{value[name]:.{value['decimals']}f}"
    if name == "parameter" and value[name] in parameters.PARAMETERS:
        return parameters.PARAMETERS[value[name]].label
    return words.shown(value[name], name)


def difference(before: dict[str, Any] | None, after: dict[str, Any] | None) -> list[tuple[str, str, str]]:
    """What changes, key by key: label, what held, what will."""
    old, new = before or {}, after or {}
    return [
        (words.label(name), words.shown(old.get(name), name), words.shown(new.get(name), name))
        for name in dict.fromkeys([*old, *new])
        if old.get(name) != new.get(name)
    ]


class Reader:
    """Builds what the pages show, with one query for all the entries they name."""

    def __init__(self, book: Book, stated: Stated, now: dt.datetime) -> None:
        self.stated, self.now, self.book = stated, now, book
        self.calendar = stated.calendar(now)
        self._entries: dict[int, tuple[dt.datetime, str]] = {}

    def subjects(self, kind: str) -> list[Subject]:
        """All subjects of a kind: those in force first, in their own order."""
        codes = list(self.stated.subjects(kind))
        self._fetch([saying for code in codes for saying in self.stated.history(kind, code)])
        found = [self._subject(kind, code) for code in codes]
        if kind == "round_line":
            found.sort(key=lambda item: item.now.saying.value.get("order", 0) if item.now else 0)
        return sorted(found, key=lambda item: item.now is None or item.now.withdrawn)

    def subject(self, kind: str, code: str) -> Subject | None:
        """One subject; None when nothing was ever stated of it."""
        chain = self.stated.history(kind, code)
        if not chain:
            return None
        self._fetch(list(chain))
        return self._subject(kind, code)

    def coming(self) -> list[tuple[Subject, Said]]:
        """What will come into force, soonest first."""
        soon = [
            saying
            for saying in self.stated.changes(self.now, dt.datetime.max.replace(tzinfo=dt.UTC))
            if saying.kind != "membership" and saying.effective_from > self.now
        ]
        self._fetch(soon)
        return [(self._subject(saying.kind, saying.subject), self._said(saying, "later")) for saying in soon]

    def _subject(self, kind: str, code: str) -> Subject:
        chain = self.stated.history(kind, code)
        self._fetch(list(chain))
        current = self.stated.saying(kind, code, self.now)
        later = [saying for saying in chain if saying.effective_from > self.now]
        before = [saying for saying in chain if saying is not current and saying not in later]
        return Subject(
            kind,
            code,
            self._said(current, "now") if current else None,
            tuple(self._said(saying, "later") for saying in later),
            tuple(self._said(saying, "before") for saying in reversed(before)),
        )

    def _said(self, saying: Saying, when: str) -> Said:
        at, by = self._entries[saying.seq]
        since = None if saying.effective_from == clock.BEGINNING else saying.effective_from
        if when == "before" and any(
            item.effective_from == saying.effective_from and item is not saying
            for item in self.stated.history(saying.kind, saying.subject)
        ):
            when = "overtaken"
        return Said(saying, when, since, at, by, facts(saying.kind, saying.value))

    def _fetch(self, sayings: list[Saying]) -> None:
        missing = {saying.seq for saying in sayings} - self._entries.keys()
        rows = Entry.objects.filter(book=self.book, seq__in=list(missing)[:5000]).select_related("recorded_by")
        for entry in rows:
            by = entry.recorded_by.display_name if entry.recorded_by else "the command line"
            self._entries[entry.seq] = (entry.recorded_at, by)
