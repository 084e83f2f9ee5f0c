"""A simulated works written as a works file."""

from __future__ import annotations

import datetime as dt
import json
from typing import Any

from plant.demo.plan import Block, Plan
from plant.demo.simulate import Simulated

_KINDS = (
    "shift", "sample_point", "meter", "product", "vessel", "dosing_point", "design_dose", "limit", "round_line",
    "state", "contact_segment", "opening_stock",
)  # fmt: skip


class Raw(str):
    """A value to be written without quotes: a time, or a number with the digits it was stated in."""


def blocks(plan: Plan) -> dict[str, list[Block]]:
    """All blocks of a plan but its design doses."""
    vessels = [block for feed in plan.feeds for block in (feed.tank, feed.day_tank) if block]
    points = [feed.point | {"product": feed.product["code"], "vessels": [feed.measured["code"]]} for feed in plan.feeds]
    lines: list[Block] = [{"site": line.site, "parameter": line.parameter, "due": _due(line.due)} for line in plan.lines]
    limits = [
        {key: Raw(value) if key in ("low", "high", "limit") else value for key, value in block.items()}
        for block in plan.blocks.get("limit", [])
    ]
    return plan.blocks | {
        "shift": [{"name": name, "starts": f"{starts:%H:%M}"} for name, starts in plan.shifts],
        "product": [feed.product for feed in plan.feeds],
        "vessel": vessels,
        "dosing_point": points,
        "round_line": lines,
        "limit": limits,
    }


def _due(due: str) -> str | list[str]:
    if due == "week":
        return ["Tue"]
    return "day" if due == "evening" else due


def dated(history: Simulated) -> dict[str, list[Block]]:
    """Design doses, opening stock and states, each with its moment."""
    zone = history.grid.calendar.zone
    designs: list[Block] = [
        {
            "dosing_point": point,
            "dose_mg_per_L": dose,
            "effective_from": Raw(at.astimezone(zone).isoformat()),
            "reason": "commissioning" if at == history.grid.start else "restated: the raw water asks for it",
        }
        for at, point, dose in history.designs()
    ]
    states: list[Block] = []
    for incident in history.incidents:
        if incident.what == "out_of_service":
            start, end = history.span(incident)
            for at, word in ((start, "off"), (end, "in_service")):
                moment = Raw(at.astimezone(zone).isoformat())
                states.append(
                    {"dosing_point": incident.subject, "is": word, "effective_from": moment, "reason": incident.words}
                )
    opening: list[Block] = [
        {
            "vessel": block["code"],
            "timestamp": Raw(history.grid.start.astimezone(zone).isoformat()),
            "strength": feed.product["strength"],
            "strength_basis": feed.product["strength_basis"],
        }
        for feed in history.plan.feeds
        for block in (feed.tank, feed.day_tank)
        if block
    ]
    return {"design_dose": designs, "state": states, "opening_stock": opening}


def text(plan: Plan, history: Simulated | None = None) -> str:
    """The works file; with ``history`` its dated statements as well."""
    found = blocks(plan)
    if history is not None:
        found = found | dated(history)
    head: Block = {
        "code": plan.code,
        "name": plan.name,
        "timezone": plan.timezone,
        "operating_day_starts": f"{plan.day_starts:%H:%M}",
        "units": "si",
    }
    parts = ["# An invented works; nothing in it is a real one's.", written("[works]", head)]
    for kind in _KINDS:
        parts += [written(f"[[{kind}]]", block) for block in found.get(kind, [])]
    parts += [written("[[call]]", block) for block in found.get("call", [])]
    parts += [written("[report]", block) for block in found.get("report", [])]
    return "\n\n".join(parts) + "\n"


def written(head: str, keys: Block) -> str:
    """One block as it stands in the file."""
    return "\n".join([head, *(f"{key} = {value(item)}" for key, item in keys.items())])


def value(item: Any) -> str:
    """A TOML value."""
    if isinstance(item, Raw):
        return str(item)
    if isinstance(item, bool):
        return "true" if item else "false"
    if isinstance(item, int | float):
        return repr(item)
    if isinstance(item, dt.time):
        return f'"{item:%H:%M}"'
    if isinstance(item, list | tuple):
        return "[" + ", ".join(value(part) for part in item) + "]"
    if isinstance(item, dict):
        return "{ " + ", ".join(f"{key} = {value(part)}" for key, part in item.items()) + " }"
    return json.dumps(str(item), ensure_ascii=False)
