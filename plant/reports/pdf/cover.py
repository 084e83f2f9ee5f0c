"""The first page and the last lines: what the report is, for whom, its state, its signatures, and what proves it."""

from __future__ import annotations

from typing import Any

from reportlab.lib.utils import simpleSplit
from reportlab.platypus import CondPageBreak, Flowable, Spacer

from plant.reports.pdf import faces, ink, words
from plant.reports.pdf.document import NOTICE, Document, Signature
from plant.reports.pdf.tagged import Element

LINE = 12.2
NAME_SHARE = 0.30


def flowables(root: Element, document: Document, width: float) -> list[Flowable]:
    """The first page down to the signatures; the sections follow on."""
    part = Element("Sect", root)
    story: list[Any] = [
        words.heading(part, document.title, "title", level=0, key="cover", tag="H1"),
        words.words(part, f"{document.works_name} · {document.month_words}", "subtitle"),
        StatusBox(part, document, width),
        Spacer(1, 8),
        *pairs(part, document.cover, width),
        Spacer(1, 6),
    ]
    if document.own_wording:
        story.append(words.words(part, document.own_wording, "body"))
    story.append(SignatureRow(part, document.signatures, width))
    story.append(Spacer(1, 8))
    return story


def closing(root: Element, document: Document, width: float) -> list[Flowable]:
    """How a reader can prove that the file is the issued one."""
    if not document.closing:
        return []
    part = Element("Sect", root)
    return [
        CondPageBreak(90),
        words.heading(part, "What proves this report", "section", level=0, key="proof", tag="H2"),
        *pairs(part, document.closing, width),
    ]


def pairs(part: Element, rows: tuple[tuple[str, str], ...], width: float, *, caption: str = "") -> list[Flowable]:
    """Names at the left, what they are at the right."""
    title = [words.words(part, caption, "caption", tag="H3")] if caption else []
    return [*title, *(PairLine(part, name, value, width) for name, value in rows), Spacer(1, 5)]


class PairLine(Flowable):
    """One name and what it is; the latter wraps."""

    def __init__(self, part: Element, name: str, value: str, width: float) -> None:
        super().__init__()
        self.element = Element("P", part)
        self.width = width
        self.left = width * NAME_SHARE
        self.name = simpleSplit(name, faces.REGULAR, ink.BODY, self.left - 8)
        self.value = [line for given in value.split("\n") for line in _lines(given, faces.REGULAR, ink.BODY, width - self.left)]
        self.height = max(len(self.name), len(self.value)) * LINE + 2.4

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        canvas = self.canv
        canvas.begin_artifact()
        canvas.setStrokeColor(ink.HAIR)
        canvas.setLineWidth(0.4)
        canvas.line(0, 0.6, self.width, 0.6)
        canvas.end()
        canvas.begin(self.element)
        for lines, x, colour in ((self.name, 0, ink.QUIET), (self.value, self.left, ink.INK)):
            canvas.setFillColor(colour)
            canvas.setFont(faces.REGULAR, ink.BODY)
            for number, line in enumerate(lines):
                canvas.drawString(x, self.height - LINE * (number + 1) + 2.4, line)
        canvas.end()


class StatusBox(Flowable):
    """The state of the report, whose form it is, and the regulator's note, in one frame."""

    def __init__(self, part: Element, document: Document, width: float) -> None:
        super().__init__()
        self.element = Element("P", part)
        self.width = width
        room = width - 24
        self.lines = [(line, faces.SEMIBOLD, 11.0) for line in _lines(document.status, faces.SEMIBOLD, 11.0, room)]
        self.lines += [(line, faces.REGULAR, ink.BODY) for line in _lines(document.form_note, faces.REGULAR, ink.BODY, room)]
        self.lines += [(line, faces.SEMIBOLD, ink.BODY) for line in _lines(NOTICE, faces.SEMIBOLD, ink.BODY, room)]
        self.height = sum(size * 1.45 for _, _, size in self.lines) + 16

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        canvas = self.canv
        canvas.begin_artifact()
        canvas.setStrokeColor(ink.INK)
        canvas.setLineWidth(0.9)
        canvas.rect(0, 0, self.width, self.height)
        canvas.end()
        canvas.begin(self.element)
        canvas.setFillColor(ink.INK)
        y = self.height - 8
        for line, face, size in self.lines:
            y -= size * 1.45
            canvas.setFont(face, size)
            canvas.drawString(12, y + size * 0.32, line)
        canvas.end()


class SignatureRow(Flowable):
    """The signatures side by side: what each means, the name, the licence, when, and how it was given."""

    def __init__(self, part: Element, signatures: tuple[Signature, ...], width: float) -> None:
        super().__init__()
        self.width = width
        self.gap = 14.0
        self.each = (width - self.gap * (len(signatures) - 1)) / max(len(signatures), 1)
        self.blocks = [(Element("P", part), _signature_lines(signature, self.each - 16)) for signature in signatures]
        self.height = max((sum(size * 1.42 for _, _, size in lines) for _, lines in self.blocks), default=0) + 14

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        canvas = self.canv
        for number, (element, lines) in enumerate(self.blocks):
            left = number * (self.each + self.gap)
            canvas.begin_artifact()
            canvas.setStrokeColor(ink.LINE)
            canvas.setLineWidth(0.6)
            canvas.rect(left, 0, self.each, self.height)
            canvas.end()
            canvas.begin(element)
            y = self.height - 7
            for line, face, size in lines:
                y -= size * 1.42
                canvas.setFillColor(ink.INK if face == faces.SEMIBOLD or size > ink.SMALL else ink.QUIET)
                canvas.setFont(face, size)
                canvas.drawString(left + 8, y + size * 0.32, line)
            canvas.end()


def _signature_lines(signature: Signature, room: float) -> list[tuple[str, str, float]]:
    out: list[tuple[str, str, float]] = []
    for text, face, size in (
        (signature.meaning, faces.REGULAR, ink.SMALL),
        (signature.name, faces.SEMIBOLD, 10.5),
        (signature.licence, faces.REGULAR, ink.BODY),
        (signature.signed_at, faces.REGULAR, ink.BODY),
        (signature.manner, faces.REGULAR, ink.SMALL),
    ):
        if text:
            out += [(line, face, size) for line in _lines(text, face, size, room)]
    return out


def _lines(text: str, face: str, size: float, room: float) -> list[str]:
    """Lines that fit; what has no blank to break at (a hash, an address) is broken anywhere."""
    out: list[str] = []
    for line in simpleSplit(text, face, size, room) or [""]:
        while faces.width(line, face, size) > room and len(line) > 1:
            keep = len(line) - 1
            while keep > 1 and faces.width(line[:keep], face, size) > room:
                keep -= 1
            out.append(line[:keep])
            line = line[keep:]
        out.append(line)
    return out
