"""From a gathered month to the whole document: cover, sections in the order the works has chosen, proof."""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from plant.ledger import canonical
from plant.ledger.models import Entry
from plant.reports.month import Month
from plant.reports.parts import (
    chemicals,
    corrections,
    cost,
    daily,
    deviations,
    disinfection,
    flow,
    lots,
    method,
    missing,
    network,
    quality,
    settings,
    stock,
    summary,
)
from plant.reports.pdf import document, faces, paper
from plant.reports.pdf.document import Document, Section, Signature, Table, Text

SECTIONS: dict[str, Callable[[Month], Section]] = {
    part.KEY: part.section
    for part in (
        summary,
        daily,
        flow,
        chemicals,
        cost,
        stock,
        quality,
        disinfection,
        network,
        deviations,
        missing,
        corrections,
        settings,
        lots,
        method,
    )
}
ALWAYS = ("missing", "corrections", "method")
"""Sections no choice can leave out: a report that hides its gaps and corrections can't be checked."""
ONLY_IF_CHOSEN = frozenset({"cost"})
"""Sections that print only where the works' form names them: what a regulator has no use for."""
UNSIGNED = "Issued from the shell, not signed"


@dataclass(frozen=True)
class Signed:
    """Who signed what, when and how; no name means that nobody did."""

    meaning: str
    name: str = ""
    licence: str = ""
    at: dt.datetime | None = None
    manner: str = UNSIGNED


NOBODY = (Signed("Prepared by"), Signed("Certified by"))


def chosen(month: Month) -> list[str]:
    """The sections in the order the works has chosen, else all; those that may not be left out follow."""
    found = [key for key in month.form.get("sections") or () if key in SECTIONS]
    found = found or [key for key in SECTIONS if key not in ONLY_IF_CHOSEN]
    return found + [key for key in ALWAYS if key not in found]


def sections(month: Month) -> tuple[Section, ...]:
    """The sections of the month as known."""
    return tuple(SECTIONS[key](month) for key in chosen(month))


def figures_hash(found: Sequence[Section]) -> str:
    """What a preparation signs: all sections as they will print."""
    blank = Document("", "", "", "", "", "", 0, "", True, "", "", (), (), tuple(found))
    return canonical.digest(document.to_plain(blank)["sections"])


def draft(month: Month) -> Document:
    """The report as it would print now."""
    return whole(month, sections(month), revision=0, issued_at=month.now, signed=NOBODY, draft=True)


def number_of(month: Month) -> str:
    """What the report of a month is called; revisions share it."""
    return f"{month.book.code}-{month.code}"


def whole(
    month: Month,
    found: Sequence[Section],
    *,
    revision: int,
    issued_at: dt.datetime,
    signed: Sequence[Signed],
    draft: bool = False,
    first: Sequence[Section] = (),
) -> Document:
    """The document with its cover. ``first`` are sections set before all others (what a revision changes)."""
    head = _head(month)
    everything = [*first, *found]
    if month.explanations:
        everything.insert(len(first), _explanations(month))
    status = (
        f"DRAFT of {month.local(month.now)}, not issued"
        if draft
        else "Issued"
        if revision == 1
        else f"Issued, revision {revision}; it replaces revision {revision - 1}"
    )
    made = Document(
        title="Monthly operating report",
        works_name=month.works.name,
        works_code=month.book.code,
        month=month.code,
        month_words=month.words,
        number=number_of(month),
        revision=revision,
        status=status,
        draft=draft,
        issued_at=issued_at.astimezone(dt.UTC).isoformat(timespec="seconds"),
        form_note=_form_note(month),
        cover=_cover(month, issued_at, head),
        signatures=tuple(_signature(month, one, draft) for one in signed),
        sections=tuple(everything),
        own_wording=str(month.form.get("wording", "")),
        page=page(month),
        closing=_proof(month, head, draft),
    )
    return _with_unprintable(made)


def _with_unprintable(made: Document) -> Document:
    """Says which characters the typeface has no form for: they print as empty boxes, and stand whole in the figures."""
    absent = sorted(faces.absent("".join(set(json.dumps(document.to_plain(made), ensure_ascii=False)))))
    if not absent:
        return made
    names = ", ".join(f"U+{ord(character):04X}" for character in absent)
    row = ("Printed as empty boxes", f"{names}: characters the typeface lacks. The figures (CSV, XLSX) hold them whole.")
    return replace(made, closing=(*made.closing, row))


def page(month: Month) -> str:
    """The paper: as stated, else A4 with metric units and Letter with US units."""
    return str(month.form.get("page") or ("Letter" if month.works.units == "us" else "A4"))


def _form_note(month: Month) -> str:
    approval = month.form.get("approval_reference")
    return f"Form approved under {approval}." if approval else "Not the regulator's form: no approval reference is stated."


def _head(month: Month) -> Entry | None:
    return Entry.objects.filter(book=month.book, seq=month.known).first()


def head_hash(month: Month) -> str:
    """Hash of the entry up to which records were known; empty for an empty book."""
    head = _head(month)
    return head.hash if head else ""


def _cover(month: Month, issued_at: dt.datetime, head: Entry | None) -> tuple[tuple[str, str], ...]:
    days = f"{month.local(month.start)} to {month.local(month.end)}"
    known = f"entry {month.known}" + (f", recorded {month.local(head.recorded_at)}" if head else "")
    form, value = month.form, month.works_value
    rows = [
        ("Works", f"{month.works.name} ({month.book.code})"),
        ("Address", str(value.get("address", ""))),
        ("Owner", str(value.get("owner", ""))),
        ("Regulator", "\n".join(str(form[key]) for key in ("regulator", "regulator_address") if form.get(key))),
        ("Permit number", str(form.get("permit_number", ""))),
        ("Report number", number_of(month)),
        ("Month", f"{month.words}: {len(month.days)} operating days, {days} local time ({month.works.timezone})"),
        ("Records known up to", known),
        ("Written", f"{month.local(issued_at)} local time"),
    ]
    return tuple((name, text) for name, text in rows if text)


def _signature(month: Month, one: Signed, draft: bool) -> Signature:
    if not one.name:
        return Signature(one.meaning, "Not signed", manner="Draft" if draft else one.manner)
    return Signature(one.meaning, one.name, one.licence, f"{month.local(one.at)} local time" if one.at else "", one.manner)


def _explanations(month: Month) -> Section:
    columns = (
        document.Column("Open at issue", number=False, wraps=True),
        document.Column("Explanation", number=False, wraps=True),
    )
    rows = tuple(
        (document.Cell(one["open"]), document.Cell(one["why"] or "not explained"))
        for _, one in sorted(month.explanations.items())
    )
    return Section(
        "explanations",
        "Open at issue, and why",
        (
            Text(
                "What was not complete when this report was prepared, with the explanation of the person who prepared it."
                if any(one["why"] for one in month.explanations.values())
                else "What was not complete when this report was issued. Nobody has explained it."
            ),
            Table("explanations", "", columns, rows, 1),
        ),
    )


def _proof(month: Month, head: Entry | None, draft: bool) -> tuple[tuple[str, str], ...]:
    digest = head.hash if head else ""
    rows = [
        ("Book", f"{month.book.code}: head at entry {month.known}"),
        ("Hash of that entry", f"{digest[:32]}\n{digest[32:]}" if digest else "the book is empty"),
        ("Written by", paper.RENDERER),
    ]
    if not draft:
        rows.append(
            (
                "To check this file",
                "The works keeps the SHA-256 of this file; its page “Check a report” says whether a PDF is an issued one, "
                "unaltered.",
            )
        )
    return tuple(rows)


def to_json(made: Document) -> str:
    """The canonical JSON that is stored and hashed."""
    return canonical.text(document.to_plain(made))


def from_json(text: str) -> Document:
    """The document of a stored content. Raises ValueError for a version this program cannot read."""
    return document.from_plain(json.loads(text))


def render(made: Document) -> bytes:
    """The bytes of the PDF."""
    return paper.render(made)
