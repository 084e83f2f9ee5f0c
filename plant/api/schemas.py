"""The shapes of what is sent and answered: the components of the OpenAPI document (JSON Schema 2020-12)."""

from __future__ import annotations

from typing import Any

from plant.api import batches
from plant.api.scopes import SCOPES

Schema = dict[str, Any]

TEXT: Schema = {"type": "string"}
WHOLE: Schema = {"type": "integer", "minimum": 0}
YES_NO: Schema = {"type": "boolean"}
DAY: Schema = {"type": "string", "format": "date"}
MOMENT: Schema = {"type": "string", "format": "date-time"}
NUMBER: Schema = {"type": ["number", "null"]}


def ref(name: str) -> Schema:
    """A component by its name."""
    return {"$ref": f"#/components/schemas/{name}"}


def listing(of: Schema) -> Schema:
    return {"type": "array", "items": of}


def shape(fields: dict[str, Schema], *, optional: tuple[str, ...] = (), about: str = "") -> Schema:
    """An object of exactly these fields, all required but ``optional``."""
    out: Schema = {
        "type": "object",
        "properties": fields,
        "required": [name for name in fields if name not in optional],
        "additionalProperties": False,
    }
    return out | ({"description": about} if about else {})


def said(schema: Schema, about: str) -> Schema:
    return schema | {"description": about}


_READING = shape(
    {
        "site": said(TEXT | {"maxLength": 80}, "Code of a sample point, meter, vessel or dosing point, as under “sites”."),
        "timestamp": said(
            TEXT | {"maxLength": 40},
            "When it was read: ISO 8601 with an offset, 2026-03-01T07:00:00Z. Without one it is the works’ local time. A date "
            "alone is kept as a date. At most ten minutes ahead of the server’s clock.",
        ),
        "parameter": said(TEXT | {"maxLength": 80}, "Name as under “parameters”."),
        "value": said(
            {"type": ["number", "string", "null"], "maxLength": 80},
            "A number; as text “<0.05” or a result in words; null where none was taken. Digits are kept as sent.",
        ),
        "unit": said(TEXT | {"maxLength": 24}, "Unit of the value; empty for pH."),
        "qualifier": said(
            {"type": "string", "enum": ["", "<", ">"]}, "Below or above the value, where the value does not say so."
        ),
        "method": said(TEXT | {"maxLength": 60}, "Method or instrument."),
        "by": said(TEXT | {"maxLength": 80}, "Who read it; without it the device’s name."),
        "note": said(TEXT | {"maxLength": 2000}, "A note; for a value of null the reason."),
        "sample": said(TEXT | {"maxLength": 40}, "Number of the sample."),
        "statistic": said(
            {"type": "string", "enum": ["", "reading", "day_min", "day_max", "day_mean"]},
            "What the value is; without it a reading.",
        ),
    },
    optional=batches.OPTIONAL,
)

_ROW = shape(
    {
        "row": said(WHOLE, "Place in the batch, from 0."),
        "outcome": said({"type": "string", "enum": ["taken", "same", "refused"]}, "same: it was in the book already."),
        "ref": said(TEXT, "Name of the reading in the book, where taken."),
        "doubts": said(TEXT, "What is doubtful about it, where taken: it is kept, and a person settles it."),
        "field": said(TEXT, "Which field was refused."),
        "read": said(TEXT, "What was read there."),
        "expected": said(TEXT, "What would have done."),
    },
    optional=("ref", "doubts", "field", "read", "expected"),
)

_FIGURE = shape(
    {
        "value": NUMBER,
        "unit": TEXT,
        "sd": said(NUMBER, "Standard uncertainty, in the same unit."),
        "remarks": listing(TEXT),
    },
    about="A number; null where it is not known, and then the remarks say why.",
)

_REPORT: dict[str, Schema] = {
    "month": TEXT | {"pattern": r"^\d{4}-\d{2}$"},
    "number": TEXT,
    "revision": WHOLE,
    "issued_at": MOMENT,
    "certified_by": said(TEXT, "As printed."),
    "reason": said(TEXT, "Why it was revised; empty for the first issue."),
    "pdf_sha256": TEXT,
    "figures": said(TEXT, "Address of its figures."),
    "pdf": said(TEXT, "Address of its PDF."),
}

SCHEMAS: dict[str, Schema] = {
    "Problem": {
        "type": "object",
        "description": "Problem details (RFC 9457).",
        "properties": {
            "type": TEXT,
            "title": TEXT,
            "status": {"type": "integer"},
            "detail": said(TEXT, "What is wrong, for a person."),
            "parameter": said(TEXT, "Which parameter is meant."),
            "scope": said(TEXT, "Which scope is lacking."),
            "taken": WHOLE,
            "same": WHOLE,
            "refused": WHOLE,
            "rows": listing(ref("RowAnswer")),
        },
        "required": ["type", "title", "status", "detail"],
    },
    "Reading": _READING,
    "Batch": shape({"readings": listing(ref("Reading")) | {"minItems": 1, "maxItems": batches.MOST_ROWS}}),
    "RowAnswer": _ROW,
    "BatchAnswer": shape(
        {
            "entry": said({"type": ["integer", "null"]}, "Number of the entry in the book; null where nothing was new."),
            "recorded_at": {"type": ["string", "null"], "format": "date-time"},
            "repeated": said(YES_NO, "True where nothing was added: the batch, or every row of it, was here already."),
            "judged": said(YES_NO, "False while its days are still to be judged, which a worker does."),
            "taken": WHOLE,
            "same": WHOLE,
            "refused": said(WHOLE, "Look at this: refused rows are not kept as readings. Mend and send them in a new batch."),
            "rows": listing(ref("RowAnswer")),
        }
    ),
    "Works": shape(
        {
            "code": TEXT,
            "name": TEXT,
            "timezone": TEXT,
            "operating_day_starts": TEXT,
            "device": said(TEXT, "Name of the token."),
            "scopes": listing({"type": "string", "enum": list(SCOPES)}),
            "sites": listing(shape({"code": TEXT, "kind": TEXT, "name": TEXT})),
            "parameters": listing(
                shape(
                    {
                        "name": TEXT,
                        "label": TEXT,
                        "unit": said(TEXT, "Unit it is kept in; empty where the site’s own unit holds, or there is none."),
                        "sites": said(listing(TEXT), "Kinds of site where it is read."),
                    }
                )
            ),
        }
    ),
    "Figure": _FIGURE,
    "Dose": shape(
        {
            "day": DAY,
            "dosing_point": TEXT,
            "product": TEXT,
            "dose_basis": said(TEXT, "What active_kg and the doses are stated as."),
            "volume_ml": said(ref("Figure"), "Water treated, ML."),
            "product_kg": ref("Figure"),
            "active_kg": ref("Figure"),
            "used_mg_l": ref("Figure"),
            "design_mg_l": ref("Figure"),
            "need_mg_l": ref("Figure"),
            "ratio": said(NUMBER, "Used over designed."),
            "expected": said(YES_NO, "False where the point or the works was out of service all day."),
            "weak": said(YES_NO, "True where the day’s use is too little to be judged by itself."),
            "interpolated": YES_NO,
            "corrected": YES_NO,
            "remarks": listing(TEXT),
        },
        about="One dosing point on one operating day. Advice to a licensed person, never an instruction.",
    ),
    "Deviation": shape(
        {
            **dict.fromkeys(("ref", "code", "kind", "level", "subject", "parameter"), TEXT),
            "raised_for": DAY,
            "last_day": said(DAY, "Last day on which it was found."),
            "since": MOMENT,
            "raised_at": MOMENT,
            **dict.fromkeys(("value", "limit", "sentence"), TEXT),
            "likely_causes": listing(TEXT),
            "state": TEXT,
            "open": YES_NO,
            "events": listing(shape({"ref": TEXT, "kind": TEXT, "at": MOMENT})),
        }
    ),
    "Report": shape(_REPORT),
    "ReportFigures": shape(
        _REPORT
        | {
            "rows": listing(
                shape(
                    dict.fromkeys(("section", "table", "row", "quantity", "unit", "printed"), TEXT)
                    | {"value": said(NUMBER, "Before rounding; null for words."), "mark": TEXT}
                )
            )
        }
    ),
}


def page_of(name: str) -> Schema:
    """A page of rows, with the address of the next."""
    return shape({"first": DAY, "last": DAY, "rows": listing(ref(name)), "next": {"type": ["string", "null"]}})
