"""The order window: from the first day on which a whole load fits to the last before the reserve is reached."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from plant import scene

ROW_H = 34.0
HEAD_H = 28.0


@dataclass(frozen=True)
class Window:
    """One product: first and last day on which to order, both None where it cannot be worked out.

    ``late``: no load ordered today comes in time. No ``first``, or one after ``last``: no whole load fits in time.
    """

    name: str
    first: dt.date | None
    last: dt.date | None
    late: bool = False

    @property
    def known(self) -> bool:
        return self.late or self.first is not None or self.last is not None

    @property
    def fits(self) -> bool:
        """Whether there is a day on which a whole load can be ordered that fits and comes in time."""
        return not self.late and self.first is not None and self.last is not None and self.first <= self.last


def order_window(*, title: str, rows: Sequence[Window], today: dt.date, days: int = 42, width: float = 760) -> scene.Scene:
    """A bar for each product on one calendar line that starts today. A window that has passed is said in words."""
    # Where there is no room beside the bars, the names stand over them.
    narrow = width < 600
    row_h = ROW_H + (22.0 if narrow else 0.0)
    x0, x1 = (0.0 if narrow else 240.0), width - 8
    height = HEAD_H + row_h * len(rows) + 6

    def x(day: dt.date) -> float:
        return x0 + (x1 - x0) * min(max((day - today).days, 0), days) / days

    shapes: list[scene.Shape] = []
    for number in range(0, days + 1, 7):
        day = today + dt.timedelta(days=number)
        shapes.append(scene.Line(x(day), HEAD_H - 6, x(day), height, stroke="line" if number else "edge"))
        if (number < days and (x1 - x0) / days * 7 > 46) or number % 14 == 0:
            words = "today" if number == 0 else f"{day.day} {day:%b}"
            anchor = "start" if number == 0 else "end" if number == days else "middle"
            shapes.append(scene.Text(x(day), 14, words, "quiet", anchor=anchor))
    said = []
    for index, row in enumerate(rows):
        y = HEAD_H + index * row_h + 6 + (22 if narrow else 0)
        shapes.append(scene.Text(0, y - 6 if narrow else y + 15, row.name))
        said.append(f"{row.name}: {words_of(row, today)}")
        if not row.known:
            shapes.append(scene.Text(x0 + 8, y + 15, "not known", "quiet"))
        elif row.late:
            shapes += scene.mark("action", x0 + 8, y + 10)
            shapes.append(scene.Text(x0 + 22, y + 15, "order at once: the reserve will be touched", "action"))
        elif row.first is None or row.last is None or row.first > row.last:
            shapes += scene.mark("alert", x0 + 8, y + 10)
            shapes.append(scene.Text(x0 + 22, y + 15, "no whole load fits in time", "alert"))
        else:
            left = x(row.first)
            right = max(x(row.last + dt.timedelta(days=1)), left + 6)
            shapes.append(scene.Rect(left, y, right - left, 20, fill="band", stroke="water", width=1.5, radius=3))
    return scene.Scene(width, height, title, "; ".join(said) + ".", tuple(shapes))


def words_of(row: Window, today: dt.date) -> str:
    """The window in words."""
    if not row.known:
        return "not known"
    if row.late:
        return "order at once: the reserve will be touched"
    if row.first is None or row.last is None or row.first > row.last:
        return "no whole load fits in time"
    if row.first <= today:
        return f"from today to {_day(row.last)}"
    return f"from {_day(row.first)} to {_day(row.last)}"


def _day(day: dt.date) -> str:
    return f"{day.day} {day:%B}"
