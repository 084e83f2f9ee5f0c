"""Figures, deviations, reports and sites as the API writes them. No names of people, except those printed in a report."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from typing import Any

from plant.deviations.queries import DeviationView
from plant.dosing.figures import DayDose, Figure
from plant.reports import facts
from plant.reports.models import Report
from plant.reports.pdf.document import Document
from plant.works import parameters
from plant.works.stated import Stated

SITE_KINDS = ("sample_point", "meter", "vessel", "dosing_point")


def moment(at: dt.datetime) -> str:
    """RFC 3339, in UTC."""
    return at.astimezone(dt.UTC).isoformat(timespec="seconds").replace("+00:00", "Z")


def figure(found: Figure) -> dict[str, Any]:
    """A number with unit, standard uncertainty and what is to be said of it; ``value`` is null where it isn't known."""
    return {"value": found.value, "unit": found.unit, "sd": found.sd, "remarks": list(found.remarks)}


def dose(row: DayDose) -> dict[str, Any]:
    return {
        "day": row.day.isoformat(),
        "dosing_point": row.dosing_point,
        "product": row.product,
        "dose_basis": row.dose_basis,
        "volume_ml": figure(row.volume_ml),
        "product_kg": figure(row.product_kg),
        "active_kg": figure(row.active_kg),
        "used_mg_l": figure(row.used_mg_l),
        "design_mg_l": figure(row.design_mg_l),
        "need_mg_l": figure(row.need_mg_l),
        "ratio": row.ratio,
        "expected": row.expected,
        "weak": row.weak,
        "interpolated": row.interpolated,
        "corrected": row.corrected,
        "remarks": list(row.remarks),
    }


def deviation(view: DeviationView) -> dict[str, Any]:
    return {
        "ref": view.ref,
        "code": view.code,
        "kind": view.kind,
        "level": view.level,
        "subject": view.subject,
        "parameter": view.parameter,
        "raised_for": view.raised_for.isoformat(),
        "last_day": view.last_day.isoformat(),
        "since": moment(view.since),
        "raised_at": moment(view.raised_at),
        "value": view.value,
        "limit": view.limit,
        "sentence": view.sentence,
        "likely_causes": list(view.likely_causes),
        "state": view.state,
        "open": view.open,
        "events": [{"ref": event.ref, "kind": event.kind, "at": moment(event.at)} for event in view.events],
    }


def report(found: Report, address: str) -> dict[str, Any]:
    return {
        "month": found.month,
        "number": found.number,
        "revision": found.revision,
        "issued_at": moment(found.issued_at),
        "certified_by": found.certified_name,
        "reason": found.reason,
        "pdf_sha256": found.pdf_hash,
        "figures": address,
        "pdf": f"{address}/pdf",
    }


def report_figures(document: Document) -> Iterator[dict[str, Any]]:
    """Every cell of every table as printed, with the number before rounding where it is one."""
    for fact in facts.facts(document):
        yield {
            "section": fact.section,
            "table": fact.table,
            "row": fact.row,
            "quantity": fact.quantity,
            "unit": fact.unit,
            "printed": fact.printed,
            "value": fact.value,
            "mark": fact.mark,
        }


def sites(stated: Stated, at: dt.datetime) -> list[dict[str, str]]:
    return [
        {"code": code, "kind": kind, "name": str(value.get("name", ""))}
        for kind in SITE_KINDS
        for code, value in stated.in_force(kind, at)
    ]


def known_parameters(stated: Stated, at: dt.datetime) -> list[dict[str, Any]]:
    """Unit "" where a site's own unit holds (a meter's, a product's) or there is none (pH)."""
    found = parameters.known(stated, at)
    return [{"name": one.name, "label": one.label, "unit": one.unit, "sites": list(one.sites)} for one in found.values()]
