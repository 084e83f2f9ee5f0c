"""Reads a works file, compares it with what is stated, and states the difference.

``plan`` looks without writing (the page's preview); ``load`` writes one entry, or nothing where nothing
differs. A block is compared with the statement of the same subject and the same effective_from. A block
without one holds from the beginning at the first load, later from the moment asked for; there it is compared
with what is in force.
"""

from __future__ import annotations

import datetime as dt
import tomllib
from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import Decimal
from typing import Any
from zoneinfo import ZoneInfo

from django.contrib.auth import get_user_model
from django.db import transaction

from plant import clock
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry
from plant.works import actions, blocks, keys, kinds, queries
from plant.works.stated import NotStated, Stated

MOST_BYTES = 2 * 1024 * 1024
MOST_BLOCKS = 5000
_DEEPEST_KEY = 16
_FILE_KINDS = tuple(kind.name for kind in kinds.ALL if kind.name != "membership")


class FileRefused(ValueError):
    """A works file that can't be loaded; ``messages`` says all that is wrong. Nothing has been written."""

    def __init__(self, messages: list[str]) -> None:
        self.messages = messages
        super().__init__("\n".join(messages))


@dataclass(frozen=True)
class Plan:
    """What a works file would change. ``changes`` are in the order of the file."""

    code: str
    book: Book | None
    changes: list[actions.Change]
    unchanged: int
    names: list[str] = field(default_factory=list)
    before: list[dict[str, Any] | None] = field(default_factory=list)


@dataclass(frozen=True)
class Loaded:
    """What loading did. ``entry`` is None where nothing differed."""

    book: Book
    entry: Entry | None
    stated: int
    unchanged: int
    new_book: bool


@dataclass(frozen=True)
class _Block:
    kind: str
    number: int
    table: dict[str, Any]
    alone: bool = False

    @property
    def name(self) -> str:
        if self.alone:
            return f"[{self.kind}]"
        code = next((str(self.table[key]) for key in kinds.KINDS[self.kind].names if key in self.table), "")
        return f"[[{self.kind}]] number {self.number}" + (f" ({code[:60]})" if code else "")


def plan(*, data: bytes, now: dt.datetime, effective_from: dt.datetime | str | None = None) -> Plan:
    """What the file would change, checked in full. Raises FileRefused."""
    found = _blocks(read(data))
    head = _head(found)
    code = str(head["code"])
    book = Book.objects.filter(code=code).first()
    stated = queries.stated(book) if book else Stated([])
    return _compare(found, code, book, stated, _calendar(head, stated, now), now, effective_from)


def load(
    *,
    data: bytes,
    by: Any,
    now: dt.datetime,
    effective_from: dt.datetime | str | None = None,
    reason: str = "",
    source: str = "",
) -> Loaded:
    """States what the file says and is not stated yet, as one entry; opens the book where there is none.

    ``source`` names the file in the entry. Raises FileRefused; then nothing has been written.
    """
    with transaction.atomic():
        planned = plan(data=data, now=now, effective_from=effective_from)
        if planned.book is not None:
            actions.hold(planned.book)
            planned = plan(data=data, now=now, effective_from=effective_from)
        if not planned.changes and planned.book is not None:
            return Loaded(planned.book, None, 0, planned.unchanged, False)
        new = planned.book is None
        book = planned.book or ledger.open_book(code=planned.code, now=now)
        entry, rows = actions.state_many(
            book=book,
            changes=planned.changes,
            by=by,
            now=now,
            entry_kind="works_file",
            received={"file": source, "text": data.decode("utf-8-sig")},
            reason=reason or (f"loaded from {source}" if source else "loaded from a works file"),
        )
        if new:
            _first_members(book, by, now)
        return Loaded(book, entry, len(rows), planned.unchanged, new)


def _first_members(book: Book, by: Any, now: dt.datetime) -> None:
    """A new works belongs to whoever opened it, or to the installation's first administrators."""
    openers = [by] if by is not None else get_user_model().objects.filter(is_superuser=True).order_by("pk")
    for person in openers:
        actions.set_membership(
            book=book,
            username=person.get_username(),
            role="administrator",
            by=by,
            now=now,
            reason="opened the works",
        )


def whose(data: bytes) -> tuple[str, clock.Calendar]:
    """The code of the works a file describes, and the calendar of the file. Raises FileRefused."""
    head = _head(_blocks(read(data)))
    return str(head["code"]), _calendar(head, Stated([]), clock.BEGINNING)


def read(data: bytes) -> dict[str, Any]:
    """The file as TOML; numbers with a point come as decimals. Raises FileRefused."""
    if len(data) > MOST_BYTES:
        raise FileRefused([f"the file has {len(data):,} bytes; expected at most {MOST_BYTES:,}"])
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as problem:
        line = data[: problem.start].count(b"\n") + 1
        raise FileRefused([f"line {line}: the file is not UTF-8; save it again as UTF-8"]) from None
    if not text.strip():
        raise FileRefused(["the file is empty; expected a works file with a [works] block"])
    _refuse_deep_keys(text)
    try:
        return tomllib.loads(text.replace("\r\n", "\n"), parse_float=Decimal)
    except RecursionError:
        raise FileRefused(["the file nests lists or tables too deeply"]) from None
    except ValueError as problem:
        raise FileRefused([f"the file is not TOML: {problem}"]) from None


def _refuse_deep_keys(text: str) -> None:
    # A dotted key of thousands of parts takes the parser time that grows with its square.
    run = 0
    for piece in text.split("."):
        bare = piece.strip(" \t").replace("-", "").replace("_", "").replace('"', "").replace("'", "")
        run = run + 1 if bare.isalnum() else 0
        if run > _DEEPEST_KEY:
            raise FileRefused([f"the file has a key of more than {_DEEPEST_KEY} parts"])


def _blocks(found: dict[str, Any]) -> list[_Block]:
    problems = []
    out = []
    for name, value in found.items():
        if name not in _FILE_KINDS:
            problems.append(f"unknown block {name!r}; known: {', '.join(_FILE_KINDS)}")
        elif isinstance(value, dict):
            out.append(_Block(name, 1, value, alone=True))
        elif isinstance(value, list) and all(isinstance(item, dict) for item in value):
            out += [_Block(name, number, item) for number, item in enumerate(value, start=1)]
        else:
            problems.append(f"{name}: expected a block, written [[{name}]]")
    if len(out) > MOST_BLOCKS:
        problems.append(f"the file has {len(out):,} blocks; expected at most {MOST_BLOCKS:,}")
    if problems:
        raise FileRefused(problems)
    return out


def _head(found: list[_Block]) -> dict[str, Any]:
    heads = [block for block in found if block.kind == "works"]
    if len(heads) != 1:
        raise FileRefused([f"expected one [works] block, found {len(heads)}"])
    code = heads[0].table.get("code")
    if not isinstance(code, str):
        raise FileRefused(["[works]: key code is missing: expected a short name in quotes"])
    return heads[0].table


def _calendar(head: dict[str, Any], stated: Stated, now: dt.datetime) -> clock.Calendar:
    """The calendar local times of the file are read by: the file's own, if it is one at all."""
    zone = kinds.Key("timezone", "timezone")
    starts = kinds.Key("operating_day_starts", "time")
    clean = keys.read_keys([zone, starts], head, [])
    if "timezone" in clean:
        day_starts = dt.time.fromisoformat(clean.get("operating_day_starts", "00:00"))
        return clock.Calendar(ZoneInfo(clean["timezone"]), day_starts)
    try:
        return stated.calendar(now)
    except NotStated:
        return clock.Calendar(ZoneInfo("UTC"))


def _compare(
    found: list[_Block],
    code: str,
    book: Book | None,
    stated: Stated,
    calendar: clock.Calendar,
    now: dt.datetime,
    effective_from: dt.datetime | str | None,
) -> Plan:
    problems: list[str] = []
    first_load = not stated.subjects("works")
    default = clock.BEGINNING if first_load else now
    if effective_from is not None:
        try:
            default = _moment(effective_from, calendar)
        except ValueError as problem:
            raise FileRefused([f"effective from: {problem}"]) from None
    changes: list[actions.Change] = []
    names: list[str] = []
    before: list[dict[str, Any] | None] = []
    seen: dict[tuple[str, str, dt.datetime], actions.Change] = {}
    dated = set(_dated_subjects(found, code))
    places = _Places(stated, now)
    unchanged = 0
    for block in found:
        try:
            change, explicit = _change(block, code, calendar, default, dated)
        except blocks.BlockError as problem:
            problems += [f"{block.name}: {message}" for message in problem.messages]
            continue
        if block.kind == "round_line" and not change.withdrawn:
            places.place(change)
        key = (change.kind, change.subject, change.effective_from)
        if key in seen:
            if (seen[key].value, seen[key].withdrawn) != (change.value, change.withdrawn):
                problems.append(f"{block.name}: the file states this twice, differently, for the same moment")
            continue
        seen[key] = change
        if _holds_already(stated, change, explicit):
            unchanged += 1
            continue
        changes.append(change)
        names.append(block.name)
        before.append(stated.value(change.kind, change.subject, change.effective_from))
    if problems:
        # A block left out for its own fault would make faults of all that refer to it.
        raise FileRefused(problems)
    try:
        changes = actions.checked(stated, changes)
    except actions.Refused as refused:
        problems += [f"{names[index]}: {message}" if index < len(names) else message for index, message in refused.problems]
    if problems:
        raise FileRefused(problems)
    return Plan(code, book, changes, unchanged, names, before)


def _dated_subjects(found: list[_Block], code: str) -> Iterator[tuple[str, str]]:
    """Subjects that have a block with a date of its own: their block without one is what held at first."""
    for block in found:
        if "effective_from" in block.table:
            try:
                yield block.kind, blocks.subject_of(block.kind, block.table, code)[0]
            except blocks.BlockError:
                continue


def _change(
    block: _Block, code: str, calendar: clock.Calendar, default: dt.datetime, dated: set[tuple[str, str]]
) -> tuple[actions.Change, bool]:
    """The change a block asks for, checked, and whether its moment is its own. Raises BlockError."""
    problems: list[str] = []
    subject, rest = blocks.subject_of(block.kind, block.table, code)
    withdrawn = rest.pop("withdrawn", False)
    if not isinstance(withdrawn, bool):
        problems.append(f"withdrawn: read {withdrawn!r}, expected true or false")
    reason = rest.pop("reason", "")
    if not isinstance(reason, str):
        problems.append(f"reason: read {reason!r}, expected text in quotes")
    explicit = "effective_from" in rest
    moment = clock.BEGINNING if not explicit and (block.kind, subject) in dated else default
    if explicit:
        try:
            moment = _moment(rest.pop("effective_from"), calendar)
        except ValueError as problem:
            problems.append(f"effective_from: {problem}")
    for key in kinds.KINDS[block.kind].keys:
        if key.holds == "moment" and key.name in rest:
            try:
                rest[key.name] = _moment(rest[key.name], calendar)
            except ValueError as problem:
                problems.append(f"{key.name}: {problem}")
    if block.kind == "opening_stock" and not explicit and isinstance(rest.get("timestamp"), dt.datetime):
        explicit, moment = True, rest["timestamp"]
    if block.kind == "limit":
        own_digits(rest)
    try:
        value = {} if withdrawn else blocks.check(block.kind, subject, rest)
    except blocks.BlockError as problem:
        problems += problem.messages
    if problems:
        raise blocks.BlockError(problems)
    return actions.Change(block.kind, subject, value, moment, withdrawn, reason), explicit


def own_digits(limit: dict[str, Any]) -> None:
    """A limit written 0.30 has two digits; the number alone would lose the second."""
    written = [limit[name] for name in ("low", "high", "limit") if isinstance(limit.get(name), Decimal | int)]
    if written and "decimals" not in limit:
        exponents = [Decimal(item).as_tuple().exponent for item in written]
        limit["decimals"] = min(6, max(0, *(-item for item in exponents if isinstance(item, int)), 0))


def _moment(value: Any, calendar: clock.Calendar) -> dt.datetime:
    """An instant from a TOML time, a date, or ISO text; local without an offset. Raises ValueError."""
    if isinstance(value, str):
        try:
            value = dt.datetime.fromisoformat(value)
        except ValueError:
            raise ValueError(f"read {value!r}, expected a time such as 2026-01-01T07:00:00") from None
    if isinstance(value, dt.datetime):
        return calendar.instant(value) if value.tzinfo is None else value.astimezone(dt.UTC)
    if isinstance(value, dt.date):
        return calendar.start_of(value)
    raise ValueError(f"read {value!r}, expected a time such as 2026-01-01T07:00:00")


def _holds_already(stated: Stated, change: actions.Change, explicit: bool) -> bool:
    chain = stated.history(change.kind, change.subject)
    same = [saying for saying in chain if saying.effective_from == change.effective_from]
    if same:
        return (same[-1].value, same[-1].withdrawn) == (change.value, change.withdrawn)
    if explicit:
        return False
    if change.withdrawn:
        return stated.value(change.kind, change.subject, change.effective_from) is None
    return stated.value(change.kind, change.subject, change.effective_from) == change.value


class _Places:
    """Walking order of round lines that don't state one: as they stand already, new ones behind the last."""

    def __init__(self, stated: Stated, now: dt.datetime) -> None:
        self._known = {subject: value.get("order", 0) for subject, value in stated.in_force("round_line", now)}
        self._last = max(self._known.values(), default=0)

    def place(self, change: actions.Change) -> None:
        if "order" not in change.value:
            if change.subject not in self._known:
                self._last += 10
                self._known[change.subject] = self._last
            change.value["order"] = self._known[change.subject]
