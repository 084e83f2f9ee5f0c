"""What is stated of a works at any moment, as known at a seq of its book. Read once, asked often, never
changed.
"""

from __future__ import annotations

import bisect
import datetime as dt
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from functools import partial
from typing import Any
from zoneinfo import ZoneInfo

from plant import clock
from plant.works import described


class NotStated(LookupError):
    """Nothing is stated of this subject at this moment."""


@dataclass(frozen=True, eq=False)
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
        self._made: dict[Saying, Any] = {}
        self._subjects: dict[str, tuple[str, ...]] = {}

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
        if kind not in self._subjects:
            chains = self._by.get(kind, {})
            first = {code: min((item.seq, item.line) for item in chain) for code, chain in chains.items()}
            self._subjects[kind] = tuple(sorted(first, key=first.__getitem__))
        return self._subjects[kind]

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
        for found in self._parts("works", at):
            return found
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
        return tuple(sorted(self._parts("shift", at), key=lambda shift: shift.starts))

    def sample_points(self, at: dt.datetime) -> tuple[described.SamplePoint, ...]:
        """In the order of the water."""
        stages = ("raw", "process", "entry", "network")
        return tuple(sorted(self._parts("sample_point", at), key=lambda point: stages.index(point.stage)))

    def meters(self, at: dt.datetime) -> tuple[described.Meter, ...]:
        return self._parts("meter", at)

    def products(self, at: dt.datetime) -> tuple[described.Product, ...]:
        return self._parts("product", at)

    def vessels(self, at: dt.datetime) -> tuple[described.Vessel, ...]:
        return self._parts("vessel", at)

    def dosing_points(self, at: dt.datetime) -> tuple[described.DosingPoint, ...]:
        return self._parts("dosing_point", at)

    def limits(self, at: dt.datetime) -> tuple[described.Limit, ...]:
        return self._parts("limit", at)

    def round_lines(self, at: dt.datetime) -> tuple[described.RoundLine, ...]:
        """In walking order."""
        return tuple(sorted(self._parts("round_line", at), key=lambda line: line.order))

    def contact_segments(self, at: dt.datetime) -> tuple[described.ContactSegment, ...]:
        return self._parts("contact_segment", at)

    def meter(self, code: str, at: dt.datetime) -> described.Meter:
        """Raises NotStated."""
        found: described.Meter = self._part("meter", code, at)
        return found

    def product(self, code: str, at: dt.datetime) -> described.Product:
        """Raises NotStated."""
        found: described.Product = self._part("product", code, at)
        return found

    def vessel(self, code: str, at: dt.datetime) -> described.Vessel:
        """Raises NotStated."""
        found: described.Vessel = self._part("vessel", code, at)
        return found

    def dosing_point(self, code: str, at: dt.datetime) -> described.DosingPoint:
        """Raises NotStated."""
        found: described.DosingPoint = self._part("dosing_point", code, at)
        return found

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

    def _part(self, kind: str, code: str, at: dt.datetime) -> Any:
        saying = self.saying(kind, code, at)
        if saying is None or saying.withdrawn:
            raise NotStated(f"no {kind.replace('_', ' ')} {code!r} is stated at {at:%Y-%m-%d %H:%M} UTC")
        return self._built(saying)

    def _parts(self, kind: str, at: dt.datetime) -> tuple[Any, ...]:
        """The parts of a kind in force, in the order in which they were first stated."""
        sayings = (self.saying(kind, subject, at) for subject in self.subjects(kind))
        return tuple(self._built(saying) for saying in sayings if saying is not None and not saying.withdrawn)

    def _built(self, saying: Saying) -> Any:
        # Parts are frozen and asked for thousands of times a page: each saying is built once.
        if saying not in self._made:
            self._made[saying] = _MAKE[saying.kind](saying.subject, saying.value)
        return self._made[saying]


def _shift(name: str, value: dict[str, Any]) -> clock.Shift:
    return clock.Shift(name, dt.time.fromisoformat(value["starts"]))


_MAKE: dict[str, Callable[[str, dict[str, Any]], Any]] = {
    "works": partial(described.build, described.Works),
    "shift": _shift,
    "sample_point": partial(described.build, described.SamplePoint),
    "meter": partial(described.build, described.Meter),
    "product": partial(described.build, described.Product),
    "vessel": described.vessel,
    "dosing_point": partial(described.build, described.DosingPoint),
    "limit": described.limit,
    "round_line": partial(described.build, described.RoundLine),
    "contact_segment": partial(described.build, described.ContactSegment),
}
