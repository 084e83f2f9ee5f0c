"""Documents made by hand, for the writer of the PDF alone."""

from __future__ import annotations

import random

from plant.reports.pdf.document import Cell, Column, Document, Pairs, Picture, Section, Signature, Table, Text


def doses(points: int, days: int = 31) -> Table:
    """A daily table with five columns a dosing point and a row a day; the same numbers each time."""
    chance = random.Random(1)
    columns = [Column("Day", number=False), Column("Treated", "ML")]
    for point in range(points):
        columns += [
            Column(head, unit, f"POINT-{point}")
            for head, unit in (("product", "kg"), ("used", "mg/L"), ("± 2 sd", "mg/L"), ("design", "mg/L"), ("need", "mg/L"))
        ]
    rows = [
        (
            Cell(f"{day:02d} Oct"),
            *(Cell(f"{(value := chance.uniform(1, 900)):.3f}", value, "used:X:2026-10-01") for _ in columns[1:]),
        )
        for day in range(1, days + 1)
    ]
    rows.append((Cell("Month"), *(Cell("999.999", 999.999) for _ in columns[1:])))
    return Table("doses", "Product dosed, by operating day", tuple(columns), tuple(rows), 1, 1, ("A note.",))


def words(rows: int, text: str = "The feeder was raised from 42 to 48 %. ") -> Table:
    """A table of words that wrap."""
    columns = (Column("No."), Column("What", number=False, wraps=True), Column("Done", number=False, wraps=True))
    return Table(
        "events",
        "Deviations",
        columns,
        tuple(
            (Cell(str(number), float(number)), Cell("Free chlorine below the action limit"), Cell(text * (1 + number % 3)))
            for number in range(rows)
        ),
    )


def strips(count: int) -> Picture:
    """Dose strips, one of them unknown, one weak."""
    return Picture(
        "dose_strips",
        {
            "strips": [
                {
                    "title": f"POINT-{number}",
                    "unit": "mg/L",
                    "used": None if number == 3 else 1.1 + number / 10,
                    "design": 1.1,
                    "need": 1.2,
                    "used_sd": 0.05,
                    "weak": number == 1,
                    "why_unknown": "no dip",
                }
                for number in range(count)
            ]
        },
        "Used, designed and needed",
        "Dose of the month",
    )


def document(*sections: Section, **changed: object) -> Document:
    """A whole report; without sections one of every kind of block."""
    made = sections or (
        Section("summary", "Summary", (Text("The works treated 412.3 ML.", "lead"), Text("Small print.", "small"), strips(4))),
        Section("daily", "Daily table", (doses(3),)),
        Section("deviations", "Deviations", (words(12),)),
        Section(
            "corrections", "Corrections", (Table("none", "Corrections", (Column("What"),), (), empty="Nothing was corrected."),)
        ),
        Section("proof", "Pairs", (Pairs((("Name", "Value"),)),)),
    )
    fields: dict[str, object] = {
        "title": "Monthly operating report",
        "works_name": "Kestrel Ford Water Works",
        "works_code": "KFW",
        "month": "2026-10",
        "month_words": "October 2026",
        "number": "KFW-2026-10",
        "revision": 1,
        "status": "Issued",
        "draft": False,
        "issued_at": "2026-11-03T08:12:00+00:00",
        "form_note": "Not the regulator's form: no approval reference is stated.",
        "cover": (("Works", "Kestrel Ford Water Works (KFW)"), ("Permit number", "DW-12")),
        "signatures": (
            Signature("Prepared by", "Sam Sundby", "Licence L-1001, class III", "2026-11-03 09:05 local time", "Signed"),
            Signature("Certified by", "Mira Maas", "Licence L-1002", "2026-11-03 09:12 local time", "Signed"),
        ),
        "sections": tuple(made),
        "own_wording": "I certify that this report is complete.",
        "closing": (("Book", "KFW"),),
    }
    return Document(**(fields | changed))  # type: ignore[arg-type]
