"""The run: one quantity over time, with what was designed, what is needed, its limits, and what happened."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from plant import scene
from plant.scene import numbers

TOP, AXIS_H, FLAG_H = 26.0, 28.0, 26.0
LEFT = 52.0


@dataclass(frozen=True)
class Point:
    """One value of the line; ``value`` None is a gap. ``level`` marks a value outside a limit. ``hollow``: weak."""

    at: dt.datetime
    value: float | None
    hollow: bool = False
    level: str = ""
    note: str = ""


@dataclass(frozen=True)
class Band:
    """A stretch of the designed area: from, to, low, high."""

    start: dt.datetime
    end: dt.datetime
    low: float
    high: float


@dataclass(frozen=True)
class Limit:
    """A named line across the picture."""

    value: float
    name: str
    level: str


@dataclass(frozen=True)
class Flag:
    """Something that happened: a change of setting, a delivery, a correction, a deviation. Opens where ``href`` is given."""

    at: dt.datetime
    words: str
    role: str = "quiet"
    href: str = ""


@dataclass(frozen=True)
class _Frame:
    """From values to places in the picture."""

    start: dt.datetime
    end: dt.datetime
    low: float
    high: float
    x0: float
    x1: float
    y0: float
    y1: float

    def x(self, at: dt.datetime) -> float:
        share = (at - self.start) / (self.end - self.start)
        return self.x0 + (self.x1 - self.x0) * min(max(share, 0.0), 1.0)

    def y(self, value: float) -> float:
        share = (value - self.low) / (self.high - self.low)
        return self.y1 - (self.y1 - self.y0) * min(max(share, 0.0), 1.0)


def run(
    *,
    title: str,
    quantity: str,
    unit: str,
    points: Sequence[Point],
    start: dt.datetime,
    end: dt.datetime,
    bands: Sequence[Band] = (),
    need: Sequence[Point] = (),
    limits: Sequence[Limit] = (),
    flags: Sequence[Flag] = (),
    longest_step: dt.timedelta | None = None,
    width: float = 800,
    height: float = 300,
    dated: bool = False,
) -> scene.Scene:
    """The picture of one quantity from ``start`` to ``end``; times are local, with their zone.

    A point without a value breaks the line, and so does a step longer than ``longest_step``: a gap stays a gap. Values
    outside a limit carry its mark. Limits that lie far outside the values are named in the summary and not drawn.
    ``dated``: a value stands for a day, so that the hour of its place is not read out.
    """
    low, high = _reach(points, need, bands, limits)
    bottom = height - AXIS_H - (FLAG_H if flags else 0)
    frame = _Frame(start, end, low, high, LEFT, width - 8, TOP, bottom)
    drawn = [limit for limit in limits if low <= limit.value <= high]
    shapes: list[scene.Shape] = [scene.Text(0, 14, f"{quantity}, {unit}" if unit else quantity, "quiet")]
    shapes += _bands(frame, bands)
    shapes += _grid(frame, bottom)
    shapes += _limits(frame, drawn)
    shapes += _line(frame, need, longest_step, "need", 1.6, (5, 4))
    shapes += _line(frame, points, longest_step, "water", 2)
    shapes += _dots(frame, points, longest_step)
    shapes += _flags(frame, flags, height - FLAG_H)
    return scene.Scene(
        width,
        height,
        title,
        _summary(quantity, unit, points, start, end, limits, flags),
        tuple(shapes),
        _cursor(frame, points, unit, dated),
    )


def _reach(
    points: Sequence[Point], need: Sequence[Point], bands: Sequence[Band], limits: Sequence[Limit]
) -> tuple[float, float]:
    """Lowest and highest value of the scale: all that is drawn, limits only where they are near."""
    found = [one.value for one in (*points, *need) if one.value is not None]
    found += [edge for band in bands for edge in (band.low, band.high)]
    if not found:
        found = [limit.value for limit in limits] or [0.0, 1.0]
    low, high = min(found), max(found)
    span = (high - low) or abs(high) or 1.0
    near = [one.value for one in limits if low - span <= one.value <= high + span]
    low, high = min([low, *near]), max([high, *near])
    span = (high - low) or abs(high) or 1.0
    bottom = 0.0 if 0 <= low < 0.5 * span else low - 0.08 * span
    return bottom, high + 0.1 * span


def _grid(frame: _Frame, bottom: float) -> list[scene.Shape]:
    shapes: list[scene.Shape] = []
    steps = numbers.scale(frame.low, frame.high, 4)
    for step in steps:
        y = frame.y(step)
        shapes.append(scene.Line(frame.x0, y, frame.x1, y, stroke="line"))
        shapes.append(scene.Text(frame.x0 - 8, y + 5, numbers.tick(step, steps), "quiet", anchor="end"))
    shapes.append(scene.Line(frame.x0, bottom, frame.x1, bottom, stroke="edge"))
    last = -1e9
    for at, words in _ticks(frame.start, frame.end):
        x = frame.x(at)
        shapes.append(scene.Line(x, bottom, x, bottom + 6, stroke="edge"))
        half = numbers.width_of(words) / 2
        if x - half > last + 8 and x + half <= frame.x1 + 8:
            shapes.append(scene.Text(x, bottom + 21, words, "quiet", anchor="middle"))
            last = x + half
    return shapes


def _ticks(start: dt.datetime, end: dt.datetime) -> list[tuple[dt.datetime, str]]:
    """Round local times: hours of a day, days of a month, Mondays of a season, months of a year."""
    days = (end - start) / dt.timedelta(days=1)
    midnight = start.replace(hour=0, minute=0, second=0, microsecond=0)
    out: list[tuple[dt.datetime, str]] = []
    if days <= 3:
        for hour in range(0, int(days + 2) * 24, 6):
            at = midnight + dt.timedelta(hours=hour)
            out.append((at, f"{at:%H:%M}" if at.hour else f"{at.day} {at:%b}"))
    else:
        for number in range(int(days) + 2):
            at = midnight + dt.timedelta(days=number)
            if days <= 12 or (days <= 120 and at.weekday() == 0) or (days > 120 and at.day == 1):
                out.append((at, f"{at:%b %Y}" if days > 120 and at.month == 1 else _day(at, months=days > 120)))
    return [(at, words) for at, words in out if start <= at <= end]


def _day(at: dt.datetime, *, months: bool = False) -> str:
    return f"{at:%b}" if months else f"{at.day} {at:%b}"


def _bands(frame: _Frame, bands: Sequence[Band]) -> list[scene.Shape]:
    shapes: list[scene.Shape] = []
    for band in bands:
        left, right = frame.x(band.start), frame.x(band.end)
        top, foot = frame.y(band.high), frame.y(band.low)
        if right > left:
            shapes.append(scene.Rect(left, top, right - left, max(foot - top, 2), fill="band"))
    return shapes


def _limits(frame: _Frame, limits: Sequence[Limit]) -> list[scene.Shape]:
    shapes: list[scene.Shape] = []
    taken: list[float] = []
    for limit in sorted(limits, key=lambda one: -one.value):
        y = frame.y(limit.value)
        role = limit.level if limit.level in scene.ROLES else "quiet"
        shapes.append(scene.Line(frame.x0, y, frame.x1, y, stroke=role, width=1.5, dash=(8, 3)))
        label = y - 5 if all(abs(y - 5 - other) > 15 for other in taken) else y + 16
        taken.append(label)
        shapes.append(scene.Text(frame.x1 - 4, label, limit.name, role, anchor="end"))
    return shapes


def _stretches(points: Sequence[Point], longest_step: dt.timedelta | None) -> list[list[Point]]:
    """The line's unbroken pieces."""
    pieces: list[list[Point]] = [[]]
    for point in points:
        if point.value is None:
            pieces.append([])
            continue
        if pieces[-1] and longest_step is not None and point.at - pieces[-1][-1].at > longest_step:
            pieces.append([])
        pieces[-1].append(point)
    return [piece for piece in pieces if piece]


def _line(
    frame: _Frame,
    points: Sequence[Point],
    longest_step: dt.timedelta | None,
    role: str,
    width: float,
    dash: tuple[float, ...] = (),
) -> list[scene.Shape]:
    shapes: list[scene.Shape] = []
    for piece in _stretches(points, longest_step):
        places = tuple((frame.x(one.at), frame.y(one.value)) for one in piece if one.value is not None)
        if len(places) > 1:
            shapes.append(scene.Poly(places, stroke=role, width=width, dash=dash))
        else:
            (x, y) = places[0]
            shapes.append(scene.Circle(x, y, 2, fill=role))
    return shapes


def _dots(frame: _Frame, points: Sequence[Point], longest_step: dt.timedelta | None) -> list[scene.Shape]:
    """Marks on values outside a limit, hollow dots on weak ones, a dot on the last."""
    shapes: list[scene.Shape] = []
    valued = [one for one in points if one.value is not None]
    for one in valued:
        assert one.value is not None
        x, y = frame.x(one.at), frame.y(one.value)
        if one.level:
            shapes += scene.mark(one.level, x, y)
        elif one.hollow:
            shapes.append(scene.Circle(x, y, 3.5, fill="card", stroke="water", width=1.5))
        elif one is valued[-1]:
            shapes.append(scene.Circle(x, y, 4.5, fill="water"))
    return shapes


def _flags(frame: _Frame, flags: Sequence[Flag], y: float) -> list[scene.Shape]:
    shapes: list[scene.Shape] = []
    for flag in flags:
        x = frame.x(flag.at)
        pole = scene.Line(x, y + 2, x, y + 24, stroke=flag.role, width=2)
        cloth = scene.Poly(((x, y + 2), (x + 11, y + 7), (x, y + 12)), fill=flag.role, closed=True)
        # Invisible, so that a finger need not hit the thin pole.
        target = scene.Rect(x - 8, y, 24, 26)
        words = f"{flag.at.day} {flag.at:%b}: {flag.words}"
        shapes.append(scene.Group((target, pole, cloth), title=words, href=flag.href))
    return shapes


def _cursor(frame: _Frame, points: Sequence[Point], unit: str, dated: bool) -> tuple[scene.Reach, ...]:
    out = []
    for one in points:
        words = "not known" if one.value is None else f"{numbers.tidy(one.value)} {unit}".rstrip()
        clock = "" if dated or (one.at.hour, one.at.minute) == (0, 0) else f" {one.at:%H:%M}"
        note = f", {one.note}" if one.note else ""
        y = None if one.value is None else frame.y(one.value)
        out.append(scene.Reach(frame.x(one.at), y, f"{one.at.day} {one.at:%b %Y}{clock}: {words}{note}"))
    return tuple(out)


def _summary(
    quantity: str,
    unit: str,
    points: Sequence[Point],
    start: dt.datetime,
    end: dt.datetime,
    limits: Sequence[Limit],
    flags: Sequence[Flag],
) -> str:
    """What the picture shows, in words, for those who do not see it."""
    valued = [one for one in points if one.value is not None]
    head = f"{quantity} from {_long(start)} to {_long(end)}"
    if not valued:
        return f"{head}: no value is known."
    lowest = min(valued, key=lambda one: one.value or 0.0)
    highest = max(valued, key=lambda one: one.value or 0.0)
    parts = [
        f"{head}: {len(valued)} of {len(points)} values known",
        f"lowest {numbers.tidy(lowest.value or 0.0)} {unit} on {_long(lowest.at)}",
        f"highest {numbers.tidy(highest.value or 0.0)} {unit} on {_long(highest.at)}",
        f"last {numbers.tidy(valued[-1].value or 0.0)} {unit} on {_long(valued[-1].at)}",
    ]
    outside = sum(1 for one in valued if one.level)
    if limits or outside:
        parts.append(f"{outside} outside a limit")
    parts += [f"{limit.name} at {numbers.tidy(limit.value)} {unit}" for limit in limits]
    if flags:
        parts.append(f"{len(flags)} events marked")
    return "; ".join(parts) + "."


def _long(at: dt.datetime) -> str:
    return f"{at.day} {at:%B %Y}"
