"""Cells of a delivery or transfer line read one by one; what doesn't fit is refused by the name of its column."""

from __future__ import annotations

import datetime as dt

from plant.intake import ground as grounds
from plant.intake import moments, numbers
from plant.intake.lines import Refusal


class Unreadable(ValueError):
    """A cell that can't be taken: its column, what was read, what was expected."""

    def __init__(self, column: str, read: str, expected: str) -> None:
        super().__init__(f"{column}: read {read}; expected {expected}")
        self.column, self.read, self.expected = column, read, expected

    def refusal(self, line: int) -> Refusal:
        return Refusal(line, self.read, self.expected, field=self.column)


class Cells:
    """The cells of one line, by column."""

    def __init__(self, cells: dict[str, str], ground: grounds.Ground) -> None:
        self._cells = cells
        self._ground = ground

    def text(self, column: str, most: int) -> str:
        found = self._cells.get(column, "").strip()
        if len(found) > most or "\x00" in found:
            raise Unreadable(column, f"{column} of {len(found)} characters", f"at most {most} characters")
        return found

    def moment(self, column: str) -> moments.Moment:
        typed = self._cells.get(column, "")
        try:
            return self._ground.moment(typed)
        except moments.NotATime as problem:
            raise Unreadable(column, f"{column} {typed.strip()!r}", problem.expected) from None

    def date(self, column: str) -> dt.date | None:
        found = self.text(column, 40)
        if not found:
            return None
        try:
            return dt.date.fromisoformat(found)
        except ValueError:
            raise Unreadable(column, f"{column} {found!r}", "a date such as 2026-03-01") from None

    def number(self, column: str, *, low: float = 0.0, high: float | None = None, above: bool = False) -> float | None:
        """A number within bounds, or None for an empty cell. ``above``: the lower bound itself is too low."""
        found = self.text(column, 80)
        try:
            number = numbers.read(found, decimal=self._ground.decimal)
        except numbers.NotANumber as problem:
            raise Unreadable(column, f"{column} {found!r}", problem.expected) from None
        if number is None:
            return None
        bounds = f"{'above' if above else 'at least'} {low:g}" + (f" and at most {high:g}" if high is not None else "")
        if not isinstance(number, numbers.Number) or number.qualifier:
            raise Unreadable(column, f"{column} {found!r}", f"a number {bounds}")
        value = float(number.text)
        if value < low or (above and value == low) or (high is not None and value > high):
            raise Unreadable(column, f"{column} {found!r}", f"a number {bounds}")
        return value

    def needed(self, column: str, **bounds: float | bool) -> float:
        found = self.number(column, **bounds)  # type: ignore[arg-type]
        if found is None:
            raise Unreadable(column, f"no {column}", "a number")
        return found

    def choice(self, column: str, choices: tuple[str, ...], default: str = "") -> str:
        found = self.text(column, 60) or default
        if found and found not in choices:
            raise Unreadable(column, f"{column} {found!r}", "one of: " + ", ".join(choices))
        return found

    def code(self, column: str, kind: str, at: dt.datetime) -> str:
        """The code of a vessel or product that is stated."""
        found = self._ground.site(self._cells.get(column, ""))
        if self._ground.value(kind, found, at) is None:
            raise Unreadable(column, f"{column} {found!r}", f"the code of a {kind} of this works")
        return found
