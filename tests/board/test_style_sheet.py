"""The style sheet: contrast in both themes and on paper, one typeface, and no class that only one page knows."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

STATIC = Path(__file__).parents[2] / "plant" / "board" / "static" / "board"
CSS = (STATIC / "site.css").read_text()
TEXT = ("ink", "quiet", "water", "need", "alert", "action", "regulatory", "settled")
SIZES = {"14px", "16px", "20px", "28px", "44px", "1rem", "10pt", "18pt", "24pt"}


def tokens(start: str) -> dict[str, str]:
    """The colours of the block that begins with ``start``."""
    block = CSS[CSS.index(start) :]
    return dict(re.findall(r"--([\w-]+): (#[0-9a-f]{6})", block[: block.index("}")]))


THEMES = {
    "day": tokens(":root {"),
    "night": tokens(':root[data-theme="night"] {'),
    "device": tokens(':root:not([data-theme="day"]) {'),
    "paper": tokens(":root, :root[data-theme] {"),
}


def luminance(colour: str) -> float:
    """Relative luminance (WCAG 2.2, definition of relative luminance)."""
    channels = [int(colour[n : n + 2], 16) / 255 for n in (1, 3, 5)]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    """Contrast ratio (WCAG 2.2, definition of contrast ratio)."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def test_the_ratio_itself():
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.01)


@pytest.mark.parametrize("theme", THEMES)
def test_every_text_colour_can_be_read_on_every_ground(theme):
    colours = THEMES[theme]
    weak = {
        (text, ground): round(contrast(colours[text], colours[ground]), 2)
        for text in TEXT
        for ground in ("paper", "card", "band")
        if contrast(colours[text], colours[ground]) < 4.9
    }
    assert weak == {}


@pytest.mark.parametrize("theme", ["day", "night"])
def test_the_main_button_and_edges_of_fields_can_be_seen(theme):
    colours = THEMES[theme]
    assert contrast(colours["on-water"], colours["water"]) >= 4.9
    # WCAG 2.2, 1.4.11: what shows where a field is.
    assert contrast(colours["edge"], colours["card"]) >= 3.0
    assert contrast(colours["edge"], colours["paper"]) >= 3.0


def test_night_is_the_same_by_choice_and_by_device():
    assert THEMES["night"] == THEMES["device"]


def test_sizes_are_those_of_the_scale():
    assert set(re.findall(r"font-size: ([^;]+);", CSS)) <= SIZES


def test_nothing_is_shadowed_or_shaded():
    assert "box-shadow" not in CSS
    assert "gradient" not in CSS


def test_the_face_is_small_and_comes_with_its_licence():
    face = (STATIC / "inter.woff2").read_bytes()
    assert face[:4] == b"wOF2"
    assert len(face) < 70_000
    assert "SIL OPEN FONT LICENSE" in (STATIC / "inter-LICENSE.txt").read_text().upper()


def test_every_mark_used_is_drawn():
    drawn = set(re.findall(r'<symbol id="(\w+)"', (STATIC / "marks.svg").read_text()))
    templates = STATIC.parents[3] / "templates"
    used = {name for path in templates.rglob("*.html") for name in re.findall(r"marks\.svg' %}#(\w+)", path.read_text())}
    assert used
    assert used <= drawn
    assert {"target", "alert", "action", "regulatory"} <= drawn
