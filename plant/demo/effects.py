"""What incidents do: to feeders, tanks, the raw water, and to what is written down."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from plant.demo.clockwork import Grid
from plant.demo.plan import Incident, Plan

KINDS = {
    "feeder_drift": "the feeder gives more (or less) by ``size`` a day, until somebody recalibrates it",
    "feeder_ramp": "the feeder gives ``size`` more (or less) after two thirds of the time, and goes on so until mended",
    "feeder_step": "the feeder gives ``size`` more (or less) from one hour to the next, until mended",
    "feeder_stop": "the feeder gives only the share ``size``",
    "weak_lot": "the next load holds only the share ``size`` of what its certificate says",
    "leak": "``size`` kg an hour leave the tank besides the feed",
    "stuck": "the gauge shows what it showed at the start",
    "wrong_reading": "one value is written down ``size`` times what was read (a lost decimal point)",
    "missing_round": "nobody does the rounds",
    "not_taken": "the line is left empty; ``words`` is the reason given, if any",
    "unbooked_delivery": "the next load is not booked, or booked only ``size`` days later",
    "wrong_booking": "the next load is booked as ``size`` times its quantity and corrected the day after",
    "raw_water_change": "calcium rises by ``size`` mg/L and alkalinity with it",
    "demand_change": "the water takes ``size`` mg/L more chlorine within a day",
    "late_entry": "the rounds are written down ``size`` days later, from paper",
    "meter_error": "the treated water meter counts the share ``size``",
    "meter_change": "the meter is exchanged; the new one starts at ``size``",
    "out_of_service": "the dosing point is taken out of service and back in",
    "second_thoughts": "a value is written down wrong and corrected half an hour later with a reason",
}


@dataclass
class Effects:
    """Incidents as hourly arrays and lists, by subject."""

    gain: dict[str, np.ndarray] = field(default_factory=dict)
    leak_kg_h: dict[str, np.ndarray] = field(default_factory=dict)
    water: dict[str, np.ndarray] = field(default_factory=dict)
    meter: dict[str, np.ndarray] = field(default_factory=dict)
    next_load: dict[str, list[tuple[float, Incident]]] = field(default_factory=dict)
    on_paper: list[tuple[float, float, Incident]] = field(default_factory=list)


def effects(plan: Plan, grid: Grid, incidents: list[Incident]) -> Effects:
    """The effects of all incidents of a simulation."""
    out = Effects()
    hours = np.arange(grid.hours)
    for incident in incidents:
        start, end = grid.hour_of_day(incident.start), grid.hour_of_day(incident.end)
        during = (hours >= start) & (hours < end)
        ones, zeros = np.ones(grid.hours), np.zeros(grid.hours)
        if incident.what == "feeder_drift":
            slope = incident.size * (hours - start) / 24
            gain = out.gain.setdefault(incident.subject, ones)
            gain *= np.where(during, 1 + slope, 1.0)
        elif incident.what in ("feeder_ramp", "feeder_step"):
            whole = (end - start) * 2 / 3 if incident.what == "feeder_ramp" else 1.0
            reached = incident.size * np.clip((hours - start) / whole, 0, 1)
            out.gain[incident.subject] = out.gain.get(incident.subject, ones) * np.where(during, 1 + reached, 1.0)
        elif incident.what == "demand_change":
            ramp = incident.size * np.clip((hours - start) / 12, 0, 1) * np.clip((end - hours) / 12, 0, 1)
            out.water["chlorine_demand"] = out.water.get("chlorine_demand", 0.0) + ramp
        elif incident.what in ("feeder_stop", "out_of_service"):
            share = incident.size if incident.what == "feeder_stop" else 0.0
            out.gain.setdefault(incident.subject, ones)[during] *= share
            if incident.what == "out_of_service":
                out.on_paper.append((start, end, incident))
        elif incident.what == "leak":
            out.leak_kg_h.setdefault(incident.subject, zeros)[during] += incident.size
        elif incident.what == "raw_water_change":
            ramp = incident.size * np.clip((hours - start) / 12, 0, 1) * np.clip((end - hours) / 12, 0, 1)
            out.water["calcium"] = out.water.get("calcium", 0.0) + ramp
            out.water["alkalinity"] = out.water.get("alkalinity", 0.0) + 2.2 * ramp
        elif incident.what == "meter_error":
            out.meter.setdefault(incident.subject, ones)[during] *= incident.size
        elif incident.what in ("weak_lot", "unbooked_delivery", "wrong_booking"):
            out.next_load.setdefault(incident.subject, []).append((start, incident))
        else:
            out.on_paper.append((start, end, incident))
    return out
