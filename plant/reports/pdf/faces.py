"""The two faces everything is set in, registered once a process."""

from __future__ import annotations

import functools
from pathlib import Path

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

REGULAR = "Inter-Regular"
SEMIBOLD = "Inter-SemiBold"
_FOLDER = Path(__file__).parent / "faces"


@functools.cache
def register() -> None:
    """Makes both faces known to reportlab."""
    for name in (REGULAR, SEMIBOLD):
        pdfmetrics.registerFont(TTFont(name, str(_FOLDER / f"{name}.ttf")))
    pdfmetrics.registerFontFamily(REGULAR, normal=REGULAR, bold=SEMIBOLD, italic=REGULAR, boldItalic=SEMIBOLD)


@functools.lru_cache(maxsize=20_000)
def width(text: str, name: str, size: float) -> float:
    """Width of a line of text in points."""
    return float(pdfmetrics.stringWidth(text, name, size))


def absent(text: str) -> set[str]:
    """Characters that the faces cannot print; they come out as empty boxes."""
    register()
    known = pdfmetrics.getFont(REGULAR).face.charToGlyph
    return {character for character in text if ord(character) not in known and not character.isspace()}
