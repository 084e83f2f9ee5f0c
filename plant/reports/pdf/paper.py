"""From a document to the bytes of a PDF. The same document gives the same bytes."""

from __future__ import annotations

import datetime as dt
import functools
import io
from typing import Any

from reportlab.lib.pagesizes import A4, LETTER
from reportlab.lib.units import mm
from reportlab.platypus import BaseDocTemplate, CondPageBreak, Flowable, Frame, PageTemplate, Spacer

from plant.reports.pdf import cover, faces, grid, ink, picture, words
from plant.reports.pdf.document import NOTICE, Block, Document, Pairs, Picture, Section, Table
from plant.reports.pdf.tagged import Element, TaggedCanvas

RENDERER = "weirbook-pdf 1"
"""Counts up whenever the same content would come out as other bytes."""

SIZES = {"A4": A4, "Letter": LETTER}
SIDE = 17 * mm
TOP = 21 * mm
FOOT = 19 * mm
WHOLE_TABLE = 180 * mm  # lower tables are not torn


def render(document: Document) -> bytes:
    """The PDF of a document. Raises ValueError for a page size that is not A4 or Letter."""
    if document.page not in SIZES:
        raise ValueError(f"page size {document.page!r} is not known; known: {', '.join(SIZES)}")
    faces.register()
    page_width, page_height = SIZES[document.page]
    width = page_width - 2 * SIDE
    root = Element("Document")
    out = io.BytesIO()
    title = f"{document.title}, {document.works_name}, {document.month_words}"
    # The template would put its own names over those of the canvas.
    template = BaseDocTemplate(
        out,
        pagesize=(page_width, page_height),
        title=title,
        author=document.works_name,
        subject=document.number,
        creator="Weirbook",
        leftMargin=SIDE,
        rightMargin=SIDE,
        topMargin=TOP,
        bottomMargin=FOOT,
    )
    frame = Frame(
        SIDE, FOOT, width, page_height - TOP - FOOT, id="page", leftPadding=0, rightPadding=0, topPadding=0, bottomPadding=0
    )
    template.addPageTemplates(PageTemplate("page", [frame]))
    story = cover.flowables(root, document, width)
    for number, section in enumerate(document.sections, start=1):
        story += _section(root, section, number, width)
    story += cover.closing(root, document, width)
    template.build(
        story,
        canvasmaker=functools.partial(
            TaggedCanvas,
            title=title,
            language=document.language,
            when=dt.datetime.fromisoformat(document.issued_at),
            root=root,
            running=functools.partial(_running_lines, document),
        ),
    )
    return out.getvalue()


def _section(root: Element, section: Section, number: int, width: float) -> list[Flowable]:
    part = Element("Sect", root)
    story: list[Any] = [
        CondPageBreak(_least_room(section, width)),
        words.heading(part, f"{number}. {section.title}", "section", level=0, key=section.key, tag="H2"),
    ]
    for block in section.blocks:
        story += _block(part, block, width)
    return story


def _least_room(section: Section, width: float) -> float:
    """What must be left on a page for a section to begin there, so that no heading stands alone at its foot."""
    first = section.blocks[0] if section.blocks else None
    if isinstance(first, Table) and first.rows:
        laid = grid.grids(Element("Document"), first, width)[0]
        return 22 * mm + _room_for(laid, width)
    return 62 * mm if isinstance(first, Picture) else 32 * mm


def _block(part: Element, block: Block, width: float) -> list[Flowable]:
    if isinstance(block, Table):
        return _table(part, block, width)
    if isinstance(block, Pairs):
        return cover.pairs(part, block.rows, width, caption=block.caption)
    if isinstance(block, Picture):
        return picture.flowables(part, block, width)
    return [words.words(part, block.text, block.manner)]


def _table(part: Element, table: Table, width: float) -> list[Flowable]:
    if not table.rows:
        title = [words.words(part, table.caption, "caption", tag="H3")] if table.caption else []
        return [*title, words.words(part, table.empty, "body"), *(words.words(part, note, "small") for note in table.notes)]
    story: list[Any] = []
    for laid in grid.grids(part, table, width):
        if table.caption:
            title = words.words(laid.element, laid.caption, "caption", tag="Caption")
            story += [CondPageBreak(_room_for(laid, width)), title, laid]
        else:
            story.append(laid)
    story += [words.words(part, note, "small") for note in table.notes]
    if table.notes:
        story.append(Spacer(1, 2))
    return story


def _room_for(laid: grid.Grid, width: float) -> float:
    """What must be left for a table to begin: a short one, or a month of days, whole; of a longer one a good piece."""
    height = laid.wrap(width, 0)[1]
    return height + 10 * mm if height < WHOLE_TABLE else 60 * mm


def _running_lines(document: Document, canvas: TaggedCanvas, page: int, pages: int) -> None:
    """Head and foot of a page: whose report, which month, which issue; the regulator's note; page x of y."""
    page_width, page_height = SIZES[document.page]
    right = page_width - SIDE
    head = page_height - 13 * mm
    issue = f"{document.number}, revision {document.revision}" if document.revision else document.number
    issue = "DRAFT, not issued" if document.draft else issue
    canvas.setFont(faces.REGULAR, 7.4)
    canvas.setFillColor(ink.QUIET)
    canvas.drawString(
        SIDE, head, _fitting(f"{document.works_name} · {document.title}, {document.month_words}", right - SIDE - 150)
    )
    canvas.setFont(faces.SEMIBOLD, 7.4)
    canvas.setFillColor(ink.INK)
    canvas.drawRightString(right, head, issue)
    canvas.setStrokeColor(ink.LINE)
    canvas.setLineWidth(0.5)
    canvas.line(SIDE, head - 4, right, head - 4)
    canvas.line(SIDE, 13.5 * mm, right, 13.5 * mm)
    canvas.setFillColor(ink.INK)
    canvas.setFont(faces.REGULAR, 7.4)
    canvas.drawString(SIDE, 9.6 * mm, NOTICE)
    canvas.drawRightString(right, 9.6 * mm, f"Page {page} of {pages}")


def _fitting(text: str, room: float) -> str:
    if faces.width(text, faces.REGULAR, 7.4) <= room:
        return text
    while text and faces.width(text + "…", faces.REGULAR, 7.4) > room:
        text = text[:-1]
    return text.rstrip() + "…"
