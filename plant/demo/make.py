"""Makes the demo works: replays a simulated history into a book, entry by entry, as it would have been written down."""

from __future__ import annotations

import datetime as dt
import uuid
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.accounts.models import Person
from plant.demo import people, rows, works_file
from plant.demo.observe import Booked, Moved, Round
from plant.demo.simulate import Simulated
from plant.ledger import actions as ledger
from plant.ledger.models import Book
from plant.readings import actions as readings
from plant.readings.models import Reading, Settlement
from plant.stock import actions as stock
from plant.stock.models import Delivery
from plant.works import actions as works
from plant.works import load

_NAMES = uuid.UUID("6f0c2a0e-6d0f-5b4e-9a53-2f1f6a1f7d11")
_BEFORE = dt.timedelta(days=3)
_SETTLED = "the paper says a point between the figures; set aside, the next round stands"
_NEVER_SETTLED_DAYS = 10


@dataclass(frozen=True)
class Event:
    """Something that reaches the book at a moment."""

    at: dt.datetime
    do: Callable[[], None]


class Demo:
    """One history on its way into one book."""

    def __init__(self, history: Simulated, cast: dict[str, Person]) -> None:
        self.history, self.cast = history, cast
        self.calendar = history.grid.calendar
        opened = history.grid.start - _BEFORE
        text = works_file.text(history.plan, None) + _opening(history)
        done = load.load(
            data=text.encode(), by=cast["arne"], now=opened, reason="works set up", source=f"{history.plan.code}.toml"
        )
        self.book: Book = done.book
        people.join(book=self.book, by=cast["arne"], now=opened)

    def events(self) -> list[Event]:
        """All that reaches the book, in the order in which it does."""
        found = [
            *self._rounds(),
            *self._loads(),
            *(Event(move.at + dt.timedelta(minutes=6), self._move(move)) for move in self.history.book.moves),
            *self._settings(),
        ]
        end = self.history.until
        return sorted((event for event in found if event.at < end), key=lambda event: event.at)

    def append(self, name: str, kind: str, received: Any, entry: list[Any], by: str, at: dt.datetime, device: str) -> Any:
        """One entry of the demo's people."""
        return ledger.append(
            book=self.book,
            client_id=str(uuid.uuid5(_NAMES, f"{self.history.seed} {name}")),
            kind=kind,
            received=received,
            rows=entry,
            by=self.cast[by],
            now=at,
            device=device,
        )

    def operator(self, item: Round) -> str:
        """Who had the shift: the two operators change weekly between day and night."""
        week = (item.at - self.history.grid.start).days // 7
        return ("nora", "emil")[(week + (item.shift == "night")) % 2]

    def _rounds(self) -> Iterator[Event]:
        for item in [*self.history.book.rounds, *self.history.book.extra]:
            yield Event(item.written, self._round(item))
            yield from self._afterthoughts(item)

    def _round(self, item: Round) -> Callable[[], None]:
        def do() -> None:
            entry = [rows.reading(row, row.replaced or None) for row in item.rows]
            received = {"shift": item.shift, "lines": [rows.sent(row) for row in item.rows]}
            kind = "round" if item.shift else "line"
            by = "paula" if item.paper else self.operator(item)
            device = "office" if item.paper else "tablet"
            self.append(f"round {item.at.isoformat()}", kind, received, list(entry), by, item.written, device)

        return do

    def _afterthoughts(self, item: Round) -> Iterator[Event]:
        """Corrections and settlements of what was written in a round."""
        for row in item.rows:
            if row.replaced:
                later = item.written + dt.timedelta(minutes=30)
                new = rows.reading(row)

                def correct(row: Any = row, new: Reading = new, later: dt.datetime = later) -> None:
                    old = self._reading(row)
                    entry = readings.correction(old=old, new=new, reason=row.note)
                    name = f"correction {row.at.isoformat()} {row.site} {row.parameter}"
                    self.append(name, "correction", rows.sent(row), list(entry), self.operator(item), later, "tablet")

                yield Event(later, correct)
            elif rows.doubtful(row):
                later = item.written + dt.timedelta(hours=3)
                if later > self.history.until - dt.timedelta(days=_NEVER_SETTLED_DAYS):
                    continue

                def settle(row: Any = row, later: dt.datetime = later) -> None:
                    entry = readings.settlement(
                        book=self.book,
                        reading=self._reading(row),
                        decision=Settlement.Decision.SET_ASIDE,
                        reason=_SETTLED,
                    )
                    name = f"settlement {row.at.isoformat()} {row.site} {row.parameter}"
                    self.append(name, "settlement", {"reason": _SETTLED}, list(entry), "paula", later, "office")

                yield Event(later, settle)

    def _reading(self, row: Any) -> Reading:
        return Reading.objects.filter(book=self.book, site=row.site, parameter=row.parameter, taken_at=row.at).as_known().get()

    def _loads(self) -> Iterator[Event]:
        for booked in self.history.book.loads:
            if booked.written is None:
                continue
            yield Event(booked.written, self._load(booked))
            if booked.first_kg is not None:
                later = booked.written + dt.timedelta(hours=23)
                yield Event(later, self._rebooking(booked, later))

    def _load(self, booked: Booked) -> Callable[[], None]:
        def do() -> None:
            row = rows.delivery(self.history, booked, booked.first_kg or booked.kg)
            late = booked.written is not None and booked.written - booked.at > dt.timedelta(hours=12)
            by = "paula" if late else "nora"
            name = f"load {booked.load.lot}"
            self.append(name, "line", rows.sent_delivery(row), [row], by, booked.written or booked.at, "tablet")

        return do

    def _rebooking(self, booked: Booked, at: dt.datetime) -> Callable[[], None]:
        def do() -> None:
            lot = booked.load.lot
            old = Delivery.objects.filter(book=self.book, lot=lot, vessel=booked.load.vessel).as_known().get()
            right = rows.delivery(self.history, booked, booked.kg)
            reason = f"booked as {booked.first_kg:g} kg; the weighbridge ticket says {booked.kg:g} kg"
            entry = [*stock.reversal(old=old, reason=reason), right]
            self.append(f"rebooking {lot}", "correction", rows.sent_delivery(right), entry, "paula", at, "office")

        return do

    def _move(self, moved: Moved) -> Callable[[], None]:
        def do() -> None:
            row = rows.transfer(moved)
            received = {"timestamp": row.taken_at, "from": row.from_vessel, "to": row.to_vessel, "quantity": row.quantity}
            at = moved.at + dt.timedelta(minutes=6)
            self.append(f"move {moved.move.to_vessel} {moved.at.isoformat()}", "line", received, [row], "nora", at, "tablet")

        return do

    def _settings(self) -> Iterator[Event]:
        for effective, point, dose in self.history.designs():
            if effective > self.history.grid.start:
                at = effective - dt.timedelta(hours=17)
                reason = "restated: mean need of the last fortnight"
                yield Event(at, self._state("design_dose", point, {"dose_mg_per_L": dose}, effective, reason, at))
        for incident in self.history.incidents:
            if incident.what == "out_of_service":
                for at, word in zip(self.history.span(incident), ("off", "in_service"), strict=True):
                    subject = f"dosing_point:{incident.subject}"
                    yield Event(at, self._state("state", subject, {"is": word}, at, incident.words, at))

    def _state(
        self, kind: str, subject: str, value: dict[str, Any], effective: dt.datetime, reason: str, at: dt.datetime
    ) -> Callable[[], None]:
        def do() -> None:
            works.state(
                book=self.book,
                kind=kind,
                subject=subject,
                value=value,
                effective_from=effective,
                reason=reason,
                by=self.cast["paula"],
                now=at,
            )

        return do


def _opening(history: Simulated) -> str:
    """The first design doses and what the tanks held, for the first works file."""
    found = works_file.dated(history)
    count = len(history.histories)
    first = {
        "design_dose": [block for block in found["design_dose"] if block["reason"] == "commissioning"][:count],
        "opening_stock": found["opening_stock"],
    }
    return "\n".join(works_file.written(f"[[{kind}]]", item) + "\n" for kind, items in first.items() for item in items)


def replay(demo: Demo, *, progress: Callable[[str], None], each_day: Callable[[dt.date, dt.datetime], None]) -> None:
    """Writes everything into the book, a week to a transaction.

    ``each_day`` is called with every operating day once what closes it is in, and the moment to act at.
    """
    history, calendar = demo.history, demo.calendar
    waiting = demo.events()
    days = [history.grid.date(number) for number in range(history.grid.days)]
    position = 0
    for first in range(0, len(days), 7):
        with transaction.atomic():
            for day in days[first : first + 7]:
                close = calendar.start_of(day + dt.timedelta(days=1)) + dt.timedelta(minutes=55)
                while position < len(waiting) and waiting[position].at < close:
                    waiting[position].do()
                    position += 1
                if close <= history.until:
                    each_day(day, close)
        if first % 56 == 0:
            progress(f"{days[first]:%B %Y}")
    with transaction.atomic():
        for event in waiting[position:]:
            event.do()
