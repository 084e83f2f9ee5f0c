"""A report of a dozen pages beside bare reportlab with the same tables: the ratio of one run, and memory that stays flat."""

from __future__ import annotations

import gc
import io
import resource
import time
from collections.abc import Callable

import pytest
from reportlab.lib.pagesizes import A4
from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import PageBreak, Paragraph, SimpleDocTemplate
from reportlab.platypus import Table as BareTable

from plant.reports.pdf import faces, paper
from plant.reports.pdf.document import Section, Table, Text
from tests.reports import documents

SECTIONS = 12


def ours() -> bytes:
    return paper.render(
        documents.document(
            *(
                Section(f"s{number}", f"Part {number}", (Text("The dose is mass over volume. " * 6), documents.doses(2)))
                for number in range(SECTIONS)
            )
        )
    )


def bare() -> bytes:
    """The same words and cells by reportlab's own table, in the same embedded face, without tags, marks or parts."""
    faces.register()
    style = ParagraphStyle("words", fontName=faces.REGULAR, fontSize=9)
    story: list[object] = []
    table: Table = documents.doses(2)
    for number in range(SECTIONS):
        story += [Paragraph(f"Part {number}", style), Paragraph("The dose is mass over volume. " * 6, style)]
        cells = [[column.head for column in table.columns]] + [[cell.text for cell in row] for row in table.rows]
        laid = BareTable(cells, repeatRows=1)
        laid.setStyle(
            [
                ("FONT", (0, 0), (-1, -1), faces.REGULAR, 7),
                ("TOPPADDING", (0, 0), (-1, -1), 1),
                ("BOTTOMPADDING", (0, 0), (-1, -1), 1),
            ]
        )
        story += [laid, PageBreak()]
    out = io.BytesIO()
    SimpleDocTemplate(out, pagesize=A4, pageCompression=1).build(story)
    return out.getvalue()


def best(make: Callable[[], bytes], times: int = 5) -> float:
    found = []
    for _ in range(times):
        start = time.process_time()
        make()
        found.append(time.process_time() - start)
    return min(found)


def test_tagged_with_embedded_faces_costs_little_more_than_bare(record_property: Callable[[str, object], None]) -> None:
    ours(), bare()
    ratio = best(ours) / best(bare)
    record_property("ratio to bare reportlab", round(ratio, 2))
    assert ratio < 1.5


@pytest.mark.slow
def test_memory_stays_flat_over_a_hundred_reports() -> None:
    for _ in range(10):
        ours()
    gc.collect()
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    for _ in range(100):
        ours()
    gc.collect()
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before < 20_000  # kB
