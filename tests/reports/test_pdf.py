"""The writer alone: same content, same bytes; every page says what it must; nothing runs out of the page."""

from __future__ import annotations

import datetime as dt
import hashlib
import io
import json
import subprocess
import sys
from pathlib import Path

import pypdf
import pypdfium2
import pytest
from pypdf.generic import IndirectObject
from reportlab.lib.colors import Color

from plant.reports.pdf import cut_faces, document, faces, ink, paper, picture
from plant.reports.pdf.document import NOTICE, Cell, Column, Section, Table, Text
from tests.reports import documents


def read(data: bytes) -> pypdf.PdfReader:
    return pypdf.PdfReader(io.BytesIO(data))


def texts(data: bytes) -> list[str]:
    return [page.extract_text() for page in read(data).pages]


def test_same_content_same_bytes_through_json_and_in_another_process() -> None:
    made = documents.document()
    data = paper.render(made)
    assert paper.render(document.from_plain(json.loads(json.dumps(document.to_plain(made))))) == data
    script = (
        "import sys,hashlib; from tests.reports import documents; from plant.reports.pdf import paper; "
        "sys.stdout.write(hashlib.sha256(paper.render(documents.document())).hexdigest())"
    )
    other = subprocess.run(
        [sys.executable, "-c", script],
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(__file__).parents[2],
        env={"PYTHONHASHSEED": "77", "PATH": "/usr/bin:/bin", "TZ": "Asia/Tokyo"},
    )
    assert other.stdout == hashlib.sha256(data).hexdigest()


def test_other_content_other_bytes() -> None:
    assert paper.render(documents.document()) != paper.render(documents.document(revision=2))


def test_the_time_inside_is_the_time_of_issue() -> None:
    meta = read(paper.render(documents.document())).metadata
    assert meta is not None
    assert meta.creation_date == meta.modification_date == dt.datetime(2026, 11, 3, 8, 12, tzinfo=dt.UTC)


@pytest.mark.parametrize("page", ["A4", "Letter"])
def test_each_page_has_head_foot_and_number(page: str) -> None:
    pages = texts(paper.render(documents.document(page=page)))
    assert len(pages) > 2
    for number, text in enumerate(pages, start=1):
        assert f"Page {number} of {len(pages)}" in text
        assert NOTICE in text
        assert "KFW-2026-10, revision 1" in text
    # On the first page the note stands in the frame too, not only in the foot.
    assert pages[0].count(NOTICE) == 2


def test_a_draft_says_so_on_each_page() -> None:
    for text in texts(paper.render(documents.document(draft=True, status="DRAFT"))):
        assert "DRAFT, not issued" in text


def test_page_sizes() -> None:
    box = read(paper.render(documents.document(page="Letter"))).pages[0].mediabox
    assert (float(box.width), float(box.height)) == (612, 792)
    with pytest.raises(ValueError, match="A5"):
        paper.render(documents.document(page="A5"))


def test_title_language_bookmarks_and_only_embedded_faces() -> None:
    reader = read(paper.render(documents.document()))
    root = reader.root_object
    assert reader.metadata is not None
    assert reader.metadata.title == "Monthly operating report, Kestrel Ford Water Works, October 2026"
    assert root["/Lang"] == "en-GB"
    assert bool(root["/ViewerPreferences"]["/DisplayDocTitle"])
    titles = [item.title for item in reader.outline]
    assert titles[:3] == ["Monthly operating report", "1. Summary", "2. Daily table"]
    # Each bookmark leads to the page its heading stands on.
    for item in reader.outline:
        page = reader.pages[reader.get_destination_page_number(item)]
        assert item.title in page.extract_text()
    names = set()
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():
            descriptor = font.get_object()["/FontDescriptor"]
            assert "/FontFile2" in descriptor
            names.add(font.get_object()["/BaseFont"].partition("+")[2])
    assert names == {"Inter-Regular", "Inter-SemiBold"}


def structure(reader: pypdf.PdfReader) -> list[tuple[str, int]]:
    """Every element with its depth, in reading order."""
    out: list[tuple[str, int]] = []
    waiting = [(reader.root_object["/StructTreeRoot"]["/K"], 0)]
    while waiting:
        element, depth = waiting.pop()
        element = element.get_object() if isinstance(element, IndirectObject) else element
        if not isinstance(element, dict) or "/S" not in element:
            continue
        out.append((element["/S"], depth))
        kids = element["/K"] if isinstance(element["/K"], list) else [element["/K"]]
        waiting.extend((kid, depth + 1) for kid in reversed(kids))
    return out


def test_structure_names_headings_tables_cells_and_figures() -> None:
    reader = read(paper.render(documents.document()))
    assert bool(reader.root_object["/MarkInfo"]["/Marked"])
    found = structure(reader)
    tags = [tag for tag, _ in found]
    assert tags[0] == "/Document"
    assert tags.count("/H1") == 1
    assert tags.count("/H2") == 6
    assert tags.count("/Figure") == 4
    assert tags.count("/Table") == 3
    # 12 rows of words under one head; 32 rows and a head in each of the two parts of the daily table.
    assert tags.count("/TR") == 13 + 2 * 33
    assert tags.count("/Caption") == 3


def test_every_mark_of_a_page_has_its_element_and_the_other_way_round() -> None:
    reader = read(paper.render(documents.document()))
    numbers = reader.root_object["/StructTreeRoot"]["/ParentTree"]["/Nums"]
    for index, page in enumerate(reader.pages):
        marks = page.get_contents().get_data().count(b"/MCID")
        assert numbers[2 * index] == page["/StructParents"] == index
        assert len(numbers[2 * index + 1]) == marks


def test_figures_carry_words_for_those_who_do_not_see_them() -> None:
    reader = read(paper.render(documents.document()))
    words = [
        item.get_object()["/Alt"]
        for item in reader.root_object["/StructTreeRoot"]["/ParentTree"]["/Nums"][1]
        if item.get_object()["/S"] == "/Figure"
    ]
    assert len(words) == 4
    assert "Used 1.10" in words[0]
    assert "not known (no dip)" in words[3]


def test_heads_are_repeated_where_a_table_goes_on() -> None:
    data = paper.render(documents.document(Section("long", "Long", (documents.words(150),))))
    pages = texts(data)
    assert len(pages) > 3
    assert all("What" in text and "Done" in text for text in pages if "feeder was raised" in text)


def test_a_row_longer_than_a_page_is_parted_and_loses_nothing() -> None:
    words = " ".join(f"word{number}" for number in range(4000))
    data = paper.render(documents.document(Section("long", "Long", (documents.words(2, words),))))
    joined = " ".join(texts(data)).split()
    assert all(f"word{number}" in joined for number in range(4000))


def test_a_wide_table_is_set_in_parts_each_with_its_days() -> None:
    data = paper.render(documents.document(Section("wide", "Wide", (documents.doses(8),))))
    joined = "\n".join(texts(data))
    parts = joined.count("Product dosed, by operating day (")
    assert parts >= 4
    assert joined.count("07 Oct") == parts
    assert all(f"POINT-{number}" in joined for number in range(8))


@pytest.mark.parametrize("page", ["A4", "Letter"])
def test_nothing_is_painted_outside_the_margins(page: str) -> None:
    """Long names, 31 days by 40 columns, words without blanks: the pixels of every margin stay white."""
    wide = documents.document(
        Section("wide", "Wide", (documents.doses(8), documents.words(6, "x" * 400), documents.strips(15))),
        works_name="Państwowe Przedsiębiorstwo Wodociągów i Kanalizacji nad Bystrzycą " * 3,
        page=page,
        cover=(("A name that is much longer than its column is wide", "Υ" * 300),),
    )
    file = pypdfium2.PdfDocument(paper.render(wide))
    assert len(file) >= 6
    for sheet in file:
        picture = sheet.render(scale=1, grayscale=True).to_pil()
        width, height = picture.size
        margin = 40
        for box in (
            (0, 0, margin, height),
            (width - margin, 0, width, height),
            (0, 0, width, 22),
            (0, height - 20, width, height),
        ):
            assert picture.crop(box).getextrema()[0] > 250
    file.close()


@pytest.mark.parametrize(
    "words", ["Zażółć gęślą jaźń", "Υπολειμματικό χλώριο", "Остаточный хлор", "Mg(OH)₂ ≤ 0.05 µg/L → 3 °dH"]
)
def test_other_scripts_are_printed_and_read_back(words: str) -> None:
    assert not faces.absent(words)
    assert words in "".join(texts(paper.render(documents.document(Section("s", words, (Text(words),))))))


def test_what_the_faces_cannot_print_is_known() -> None:
    assert faces.absent("水 HYPO") == {"水"}


def test_markup_in_words_stays_words() -> None:
    text = "<b>not bold</b> & <para>"
    data = paper.render(
        documents.document(Section("s", text, (Text(text), Table("t", text, (Column(text),), ((Cell(text),),)))))
    )
    assert "".join(texts(data)).count("<b>not bold</b> &") >= 3


def test_readable_in_black_and_white() -> None:
    """No text lighter than a grey that keeps 4.5 : 1 on white (WCAG 2.2, 1.4.3), when colours are taken out."""

    def luminance(colour: Color) -> float:
        parts = colour.rgb()
        linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    for colour in (ink.INK, ink.QUIET, ink.WATER, picture.PAPER["need"], picture.PAPER["action"]):
        assert 1.05 / (luminance(colour) + 0.05) >= 4.5


def test_the_faces_are_those_cut_from_the_font(tmp_path: Path) -> None:
    kept = Path(faces.__file__).parent / "faces"
    for name, path in cut_faces.cut(tmp_path).items():
        assert path.read_bytes() == (kept / f"Inter-{name}.ttf").read_bytes()


def test_figures_have_one_width() -> None:
    faces.register()
    for name in (faces.REGULAR, faces.SEMIBOLD):
        assert len({round(faces.width(figure, name, 10), 4) for figure in "0123456789"}) == 1


def test_content_of_another_version_is_refused() -> None:
    plain = document.to_plain(documents.document()) | {"content_version": 99}
    with pytest.raises(ValueError, match="99"):
        document.from_plain(plain)
