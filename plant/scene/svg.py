"""A scene as SVG text: presentation attributes and classes only, so that a strict content security policy holds.

Roles become classes (``f-water``, ``s-edge``); the style sheet gives them the colours of day, night and paper.
"""

from __future__ import annotations

import json
import re
from html import escape

from plant import scene


def paint(picture: scene.Scene, ident: str) -> str:
    """The picture as one ``svg`` element. ``ident`` must be unique in its page: title and summary are found by it."""
    ident = re.sub(r"[^\w-]", "_", ident)
    # A link inside a picture can only be reached where the picture is not one image to a reader.
    role = "group" if any(isinstance(one, scene.Group) and one.href for one in picture.shapes) else "img"
    cursor = ""
    if picture.cursor:
        stops = [[_n(stop.x), None if stop.y is None else _n(stop.y), stop.words] for stop in picture.cursor]
        cursor = f' data-cursor="{escape(json.dumps(stops, ensure_ascii=False))}"'
    return (
        f'<svg class="scene" width="{_n(picture.width)}" height="{_n(picture.height)}" '
        f'viewBox="0 0 {_n(picture.width)} {_n(picture.height)}" role="{role}" '
        f'aria-labelledby="{ident}-t {ident}-d"{cursor}>'
        f'<title id="{ident}-t">{escape(picture.title)}</title><desc id="{ident}-d">{escape(picture.summary)}</desc>'
        + "".join(_shape(one) for one in picture.shapes)
        + "</svg>"
    )


def _n(value: float) -> float | int:
    rounded = round(value, 1)
    return int(rounded) if rounded == int(rounded) else rounded


def _look(one: scene.Line | scene.Poly | scene.Rect | scene.Circle) -> str:
    fill = getattr(one, "fill", "none")
    out = f' class="f-{fill} s-{one.stroke}"'
    if one.stroke != "none":
        out += f' stroke-width="{_n(one.width)}"'
    if one.dash:
        out += f' stroke-dasharray="{" ".join(str(_n(part)) for part in one.dash)}"'
    return out


def _shape(one: scene.Shape) -> str:
    match one:
        case scene.Text():
            anchor = "" if one.anchor == "start" else f' text-anchor="{one.anchor}"'
            bold = ' font-weight="600"' if one.bold else ""
            return (
                f'<text x="{_n(one.x)}" y="{_n(one.y)}" class="f-{one.fill}" font-size="{_n(one.size)}"'
                f"{anchor}{bold}>{escape(one.words)}</text>"
            )
        case scene.Line():
            ends = f'x1="{_n(one.x1)}" y1="{_n(one.y1)}" x2="{_n(one.x2)}" y2="{_n(one.y2)}"'
            return f"<line {ends}{_look(one)}/>"
        case scene.Poly():
            name = "polygon" if one.closed else "polyline"
            points = " ".join(f"{_n(x)},{_n(y)}" for x, y in one.points)
            return f'<{name} points="{points}"{_look(one)} stroke-linejoin="round"/>'
        case scene.Rect():
            radius = f' rx="{_n(one.radius)}"' if one.radius else ""
            box = f'x="{_n(one.x)}" y="{_n(one.y)}" width="{_n(one.w)}" height="{_n(one.h)}"'
            return f"<rect {box}{radius}{_look(one)}/>"
        case scene.Circle():
            return f'<circle cx="{_n(one.x)}" cy="{_n(one.y)}" r="{_n(one.r)}"{_look(one)}/>'
        case scene.Group():
            inner = (f"<title>{escape(one.title)}</title>" if one.title else "") + "".join(map(_shape, one.shapes))
            if not one.href:
                return f"<g>{inner}</g>"
            label = f' aria-label="{escape(one.title)}"' if one.title else ""
            return f'<a href="{escape(one.href)}"{label}>{inner}</a>'
