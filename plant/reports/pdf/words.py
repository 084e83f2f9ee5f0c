"""Paragraphs and headings that know their place in the structure."""

from __future__ import annotations

from typing import Any
from xml.sax.saxutils import escape

from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import Paragraph

from plant.reports.pdf import faces, ink
from plant.reports.pdf.tagged import Element


def style(name: str, size: float, *, face: str = faces.REGULAR, colour: str = ink.INK, **more: Any) -> ParagraphStyle:
    """A paragraph style of the house. Long words break rather than run out of the page."""
    return ParagraphStyle(
        name, fontName=face, fontSize=size, leading=round(size * ink.LEADING, 1), textColor=colour, splitLongWords=1, **more
    )


STYLES = {
    "body": style("body", ink.BODY, spaceAfter=5),
    "small": style("small", ink.SMALL, colour=ink.QUIET, spaceAfter=3),
    "lead": style("lead", 11, spaceAfter=6),
    "caution": style("caution", ink.BODY, face=faces.SEMIBOLD, spaceAfter=5),
    "title": style("title", ink.H1, face=faces.SEMIBOLD, spaceAfter=2),
    "subtitle": style("subtitle", 13, colour=ink.QUIET, spaceAfter=10),
    "section": style("section", ink.H2, face=faces.SEMIBOLD, colour=ink.WATER, spaceBefore=14, spaceAfter=5),
    "caption": style("caption", ink.H3, face=faces.SEMIBOLD, spaceBefore=7, spaceAfter=3),
}


class Words(Paragraph):
    """A tagged paragraph; one element however many pages it spans. Made by ``words`` and ``heading``.

    The constructor is reportlab's own: it builds the parts of a split paragraph through it.
    """

    element: Element
    outline: tuple[str, int] | None = None  # key of the bookmark, and its level

    def draw(self) -> None:
        if self.outline is not None:
            key, level = self.outline
            self.canv.bookmarkHorizontal(key, 0, self.height + 6)
            self.canv.addOutlineEntry(self.getPlainText(), key, level)
        self.canv.begin(self.element)
        super().draw()
        self.canv.end()

    def split(self, available_width: float, available_height: float) -> list[Any]:
        parts: list[Any] = super().split(available_width, available_height)
        for part in parts:
            part.element = self.element
        if len(parts) == 2:
            parts[0].outline, parts[1].outline = self.outline, None
        return parts


def words(parent: Element, text: str, manner: str = "body", *, tag: str = "P") -> Words:
    """A paragraph of plain text, never markup."""
    made = Words(escape(text).replace("\n", "<br/>"), STYLES[manner])
    made.element = Element(tag, parent)
    return made


def heading(parent: Element, text: str, manner: str, *, level: int, key: str, tag: str) -> Words:
    """A heading with its bookmark."""
    made = words(parent, text, manner, tag=tag)
    made.outline = (key, level)
    return made
