"""Pictures as plain shapes, drawn once and painted twice: as SVG on screen (svg.py) and by the report's writer on paper.

A scene holds shapes in units of one CSS pixel, x to the right and y *down* from the upper left corner (a painter for paper
flips y). Colours are never named here: ``fill`` and ``stroke`` hold roles, which the style sheet and the report turn into
colours of day, night or paper:

    ink quiet line edge water band need alert action regulatory settled card paper none

Angles, transforms, gradients and clipping do not occur, so that any painter is a page of code. Text sits on its
baseline; its width is for the painter's font to say, so nothing here relies on it by more than a rough estimate.
"""

from __future__ import annotations

from dataclasses import dataclass

ROLES = frozenset({
    "ink", "quiet", "line", "edge", "water", "band", "need", "alert", "action", "regulatory", "settled", "card",
    "paper", "none",
})  # fmt: skip
LEVELS = ("target", "alert", "action", "regulatory")


@dataclass(frozen=True)
class Text:
    """Words on a baseline; ``anchor`` is start, middle or end."""

    x: float
    y: float
    words: str
    fill: str = "ink"
    size: float = 14
    anchor: str = "start"
    bold: bool = False


@dataclass(frozen=True)
class Line:
    x1: float
    y1: float
    x2: float
    y2: float
    stroke: str = "line"
    width: float = 1
    dash: tuple[float, ...] = ()


@dataclass(frozen=True)
class Poly:
    """Straight lines through the points; an area where ``closed``."""

    points: tuple[tuple[float, float], ...]
    fill: str = "none"
    stroke: str = "none"
    width: float = 1
    closed: bool = False
    dash: tuple[float, ...] = ()


@dataclass(frozen=True)
class Rect:
    x: float
    y: float
    w: float
    h: float
    fill: str = "none"
    stroke: str = "none"
    width: float = 1
    dash: tuple[float, ...] = ()
    radius: float = 0


@dataclass(frozen=True)
class Circle:
    x: float
    y: float
    r: float
    fill: str = "none"
    stroke: str = "none"
    width: float = 1
    dash: tuple[float, ...] = ()


@dataclass(frozen=True)
class Group:
    """Shapes that belong together; on screen a link when ``href`` is given. Paper paints the shapes."""

    shapes: tuple[Shape, ...]
    title: str = ""
    href: str = ""


Shape = Text | Line | Poly | Rect | Circle | Group


@dataclass(frozen=True)
class Reach:
    """Where a cursor may stop: x, y (None in a gap), and the words it reads out."""

    x: float
    y: float | None
    words: str


@dataclass(frozen=True)
class Scene:
    """A picture. ``title`` names it; ``summary`` says in a sentence or two what can be seen in it."""

    width: float
    height: float
    title: str
    summary: str
    shapes: tuple[Shape, ...]
    cursor: tuple[Reach, ...] = ()


def mark(level: str, x: float, y: float, r: float = 6) -> tuple[Shape, ...]:
    """A level's mark about (x, y): alert a half-filled circle, action a filled diamond, regulatory a square with a bar over it.

    They differ in shape and fill, so that they can be told apart in grey. ``target`` is an empty circle.
    """
    if level == "alert":
        half = tuple((x + r * c, y + r * s) for c, s in _RIGHT_HALF)
        return (
            Circle(x, y, r, fill="card", stroke="alert", width=1.8),
            Poly(half, fill="alert", closed=True),
        )
    if level == "action":
        d = r * 1.2
        return (Poly(((x, y - d), (x + d, y), (x, y + d), (x - d, y)), fill="action", closed=True),)
    if level == "regulatory":
        return (
            Rect(x - 0.8 * r, y - 0.35 * r, 1.6 * r, 1.5 * r, fill="regulatory"),
            Rect(x - 1.05 * r, y - 1.1 * r, 2.1 * r, 0.4 * r, fill="regulatory"),
        )
    return (Circle(x, y, r, fill="card", stroke="quiet", width=1.8),)


# Points of a half circle from top to bottom over the right, in steps of 22.5 degrees (cosine, sine).
_RIGHT_HALF = (
    (0.0, -1.0), (0.3827, -0.9239), (0.7071, -0.7071), (0.9239, -0.3827), (1.0, 0.0), (0.9239, 0.3827),
    (0.7071, 0.7071), (0.3827, 0.9239), (0.0, 1.0),
)  # fmt: skip
