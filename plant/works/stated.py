"""What is stated of a works at any moment, as known at a seq of its book. Read once, asked often, never
changed.
"""

from __future__ import annotations

import bisect
import datetime as dt
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any
from zoneinfo import ZoneInfo

from plant import clock
from plant.works import described


class NotStated(LookupError):
    """Nothing is stated of this subject at this moment."""


@dataclass(frozen=True)
class Saying:
    """One statement: what holds of a subject from a moment on, until the next one."""

    kind: str
    subject: str
    effective_from: dt.datetime
    value: dict[str, Any]
    withdrawn: bool
    seq: int
    line: int
    reason: str

    @property
    def ref(self) -> str:
        return f"{self.seq}.{self.line}"


class Stated:
    """All statements of one works. The latest before the moment holds; of two for the same moment, the later
    stated.
    """

    def __init__(self, sayings: list[Saying]) -> None:
        self._by: dict[str, dict[str, list[Saying]]] = {}
        for saying in sorted(sayings, key=lambda item: (item.effective_from, item.seq, item.line)):
            self._by.setdefault(saying.kind, {}).setdefault(saying.subject, []).append(saying)
        self._calendar: dict[tuple[str, str], clock.Calendar] = {}

    def adding(self, sayings: Iterable[Saying]) -> Stated:
        """The same with more said, for looking before anything is written."""
        said = [saying for chains in self._by.values() for chain in chains.values() for saying in chain]
        return Stated([*said, *sayings])

    def saying(self, kind: str, subject: str, at: dt.datetime) -> Saying | None:
        """The statement in force, a withdrawal included; None when nothing has been said by then."""
        chain = self._by.get(kind, {}).get(subject, [])
        index = bisect.bisect_right(chain, at, key=lambda item: item.effective_from)
        return chain[index - 1] if index else None

    def value(self, kind: str, subject: str, at: dt.datetime) -> dict[str, Any] | None:
        """What is in force, or None (nothing stated, or withdrawn)."""
        saying = self.saying(kind, subject, at)
        return None if saying is None or saying.withdrawn else saying.value

    def history(self, kind: str, subject: str) -> tuple[Saying, ...]:
        """All that was ever stated of a subject, in order of force."""
        return tuple(self._by.get(kind, {}).get(subject, ()))

    def subjects(self, kind: str) -> tuple[str, ...]:
        """All subjects of a kind, in the order in which they were first stated."""
        chains = self._by.get(kind, {})
        return tuple(sorted(chains, key=lambda code: min((item.seq, item.line) for item in chains[code])))

    def in_force(self, kind: str, at: dt.datetime) -> Iterator[tuple[str, dict[str, Any]]]:
        """Subject and value of all that is in force of a kind."""
        for subject in self.subjects(kind):
            value = self.value(kind, subject, at)
            if value is not None:
                yield subject, value

    def changes(self, start: dt.datetime, end: dt.datetime) -> list[Saying]:
        """Statements that come into force in [start, end), in order."""
        found = [
            saying
            for chains in self._by.values()
            for chain in chains.values()
            for saying in chain
            if start <= saying.effective_from < end
        ]
        return sorted(found, key=lambda item: (item.effective_from, item.seq, item.line))

    # The parts, typed.

    def works(self, at: dt.datetime) -> described.Works:
        """The works itself. Raises NotStated before anything is stated."""
        for subject, value in self.in_force("works", at):
            return described.build(described.Works, subject, value)
        raise NotStated("nothing is stated of this works yet: load a works file first")

    def calendar(self, at: dt.datetime) -> clock.Calendar:
        """Its reckoning of days."""
        works = self.works(at)
        key = (works.timezone, works.operating_day_starts)
        if key not in self._calendar:
            self._calendar[key] = clock.Calendar(ZoneInfo(works.timezone), dt.time.fromisoformat(works.operating_day_starts))
        return self._calendar[key]

    def shifts(self, at: dt.datetime) -> tuple[clock.Shift, ...]:
        """The shift pattern, by starting time."""
        found = [clock.Shift(name, dt.time.fromisoformat(value["starts"])) for name, value in self.in_force("shift", at)]
        return tuple(sorted(found, key=lambda shift: shift.starts))

    def sample_points(self, at: dt.datetime) -> tuple[described.SamplePoint, ...]:
        """In the order of the water."""
        stages = ("raw", "process", "entry", "network")
        found = [described.build(described.SamplePoint, code, value) for code, value in self.in_force("sample_point", at)]
        return tuple(sorted(found, key=lambda point: stages.index(point.stage)))

    def meters(self, at: dt.datetime) -> tuple[described.Meter, ...]:
        return tuple(described.build(described.Meter, code, value) for code, value in self.in_force("meter", at))

    def products(self, at: dt.datetime) -> tuple[described.Product, ...]:
        return tuple(described.build(described.Product, code, value) for code, value in self.in_force("product", at))

    def vessels(self, at: dt.datetime) -> tuple[described.Vessel, ...]:
        return tuple(described.vessel(code, value) for code, value in self.in_force("vessel", at))

    def dosing_points(self, at: dt.datetime) -> tuple[described.DosingPoint, ...]:
        return tuple(described.build(described.DosingPoint, code, value) for code, value in self.in_force("dosing_point", at))

    def limits(self, at: dt.datetime) -> tuple[described.Limit, ...]:
        return tuple(described.limit(code, value) for code, value in self.in_force("limit", at))

    def round_lines(self, at: dt.datetime) -> tuple[described.RoundLine, ...]:
        """In walking order."""
        found = [described.build(described.RoundLine, code, value) for code, value in self.in_force("round_line", at)]
        return tuple(sorted(found, key=lambda line: line.order))

    def contact_segments(self, at: dt.datetime) -> tuple[described.ContactSegment, ...]:
        return tuple(
            described.build(described.ContactSegment, code, value) for code, value in self.in_force("contact_segment", at)
        )

    def meter(self, code: str, at: dt.datetime) -> described.Meter:
        """Raises NotStated."""
        return described.build(described.Meter, code, self._needed("meter", code, at))

    def product(self, code: str, at: dt.datetime) -> described.Product:
        """Raises NotStated."""
        return described.build(described.Product, code, self._needed("product", code, at))

    def vessel(self, code: str, at: dt.datetime) -> described.Vessel:
        """Raises NotStated."""
        return described.vessel(code, self._needed("vessel", code, at))

    def dosing_point(self, code: str, at: dt.datetime) -> described.DosingPoint:
        """Raises NotStated."""
        return described.build(described.DosingPoint, code, self._needed("dosing_point", code, at))

    def design_dose_mg_l(self, dosing_point: str, at: dt.datetime) -> float | None:
        """The dose in force, mg/L in the product's dose basis; None when none is stated."""
        value = self.value("design_dose", dosing_point, at)
        return None if value is None else float(value["dose_mg_per_L"])

    def state(self, kind: str, code: str, at: dt.datetime) -> str:
        """in_service, standby or off, of a vessel, a dosing_point or the works; in service unless stated."""
        value = self.value("state", f"{kind}:{code}", at)
        return "in_service" if value is None else str(value["is"])

    def site_kind(self, code: str, at: dt.datetime) -> str | None:
        """What a site code names: sample_point, meter, vessel or dosing_point; None for nothing."""
        for kind in ("sample_point", "meter", "vessel", "dosing_point"):
            if self.value(kind, code, at) is not None:
                return kind
        return None

    def _needed(self, kind: str, code: str, at: dt.datetime) -> dict[str, Any]:
        value = self.value(kind, code, at)
        if value is None:
            raise NotStated(f"no {kind.replace('_', ' ')} {code!r} is stated at {at:%Y-%m-%d %H:%M} UTC")
        return value
