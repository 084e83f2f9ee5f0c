"""Pictures on paper: the same scenes as on screen, painted as vectors."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from reportlab.lib.colors import HexColor
from reportlab.platypus import Flowable, KeepTogether

from plant import scene
from plant.reports.pdf import faces, ink, words
from plant.reports.pdf.document import Picture
from plant.reports.pdf.tagged import Element, literal
from plant.scene import strip

PAPER = {
    "ink": ink.INK,
    "quiet": ink.QUIET,
    "line": ink.HAIR,
    "edge": ink.LINE,
    "water": ink.WATER,
    "band": ink.BAND,
    "need": HexColor("#7A4F00"),
    "alert": HexColor("#8A5200"),
    "action": HexColor("#B02A1B"),
    "regulatory": HexColor("#7B1E63"),
    "settled": HexColor("#2B6A4B"),
    "card": HexColor("#FFFFFF"),
    "paper": HexColor("#FFFFFF"),
}
SCALE = 0.62  # one pixel of a scene in points: text of 14 px comes to 8.7 pt
GAP = 16.0
WHOLE_ROWS = 3  # so many rows of scenes are not parted by a page


def scenes(picture: Picture) -> list[tuple[str, scene.Scene]]:
    """The scenes of a picture, each with the words to stand above it. Raises ValueError for a name nobody draws."""
    if picture.scene not in _MAKERS:
        raise ValueError(f"no scene is called {picture.scene!r}; known: {', '.join(_MAKERS)}")
    return _MAKERS[picture.scene](picture.facts)


def _strips(facts: dict[str, Any]) -> list[tuple[str, scene.Scene]]:
    return [(str(one["title"]), strip.dose_strip(**one)) for one in facts["strips"]]


_MAKERS: dict[str, Callable[[dict[str, Any]], list[tuple[str, scene.Scene]]]] = {"dose_strips": _strips}


def flowables(part: Element, picture: Picture, width: float) -> list[Flowable]:
    """The picture, its scenes side by side as far as the page is wide."""
    title = [words.words(part, picture.caption, "caption", tag="H3")] if picture.caption else []
    made = scenes(picture)
    across = max(1, int((width + GAP) // (max(one.width for _, one in made) * SCALE + GAP))) if made else 1
    rows = [PictureRow(part, made[first : first + across], width, across) for first in range(0, len(made), across)]
    if not rows:
        return [*title, words.words(part, picture.alt)]
    if len(rows) <= WHOLE_ROWS:
        return [KeepTogether([*title, *rows])]
    return [KeepTogether([*title, rows[0]]), *rows[1:]]


class PictureRow(Flowable):
    """Scenes side by side, each a figure with its summary as alternative text."""

    def __init__(self, part: Element, made: list[tuple[str, scene.Scene]], width: float, across: int) -> None:
        super().__init__()
        self.width = width
        self.each = (width - GAP * (across - 1)) / across
        self.made = made
        self.elements = [
            Element("Figure", part, f"/Alt {literal(f'{above}. {one.summary}' if above else one.summary)}")
            for above, one in made
        ]
        self.scale = min(SCALE, self.each / max(one.width for _, one in made))
        self.above = 12.0 if any(above for above, _ in made) else 0.0
        self.height = max(one.height for _, one in made) * self.scale + self.above + 4
        self.spaceAfter = 6

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        for number, ((above, one), element) in enumerate(zip(self.made, self.elements, strict=True)):
            canvas = self.canv
            left = number * (self.each + GAP)
            canvas.begin(element)
            canvas.saveState()
            if above:
                canvas.setFont(faces.SEMIBOLD, ink.SMALL)
                canvas.setFillColor(ink.INK)
                canvas.drawString(left, self.height - 9, above)
            canvas.translate(left, self.height - self.above)
            canvas.scale(self.scale, self.scale)
            for shape in one.shapes:
                _paint(canvas, shape)
            canvas.restoreState()
            canvas.end()


def _paint(canvas: Any, one: scene.Shape) -> None:
    """One shape on a canvas whose origin is the scene's upper left corner."""
    match one:
        case scene.Group():
            for inner in one.shapes:
                _paint(canvas, inner)
        case scene.Text():
            canvas.setFillColor(PAPER[one.fill])
            canvas.setFont(faces.SEMIBOLD if one.bold else faces.REGULAR, one.size)
            draw = {"start": canvas.drawString, "middle": canvas.drawCentredString, "end": canvas.drawRightString}[one.anchor]
            draw(one.x, -one.y, one.words)
        case scene.Line():
            _pen(canvas, one)
            canvas.line(one.x1, -one.y1, one.x2, -one.y2)
        case scene.Poly():
            path = canvas.beginPath()
            path.moveTo(one.points[0][0], -one.points[0][1])
            for x, y in one.points[1:]:
                path.lineTo(x, -y)
            if one.closed:
                path.close()
            canvas.drawPath(path, **_pen(canvas, one))
        case scene.Rect():
            if one.radius:
                canvas.roundRect(one.x, -one.y - one.h, one.w, one.h, one.radius, **_pen(canvas, one))
            else:
                canvas.rect(one.x, -one.y - one.h, one.w, one.h, **_pen(canvas, one))
        case scene.Circle():
            canvas.circle(one.x, -one.y, one.r, **_pen(canvas, one))


def _pen(canvas: Any, one: scene.Line | scene.Poly | scene.Rect | scene.Circle) -> dict[str, int]:
    """Sets colours, width and dash; says whether to stroke and to fill."""
    fill = getattr(one, "fill", "none")
    if fill != "none":
        canvas.setFillColor(PAPER[fill])
    if one.stroke != "none":
        canvas.setStrokeColor(PAPER[one.stroke])
        canvas.setLineWidth(one.width)
        canvas.setDash(*([list(one.dash)] if one.dash else []))
        canvas.setLineJoin(1)
    return {"stroke": int(one.stroke != "none"), "fill": int(fill != "none")}
