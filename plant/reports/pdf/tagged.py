"""A canvas that keeps a structure tree, so that a reader program can tell headings, tables and pictures apart.

reportlab writes no tags of its own. Every piece of text is set between ``begin`` and ``end`` of an element; rules,
grounds and running lines are artifacts. The tree is written out as the file is saved. Terms as in ISO 32000-1, 14.7
(logical structure) and 14.8 (tagged PDF), from memory. Nothing here is a claim of PDF/UA: that needs a person's check.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from typing import Any
from xml.sax.saxutils import escape

from reportlab import rl_config
from reportlab.pdfbase import pdfdoc, pdfmetrics
from reportlab.pdfgen.canvas import Canvas

from plant.reports.pdf import faces

# Streams as bytes: the text form of them is a fifth larger and slow to make.
rl_config.useA85 = 0


class Element:
    """A node of the structure tree. ``kids`` are Elements, or (page, mark) pairs of marked content."""

    __slots__ = ("attributes", "kids", "number", "tag")

    def __init__(self, tag: str, parent: Element | None = None, attributes: str = "") -> None:
        self.tag = tag
        self.kids: list[Any] = []
        self.attributes = attributes
        self.number = 0
        if parent is not None:
            parent.kids.append(self)


class Raw(pdfdoc.PDFObject):
    """An object written as it stands."""

    __RefOnly__ = 1

    def __init__(self, body: bytes = b"") -> None:
        self.body = body

    def format(self, document: Any) -> bytes:
        return self.body


def literal(text: str) -> str:
    """A text string of a dictionary, UTF-16 in hex, which needs no escaping."""
    return "<FEFF" + text.encode("utf-16-be").hex().upper() + ">"


class TaggedCanvas(Canvas):
    """Canvas with structure, title, language, issue time, and running lines painted once the number of pages is known."""

    def __init__(
        self,
        *args: Any,
        title: str,
        language: str,
        when: dt.datetime,
        root: Element,
        running: Callable[[TaggedCanvas, int, int], None],
        **kwargs: Any,
    ) -> None:
        faces.register()
        kwargs |= {"initialFontName": faces.REGULAR, "lang": language, "invariant": 1, "pageCompression": 1}
        super().__init__(*args, **kwargs)
        self._title_text, self._language, self._when, self._running = title, language, when, running
        self.setViewerPreference("DisplayDocTitle", "true")
        self._doc._timeStamp = _IssueTime(when)
        self.root = root
        self._encoded: dict[tuple[str, float, str], str] = {}
        self._marks: list[Element] = []
        self._marks_of_pages: list[list[Element]] = []
        self._pages: list[Any] = []
        self._add_page = self._doc.addPage
        self._doc.addPage = self._page_added

    def _page_added(self, page: Any) -> None:
        page.__NoDefault__ = [*page.__NoDefault__, "StructParents", "Tabs"]
        page.StructParents = len(self._pages)
        page.Tabs = pdfdoc.PDFName("S")
        self._pages.append(page)
        self._marks_of_pages.append(self._marks)
        self._marks = []
        self._add_page(page)

    def begin(self, element: Element) -> None:
        """What follows, up to ``end``, belongs to the element."""
        self._code.append(f"/{element.tag} <</MCID {len(self._marks)}>> BDC")
        element.kids.append((len(self._pages), len(self._marks)))
        self._marks.append(element)

    def begin_artifact(self) -> None:
        """What follows, up to ``end``, is decoration."""
        self._code.append("/Artifact BMC")

    def end(self) -> None:
        self._code.append("EMC")

    def put(self, x: float, y: float, text: str, face: str, size: float) -> None:
        """One line of text in the colour that is set: what a table says thousands of times."""
        key = (face, size, text)
        if key not in self._encoded:
            font = pdfmetrics.getFont(face)
            self._encoded[key] = "".join(
                f"{font.getSubsetInternalName(subset, self._doc)} {size:g} Tf({self._escape(part)})Tj "
                for subset, part in font.splitString(text, self._doc)
            )
        self._code.append(f"BT 1 0 0 1 {x:.2f} {y:.2f} Tm {self._encoded[key]}ET")

    def save(self) -> None:
        if len(self._code):
            self.showPage()
        self._paint_running_lines()
        self._write_structure()
        self._write_metadata()
        super().save()

    def _paint_running_lines(self) -> None:
        for number, page in enumerate(self._pages, start=1):
            self._code: list[str] = []
            self.begin_artifact()
            self.saveState()
            self._running(self, number, len(self._pages))
            self.restoreState()
            self.end()
            page.stream += "\n".join(self._code) + "\n"
        self._code = []

    def _write_structure(self) -> None:
        document = self._doc
        tree = Raw()
        document.Reference(tree, "StructTree")
        column = self._numbered(Raw(b"<</O/Table/Scope/Column>>"))
        row = self._numbered(Raw(b"<</O/Table/Scope/Row>>"))
        scopes = {"column": f"/A {column} 0 R", "row": f"/A {row} 0 R"}
        pages = [self._number_of(f"Page{number}") for number in range(1, len(self._pages) + 1)]
        order: list[tuple[Element, Element | None, Raw]] = []
        waiting: list[tuple[Element, Element | None]] = [(self.root, None)]
        while waiting:
            element, parent = waiting.pop()
            body = Raw()
            element.number = self._numbered(body)
            order.append((element, parent, body))
            waiting.extend((kid, element) for kid in reversed(element.kids) if isinstance(kid, Element))
        tree_number = self._number_of("StructTree")
        for element, parent, body in order:
            body.body = self._element_body(element, parent.number if parent else tree_number, pages, scopes)
        numbers = " ".join(
            f"{index}[{' '.join(f'{element.number} 0 R' for element in marks)}]"
            for index, marks in enumerate(self._marks_of_pages)
        )
        parents = self._numbered(Raw(f"<</Nums[{numbers}]>>".encode()))
        tree.body = (
            f"<</Type/StructTreeRoot/K {self.root.number} 0 R/ParentTree {parents} 0 R/ParentTreeNextKey {len(self._pages)}>>"
        ).encode()
        document.Catalog.StructTreeRoot = tree
        document.Catalog.MarkInfo = Raw(b"<</Marked true>>")

    def _element_body(self, element: Element, parent: int, pages: list[int], scopes: dict[str, str]) -> bytes:
        marks = [kid for kid in element.kids if not isinstance(kid, Element)]
        one_page = len({page for page, _ in marks}) == 1
        kids = " ".join(
            f"{kid.number} 0 R"
            if isinstance(kid, Element)
            else str(kid[1])
            if one_page
            else f"<</Type/MCR/Pg {pages[kid[0]]} 0 R/MCID {kid[1]}>>"
            for kid in element.kids
        )
        page = f"/Pg {pages[marks[0][0]]} 0 R" if one_page else ""
        more = scopes.get(element.attributes, element.attributes)
        return f"<</S/{element.tag}/P {parent} 0 R{page}/K[{kids}]{more}>>".encode()

    def _numbered(self, raw: Raw) -> int:
        return self._number_of(self._doc.Reference(raw).name)

    def _number_of(self, name: str) -> int:
        return int(self._doc.idToObjectNumberAndVersion[name][0])

    def _write_metadata(self) -> None:
        moment = self._when.astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
        packet = f"""<?xpacket begin="\ufeff" id="W5M0MpCehiHzreSzNTczkc9d"?>
<x:xmpmeta xmlns:x="adobe:ns:meta/"><rdf:RDF xmlns:rdf="http://www.w3.org/1999/02/22-rdf-syntax-ns#">
<rdf:Description rdf:about="" xmlns:dc="http://purl.org/dc/elements/1.1/" xmlns:xmp="http://ns.adobe.com/xap/1.0/">
<dc:title><rdf:Alt><rdf:li xml:lang="x-default">{escape(self._title_text)}</rdf:li></rdf:Alt></dc:title>
<dc:language><rdf:Bag><rdf:li>{escape(self._language)}</rdf:li></rdf:Bag></dc:language>
<xmp:CreateDate>{moment}</xmp:CreateDate><xmp:ModifyDate>{moment}</xmp:ModifyDate>
</rdf:Description></rdf:RDF></x:xmpmeta>
<?xpacket end="w"?>"""
        kind = pdfdoc.PDFDictionary({"Type": pdfdoc.PDFName("Metadata"), "Subtype": pdfdoc.PDFName("XML")})
        stream = pdfdoc.PDFStream(kind, packet.encode())
        stream.filters = []
        self._doc.Catalog.Metadata = stream


class _IssueTime:
    """What reportlab asks for the time of a file: here the time of issue, so that the same content has the same bytes."""

    def __init__(self, when: dt.datetime) -> None:
        moment = when.astimezone(dt.UTC)
        self.t = moment.timestamp()
        self.lt = moment.timetuple()
        self.YMDhms = (moment.year, moment.month, moment.day, moment.hour, moment.minute, moment.second)
        self.dhh = 0
        self.dmm = 0
        self.tzname = "UTC"

    @property
    def datetime(self) -> dt.datetime:
        return dt.datetime.fromtimestamp(self.t, dt.UTC)

    @property
    def asctime(self) -> str:
        return self.datetime.strftime("%a %b %d %H:%M:%S %Y")
