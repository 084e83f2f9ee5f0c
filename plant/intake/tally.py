"""What came of bringing in a file, counted."""

from __future__ import annotations

import datetime as dt
from collections import Counter
from dataclasses import dataclass, field

from plant.intake import matching, numbers
from plant.intake.lines import NOT_STATED, Refusal, Taken
from plant.readings import marks, models

MOST_REFUSALS_KEPT = 1000


@dataclass
class Tally:
    """Counts over a file. Refused lines are kept up to a thousand; beyond that they are only counted."""

    file: str
    lines: int = 0
    outcomes: Counter[str] = field(default_factory=Counter)
    not_taken: int = 0
    not_stated: int = 0
    censored: int = 0
    words: int = 0
    dashes: int = 0
    marked: Counter[str] = field(default_factory=Counter)
    remarks: Counter[str] = field(default_factory=Counter)
    refused: int = 0
    refusals: list[Refusal] = field(default_factory=list)
    unknown: dict[str, list[int]] = field(default_factory=dict)
    sites_added: list[str] = field(default_factory=list)
    ignored_columns: tuple[str, ...] = ()
    days: set[dt.date] = field(default_factory=set)
    notes: dict[str, tuple[dt.date, ...]] = field(default_factory=dict)
    findings: int = 0
    judged: bool = True

    def refuse(self, refusal: Refusal) -> None:
        """Counts a line that was not taken; a parameter nobody knows is told once, with its count."""
        self.refused += 1
        if refusal.parameter:
            self.unknown.setdefault(refusal.parameter, []).append(refusal.line)
        elif len(self.refusals) < MOST_REFUSALS_KEPT:
            self.refusals.append(refusal)

    def count(self, taken: Taken, outcome: str) -> None:
        """Counts a line that was understood; what is said of its value counts only where it is new."""
        self.outcomes[outcome] += 1
        if outcome == matching.SAME:
            return
        reading = taken.reading
        if reading.state == models.Reading.State.NOT_TAKEN:
            self.not_taken += 1
            self.not_stated += reading.note == NOT_STATED
        elif reading.state == models.Reading.State.WORDS:
            if reading.typed.strip() in numbers.DASHES:
                self.dashes += 1
            else:
                self.words += 1
        self.censored += bool(reading.qualifier)
        self.marked.update(reading.marks)
        self.remarks.update(taken.remarks)

    @property
    def added(self) -> int:
        """Rows that are new in the book, whatever else is said of them."""
        return sum(self.outcomes[name] for name in (matching.ADDED, matching.CONFLICT, matching.CORRECTED))

    def summary(self) -> list[str]:
        """The counts in sentences, zeros left out where they say nothing."""
        out = [
            f"{self.file}: {self.lines} lines read",
            f"  {self.added} added, {self.outcomes[matching.SAME]} there already, "
            f"{self.outcomes[matching.CONFLICT]} in conflict, {self.outcomes[matching.CORRECTED]} corrections, "
            f"{self.refused} refused",
        ]
        if self.not_taken:
            out.append(f"  {self.not_taken} not taken ({self.not_stated} of them without a reason)")
        if self.censored:
            out.append(f"  {self.censored} with < or >")
        if self.dashes:
            out.append(f"  {self.dashes} a lone dash: no result, and not counted as not taken")
        if self.words:
            out.append(f"  {self.words} in words")
        out += [f"  {count} marked: {marks.in_words([mark])}" for mark, count in sorted(self.marked.items())]
        out += [f"  {count} × {remark}" for remark, count in sorted(self.remarks.items())]
        if self.sites_added:
            shown = ", ".join(self.sites_added[:20]) + (" …" if len(self.sites_added) > 20 else "")
            out.append(f"  {len(self.sites_added)} sample points added: {shown}")
        if self.ignored_columns:
            out.append(f"  columns not read: {', '.join(self.ignored_columns)}")
        return out

    def refusal_lines(self) -> list[str]:
        """One line for each refusal: file:line, what was read, what was expected."""
        out = [f"{self.file}:{item.line}: read {item.read}; expected {item.expected}" for item in self.refusals]
        for name, lines in self.unknown.items():
            where = f"{self.file}:{lines[0]}"
            times = f"{len(lines)} line" + ("s, the first here" if len(lines) > 1 else "")
            out.append(f"{where}: read parameter {name!r} ({times}); expected a parameter this works knows")
        hidden = self.refused - len(self.refusals) - sum(len(lines) for lines in self.unknown.values())
        if hidden:
            out.append(f"{self.file}: and {hidden} more refused lines")
        return out
