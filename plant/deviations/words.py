"""Kinds, levels, states and causes as a person reads them."""

from __future__ import annotations

KINDS = {
    "bound": "outside its limit",
    "held_below": "too low for too long",
    "held_above": "too high for too long",
    "share_of_month": "too much of the month outside",
    "running_mean": "running mean outside",
    "rate_of_change": "changing too fast",
    "stuck": "not moving",
    "missing": "missing",
    "dose_vs_design": "dose away from design",
    "dose_vs_need": "dose away from need",
    "certified_maximum": "above the certified maximum",
    "drift": "drifting",
    "stock_loss": "stock not explained",
    "days_of_supply": "running out",
    "holding": "more held than stated",
    "lot_age": "lot too old",
    "strength_low": "weaker than its certificate",
    "inactivation_ratio": "inactivation too low",
    "suspicious_reading": "doubtful reading",
}
CAUSES = {
    "feeder_drift": "the feeder is drifting",
    "weak_product": "the product is weak",
    "leak": "something leaks",
    "raw_water_change": "the raw water has changed",
    "wrong_reading": "a reading is wrong",
    "stuck_sensor": "a sensor is stuck",
    "meter_error": "the flow meter is wrong",
    "unbooked_delivery": "a delivery was not booked",
    "missing_readings": "readings are missing",
    "vessel_empty": "the vessel is empty",
    "aged_stock": "the stock is old",
    "stale_design": "the design dose is out of date",
    "process_change": "the process was changed",
    "unknown": "not known",
}
STATES = {
    "raised": "nobody has it yet",
    "acknowledged": "acknowledged",
    "acting": "being acted on",
    "verified": "back inside, not closed",
    "closed": "closed",
    "corrected_away": "corrected away",
}
EVENTS = {
    "raised": "Raised",
    "finding": "Found again",
    "acknowledged": "Acknowledged",
    "told": "Told",
    "cause": "Cause",
    "action": "Done",
    "verified": "Back inside",
    "closed": "Closed",
    "comment": "Comment",
    "corrected_away": "Corrected",
    "approved": "Correction approved",
}


def title(kind: str, subject: str, parameter: str, names: dict[str, str], labels: dict[str, str]) -> str:
    """What it is, in one line: the parameter and the place by their names, and what is wrong."""
    place = names.get(subject, subject)
    label = labels.get(parameter, parameter.replace("_", " ")) if parameter else ""
    about = f"{label}, {place}" if label and place else label or place
    return f"{about}: {KINDS.get(kind, kind.replace('_', ' '))}"
