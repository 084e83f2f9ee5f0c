"""The dose strip: used, designed and needed on one scale from zero."""

from __future__ import annotations

from collections.abc import Mapping

from plant import scene
from plant.scene import numbers

SCALE_Y = 38.0
ROW_H = 24.0
HEIGHT = 78.0
BAND_H = 22.0


def dose_strip(
    *,
    title: str,
    unit: str,
    used: float | None,
    design: float | None,
    need: float | None,
    used_sd: float | None = None,
    tolerance_pct: float = 10.0,
    weak: bool = False,
    why_unknown: str = "",
    whisker: bool = True,
    width: float = 360,
    opens: Mapping[str, str] | None = None,
) -> scene.Scene:
    """Used, design and need (all in ``unit``, mg/L) side by side.

    The scale runs from 0 to the larger of 1.6 x design and 1.15 x the largest value. The band is the design with its
    tolerance; the notch above is the need; the dot is what was used, hollow where the day is ``weak``, its whisker two
    standard uncertainties either way. What is unknown is a dashed outline and words, never zero. ``opens`` says where
    the numbers used, design and need lead to.
    """
    numbers_w = 150.0
    x0, x1 = 10.0, width - numbers_w - 22
    known = [value for value in (used, need) if value is not None]
    if used is not None and used_sd and whisker:
        known.append(used + 2 * used_sd)
    top = max([1.6 * design if design else 0.0, *(1.15 * value for value in known)], default=0.0)
    right = _numbers(width - numbers_w, used, used_sd if whisker else None, design, need, opens or {})
    summary = _summary(unit, used, used_sd if whisker else None, design, need, weak, why_unknown)
    if top <= 0:
        return scene.Scene(width, HEIGHT, title, summary, (*_unknown(x0, x1, "nothing known yet"), *right))

    def at(value: float) -> float:
        return x0 + (x1 - x0) * min(max(value, 0.0), top) / top

    shapes: list[scene.Shape] = []
    if design is not None:
        low, high = design * (1 - tolerance_pct / 100), design * (1 + tolerance_pct / 100)
        band_w = max(at(high) - at(low), 3)
        shapes.append(scene.Rect(at(low), SCALE_Y - BAND_H / 2, band_w, BAND_H, fill="band"))
    shapes.append(scene.Line(x0, SCALE_Y, x1, SCALE_Y, stroke="edge", width=1))
    steps = numbers.scale(0, top, 3 if width < 300 else 4 if width < 500 else 8)
    for step in steps:
        shapes.append(scene.Line(at(step), SCALE_Y, at(step), SCALE_Y + 16, stroke="line"))
        words = numbers.tick(step, steps)
        anchor = "start" if step == 0 else "middle"
        shapes.append(scene.Text(at(step) - (2 if step == 0 else 0), SCALE_Y + 32, words, "quiet", anchor=anchor))
    if need is not None:
        x = at(need)
        notch = ((x - 8, SCALE_Y - 26), (x + 8, SCALE_Y - 26), (x, SCALE_Y - 12))
        shapes.append(scene.Poly(notch, fill="need", closed=True))
    if used is None:
        shapes.extend(_unknown(x0, x1, ""))
    else:
        x = at(used)
        if used_sd and whisker:
            left, end = at(used - 2 * used_sd), at(used + 2 * used_sd)
            shapes.append(scene.Line(left, SCALE_Y, end, SCALE_Y, stroke="water", width=3))
            shapes += [scene.Line(tip, SCALE_Y - 6, tip, SCALE_Y + 6, stroke="water", width=2) for tip in (left, end)]
        fill = "card" if weak else "water"
        shapes.append(scene.Circle(x, SCALE_Y, 7, fill=fill, stroke="water", width=2.5))
    return scene.Scene(width, HEIGHT, title, summary, (*shapes, *right))


def _unknown(x0: float, x1: float, words: str) -> tuple[scene.Shape, ...]:
    outline = scene.Rect(x0, SCALE_Y - 11, x1 - x0, 22, stroke="edge", dash=(4, 4), radius=4)
    if not words:
        return (outline,)
    return (outline, scene.Text((x0 + x1) / 2, SCALE_Y + 5, words, "quiet", anchor="middle"))


def _numbers(
    x: float,
    used: float | None,
    sd: float | None,
    design: float | None,
    need: float | None,
    opens: Mapping[str, str],
) -> tuple[scene.Shape, ...]:
    used_words = "not known" if used is None else numbers.with_spread(used, 2 * sd) if sd else numbers.tidy(used)
    rows = [
        ("used", used_words, "quiet" if used is None else "water", used is not None),
        ("design", "not stated" if design is None else numbers.tidy(design), "quiet" if design is None else "ink", False),
        ("need", "not known" if need is None else numbers.tidy(need), "quiet" if need is None else "need", False),
    ]
    shapes: list[scene.Shape] = []
    for index, (name, words, fill, bold) in enumerate(rows):
        y = 19 + index * ROW_H
        row: tuple[scene.Shape, ...] = (scene.Text(x, y, name, "quiet"), scene.Text(x + 48, y, words, fill, bold=bold))
        href = opens.get(name, "")
        if href:
            # Invisible, as large as a finger's mark may be small: the whole row opens.
            row = (scene.Rect(x - 4, y - 17, 152, ROW_H), *row, scene.Line(x + 48, y + 4, x + 84, y + 4, "edge", 1.5, (1.5, 3)))
        shapes.append(scene.Group(row, f"{name} {words}: how it was made" if href else "", href))
    return tuple(shapes)


def _summary(
    unit: str, used: float | None, sd: float | None, design: float | None, need: float | None, weak: bool, why: str
) -> str:
    parts = []
    if used is None:
        parts.append("Used: not known" + (f" ({why})" if why else ""))
    else:
        words = numbers.with_spread(used, 2 * sd) if sd else numbers.tidy(used)
        parts.append(f"Used {words} {unit}" + (" (a weak day)" if weak else ""))
    parts.append("design not stated" if design is None else f"design {numbers.tidy(design)} {unit}")
    parts.append("need not known" if need is None else f"need {numbers.tidy(need)} {unit}")
    return "; ".join(parts) + "."
