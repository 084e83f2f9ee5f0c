"""The OpenAPI 3.1 document. Written here; the tests hold it against the addresses, and Schemathesis against the answers."""

from __future__ import annotations

from typing import Any

from plant.api import asking, batches, body, problems, schemas, scopes

VERSION = "1.0.0"

_ABOUT = f"""\
A control system or a laboratory sends readings; others read comparison, deviations and issued reports.

A token belongs to one device at one works and is made by the administrator of the works (Settings, Devices and tokens). Send it
with every request, as `Authorization: Bearer` and the token. Another works' token finds nothing.

A batch has an id that the sender makes: a UUID. Send the same batch under the same id until it is answered with 200 or 201;
however often that is, it is taken once. At most {batches.MOST_ROWS:,} readings and {body.MOST_BYTES // 1_000_000} MB a batch.
Corrections are made by people, not through this door: another value for the same sample and time is kept, marked as a
conflict, and settled by a person.

Problems are answered as `application/problem+json` (RFC 9457). All doses are advice to a licensed person, never an instruction.
"""

EXAMPLE = {
    "readings": [
        {
            "site": "ENTRY",
            "timestamp": "2026-03-01T07:00:00Z",
            "parameter": "free_chlorine",
            "value": "0.52",
            "unit": "mg/L",
            "method": "online analyser",
        }
    ]
}

_PROBLEMS = {
    400: "Not JSON that can be kept.",
    401: "No token, or none in use.",
    403: "The token lacks the scope.",
    404: "No such works, as far as this token goes, or no such thing in it.",
    405: "Another method than this address takes.",
    409: "Another content was sent under this id before.",
    413: "Too large.",
    415: "Not application/json.",
    422: "Understood, and not acceptable; the detail says why.",
    429: "Too many requests in a minute; Retry-After says how long to wait.",
    503: "The database does not answer at the moment; send the same again.",
}
_USUAL = (401, 403, 404, 405, 422, 429, 503)


def _problem(status: int) -> dict[str, Any]:
    return {"description": _PROBLEMS[status], "content": {problems.MEDIA_TYPE: {"schema": schemas.ref("Problem")}}}


def _json(schema: dict[str, Any], about: str) -> dict[str, Any]:
    return {"description": about, "content": {"application/json": {"schema": schema}}}


def _in_path(name: str, about: str, schema: dict[str, Any]) -> dict[str, Any]:
    return {"name": name, "in": "path", "required": True, "description": about, "schema": schema}


def _in_query(name: str, about: str, schema: dict[str, Any]) -> dict[str, Any]:
    return {"name": name, "in": "query", "description": about, "schema": schema}


def _operation(
    name: str,
    summary: str,
    answers: dict[str, Any],
    *,
    scope: str = "",
    asked: tuple[dict[str, Any], ...] = (),
    taken: dict[str, Any] | None = None,
) -> dict[str, Any]:
    statuses = sorted({*_USUAL, *((400, 409, 413, 415) if taken else ())})
    out: dict[str, Any] = {
        "operationId": name,
        "summary": summary,
        "description": f"Scope: {scope}." if scope else "Any token of the works.",
        "security": [{"token": []}],
        "responses": answers | {str(status): _problem(status) for status in statuses},
    }
    if asked:
        out["parameters"] = list(asked)
    if taken is not None:
        content = {"schema": taken, "examples": {"one reading": {"value": EXAMPLE}}}
        out["requestBody"] = {"required": True, "content": {"application/json": content}}
    return out


_CODE = _in_path("code", "Code of the works.", {"type": "string", "pattern": "^[-a-zA-Z0-9_]+$", "maxLength": 24})
_MONTH = _in_path("month", "Month, YYYY-MM.", {"type": "string", "pattern": "^[0-9]{4}-[0-9]{2}$"}) | {"example": "2026-01"}
_REVISION = _in_path("revision", "1 for the first issue.", {"type": "integer", "minimum": 0, "maximum": 9999}) | {"example": 1}
_DAYS = (
    _in_query("first", f"First operating day; at most {asking.LONGEST_DAYS} days up to the last.", schemas.DAY),
    _in_query("last", "Last operating day; without it today.", schemas.DAY),
    _in_query("limit", "Rows a page.", {"type": "integer", "minimum": 1, "maximum": asking.MOST_ROWS, "default": 100}),
    _in_query("after", "Where the page before ended. Follow its “next” instead of making this.", {"type": "string"}),
)
_STATE = _in_query("state", "Only those that are open, or all.", {"type": "string", "enum": ["open", "all"], "default": "all"})
_AT = "/api/w/{code}"

_PATHS: dict[str, Any] = {
    f"{_AT}/": {
        "parameters": [_CODE],
        "get": _operation("works", "The works, its sites and parameters", {"200": _json(schemas.ref("Works"), "The works.")}),
    },
    f"{_AT}/batches/{{batch}}": {
        "parameters": [
            _CODE,
            _in_path("batch", "Id of the batch, made by the sender, new for each.", {"type": "string", "format": "uuid"}),
        ],
        "put": _operation(
            "send_readings",
            "Send a batch of readings",
            {
                "200": _json(schemas.ref("BatchAnswer"), "Nothing was new: sent before, with the answer it had then."),
                "201": _json(schemas.ref("BatchAnswer"), "Taken as one entry. Rows may be refused: look at “refused”."),
            },
            scope=scopes.READINGS_WRITE,
            taken=schemas.ref("Batch"),
        ),
    },
    f"{_AT}/comparison": {
        "parameters": [_CODE],
        "get": _operation(
            "comparison",
            "Doses used, designed and needed, day by day",
            {"200": _json(schemas.page_of("Dose"), "A page, by day and dosing point.")},
            scope=scopes.COMPARISON_READ,
            asked=_DAYS,
        ),
    },
    f"{_AT}/deviations": {
        "parameters": [_CODE],
        "get": _operation(
            "deviations",
            "Deviations of some days",
            {"200": _json(schemas.page_of("Deviation"), "A page, by the day they were raised for.")},
            scope=scopes.DEVIATIONS_READ,
            asked=(*_DAYS, _STATE),
        ),
    },
    f"{_AT}/reports": {
        "parameters": [_CODE],
        "get": _operation(
            "reports",
            "Issued reports",
            {"200": _json(schemas.shape({"rows": schemas.listing(schemas.ref("Report"))}), "All issues, newest month first.")},
            scope=scopes.REPORTS_READ,
        ),
    },
    f"{_AT}/reports/{{month}}/{{revision}}": {
        "parameters": [_CODE, _MONTH, _REVISION],
        "get": _operation(
            "report",
            "The figures of an issued report",
            {"200": _json(schemas.ref("ReportFigures"), "Every cell of its tables, as printed.")},
            scope=scopes.REPORTS_READ,
        ),
    },
    f"{_AT}/reports/{{month}}/{{revision}}/pdf": {
        "parameters": [_CODE, _MONTH, _REVISION],
        "get": _operation(
            "report_pdf",
            "The PDF of an issued report",
            {"200": {"description": "The bytes that were handed out.", "content": {"application/pdf": {}}}},
            scope=scopes.REPORTS_READ,
        ),
    },
}

DOCUMENT: dict[str, Any] = {
    "openapi": "3.1.0",
    "info": {"title": "Weirbook", "version": VERSION, "description": _ABOUT},
    "paths": _PATHS,
    "components": {
        "schemas": schemas.SCHEMAS,
        "securitySchemes": {"token": {"type": "http", "scheme": "bearer", "description": "The token of a device."}},
    },
}
