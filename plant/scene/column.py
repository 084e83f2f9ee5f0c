"""The level column: a vessel upright, true to its own proportions."""

from __future__ import annotations

from collections.abc import Callable

from plant import scene
from plant.scene import numbers

BOX_W, BOX_H = 96.0, 176.0
X0, Y0 = 12.0, 12.0


def level_column(
    *,
    title: str,
    width_m: float,
    height_m: float,
    cone_m: float = 0.0,
    level: float | None,
    heel: float = 0.0,
    reserve: float | None = None,
    fill_to: float = 1.0,
    load_from: float | None = None,
    days: float | None = None,
    contents: str = "",
    width: float = 266,
) -> scene.Scene:
    """A vessel of ``width_m`` by ``height_m`` (the cone below it included), all other heights as shares of its height.

    ``level`` what it holds (None: not known); ``heel`` what stays below the suction, hatched; ``reserve`` where the
    reserve begins; ``fill_to`` how far it may be filled; ``load_from`` the level below which a whole load fits: the room
    it needs is the dashed bracket between the two. ``days`` of supply stands beside it.
    """
    grow = min(BOX_W / width_m, BOX_H / height_m)
    w, h = max(width_m * grow, 24.0), max(height_m * grow, 40.0)
    top = Y0 + (BOX_H - h)
    foot = top + h
    cone = h * min(cone_m / height_m, 0.9) if cone_m else 0.0

    def at(share: float) -> float:
        return foot - h * min(max(share, 0.0), 1.0)

    def half(y: float) -> float:
        """Half the width at a height of the picture: it narrows in the cone."""
        if cone and y > foot - cone:
            return (w / 2) * (0.12 + 0.88 * (foot - y) / cone)
        return w / 2

    def slab(y_low: float, y_high: float) -> tuple[tuple[float, float], ...]:
        mid = X0 + w / 2
        edges = [y_low] + ([foot - cone] if cone and y_high < foot - cone < y_low else []) + [y_high]
        left = [(mid - half(y), y) for y in edges]
        right = [(mid + half(y), y) for y in reversed(edges)]
        return tuple(left + right)

    shapes: list[scene.Shape] = []
    if level is not None and level > 0:
        shapes.append(scene.Poly(slab(foot, at(level)), fill="water", closed=True))
    if heel > 0:
        shapes += _hatched(X0 + w / 2, foot, at(heel), half, level is not None and level > 0)
    dash = () if level is not None else (4, 4)
    shapes.append(scene.Poly(slab(foot, top), stroke="edge", width=2, closed=True, dash=dash))
    if fill_to < 1:
        shapes.append(scene.Line(X0, at(fill_to), X0 + w, at(fill_to), stroke="edge", dash=(2, 3)))
    if reserve is not None:
        y = at(reserve)
        shapes.append(scene.Line(X0 - 8, y, X0 + w + 8, y, stroke="need", width=2))
    side = X0 + w + 12
    if load_from is not None and load_from >= 0:
        y1, y2 = at(fill_to), at(load_from)
        bracket = ((side, y1), (side + 8, y1), (side + 8, y2), (side, y2))
        shapes.append(scene.Poly(bracket, stroke="edge", width=1.5, dash=(3, 3)))
    words_x = side + 24
    if days is not None:
        shapes.append(scene.Text(words_x, Y0 + 40, _days(days), "ink", size=28, bold=True))
        shapes.append(scene.Text(words_x, Y0 + 60, "days of supply", "quiet"))
    else:
        shapes.append(scene.Text(words_x, Y0 + 40, "days not known", "quiet"))
    if level is None:
        shapes.append(scene.Text(words_x, Y0 + 88, "level not known", "quiet"))
    else:
        shapes.append(scene.Text(words_x, Y0 + 88, f"{100 * level:.0f} % full", "water"))
    if contents:
        shapes.append(scene.Text(words_x, Y0 + 108, contents, "ink"))
    if reserve is not None:
        shapes.append(scene.Line(words_x, Y0 + 133, words_x + 18, Y0 + 133, stroke="need", width=2))
        shapes.append(scene.Text(words_x + 24, Y0 + 138, "reserve", "need"))
    if load_from is not None:
        fits = load_from >= 0 and level is not None and level <= load_from
        words = "a load fits" if fits else "no room for a load"
        shapes.append(scene.Text(words_x, Y0 + 162, words, "ink" if fits else "quiet"))
    summary = _summary(level, heel, reserve, fill_to, load_from, days, contents)
    return scene.Scene(width, Y0 + BOX_H + 12, title, summary, tuple(shapes))


def _hatched(mid: float, foot: float, top: float, half: Callable[[float], float], over_water: bool) -> list[scene.Shape]:
    """Slanting lines between two heights, kept inside the outline (worked out, since painters do not clip)."""
    role = "card" if over_water else "edge"
    shapes: list[scene.Shape] = [scene.Line(mid - half(top), top, mid + half(top), top, stroke=role, width=1.5)]
    slope = 0.6
    inside = min(half(foot), half(top))
    rise = foot - top
    offset = -inside
    while offset < inside:
        run_x = min(rise / slope, inside - offset)
        shapes.append(scene.Line(mid + offset, foot, mid + offset + run_x, foot - run_x * slope, stroke=role, width=1.5))
        offset += 8
    return shapes


def _days(days: float) -> str:
    return f"{days:.0f}" if days >= 10 else f"{days:.1f}"


def _summary(
    level: float | None,
    heel: float,
    reserve: float | None,
    fill_to: float,
    load_from: float | None,
    days: float | None,
    contents: str,
) -> str:
    parts = ["level not known" if level is None else f"{100 * level:.0f} % full"]
    if contents:
        parts.append(contents)
    parts.append("days of supply not known" if days is None else f"{_days(days)} days of supply")
    if heel:
        parts.append(f"the lowest {100 * heel:.0f} % cannot be drawn")
    if reserve is not None:
        parts.append(f"reserve at {100 * reserve:.0f} %")
    if fill_to < 1:
        parts.append(f"may be filled to {100 * fill_to:.0f} %")
    if load_from is not None:
        if load_from < 0:
            parts.append("a whole load never fits")
        else:
            parts.append(f"a whole load fits below {numbers.tidy(100 * load_from)} %")
    words = "; ".join(parts)
    return words[0].upper() + words[1:] + "."
