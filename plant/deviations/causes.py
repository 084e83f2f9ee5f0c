"""The likely causes of a finding, likeliest first, each with its evidence in a sentence.

The likelihoods only put the causes in order; they are judgements of the trade written down (common practice, no source).
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from statistics import median

from plant.deviations import clues
from plant.deviations.clues import Clues
from plant.deviations.evidence import Day
from plant.deviations.findings import Cause, Finding

MOST = 4
CLEAR_SDS = 2.5
UNKNOWN = Cause("unknown", 0.05, "nothing on record points to a cause")


def likely(finding: Finding, day: Day, found: Sequence[Finding]) -> tuple[Cause, ...]:
    """Up to four causes. A finding that brought its own keeps them."""
    if finding.causes:
        return finding.causes
    causes = _BY_KIND.get(finding.kind, _of_water)(finding, day, found)
    best: dict[str, Cause] = {}
    for cause in causes:
        if cause.name not in best or best[cause.name].likelihood < cause.likelihood:
            best[cause.name] = cause
    ordered = sorted(best.values(), key=lambda cause: -cause.likelihood)[:MOST]
    return tuple(ordered) or (UNKNOWN,)


def _of_dose(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
    code = finding.subject
    since = max(day.of.calendar.day_of(finding.since), day.day - dt.timedelta(days=30))
    known = clues.gather(day, code, since)
    if known is None:
        return []
    size = finding.size or 0.0
    if finding.parameter:
        return _of_response(known, size)
    out = [*_of_instruments(known, size, found), *_of_process(known, size), *_of_feeding(known, size)]
    if known.unknown_days:
        out.append(Cause("missing_readings", 0.3, f"{known.unknown_days} days since then could not be reckoned"))
    return out


def _of_instruments(known: Clues, size: float, found: Sequence[Finding]) -> list[Cause]:
    out = []
    if known.others and abs(size) > 0.02:
        alike = [other for other in known.others if other * size > 0 and 0.4 < other / size < 2.5]
        if len(alike) == len(known.others) or (len(alike) >= 2 and len(alike) >= 0.6 * len(known.others)):
            words = f"{len(alike)} other doses on {known.point.meter} moved with it, by {100 * median(alike):+.0f} %"
            out.append(Cause("meter_error", 0.85 if len(alike) > 1 else 0.7, words))
    if any(item.kind == "stuck" and item.subject in known.point.vessels for item in found) or known.still >= 3:
        words = f"the last {known.still} readings of the vessel are the same" if known.still >= 3 else "its gauge does not move"
        out.append(Cause("stuck_sensor", 0.95, words))
    if any(item.kind == "stuck" and item.subject == known.point.meter for item in found):
        out.append(Cause("meter_error", 0.9, f"{known.point.meter} does not move"))
    if known.given_back:
        out.append(Cause("wrong_reading", 0.9, "two days off to opposite sides by the same amount: the reading between them"))
    if known.negative:
        out.append(Cause("unbooked_delivery", 0.92, "more in the vessel than before, and nothing was booked in"))
        out.append(Cause("wrong_reading", 0.5, "a negative use can come from one wrong level"))
    if any(item.kind == "suspicious_reading" and item.subject in _sites(known) for item in found):
        out.append(Cause("wrong_reading", 0.8, "a reading it rests on is marked doubtful"))
    return out


def _sites(known: Clues) -> set[str]:
    return {*known.point.vessels, known.point.meter, known.point.feed_meter or ""}


def _of_process(known: Clues, size: float) -> list[Cause]:
    out = []
    if known.empty and size < 0:
        out.append(Cause("vessel_empty", 0.9, "the vessel stood at its outlet"))
    # A need that moved far less than the dose does not explain it.
    if known.need is not None and abs(known.need) > 0.04 and known.need * size > 0 and abs(known.need) > 0.5 * abs(size):
        out.append(Cause("raw_water_change", 0.8, f"the need moved the same way, by {100 * known.need:+.0f} % of design"))
    if known.used_over_need is not None and abs(known.used_over_need) < 0.05 and abs(size) > 0.05:
        out.append(Cause("stale_design", 0.55, "what is used is what the water needs; the stated design is not"))
    if known.feeder is not None and abs(known.feeder) > 0.04 and known.feeder * size > 0:
        out.append(Cause("process_change", 0.6, f"the feeder was set {100 * known.feeder:+.0f} % differently"))
    return out


def _of_feeding(known: Clues, size: float) -> list[Cause]:
    response, name = known.response_sds, known.response_name.replace("_", " ")
    steady_feeder = known.feeder is not None and abs(known.feeder) <= 0.04
    if size > 0:
        if response is None:
            leak = 0.55 if steady_feeder else 0.35
            return [
                Cause("feeder_drift", 0.5, "more is used, and no reading tells whether it reached the water"),
                Cause(
                    "leak",
                    leak,
                    "more leaves the vessel" + (", and the feeder says nothing has changed" if steady_feeder else ""),
                ),
            ]
        if response > CLEAR_SDS:
            return [
                Cause("feeder_drift", 0.75, f"more is used, and {name} moved with it ({response:+.1f} sd)"),
                Cause("process_change", 0.2, "a setting may have been changed"),
            ]
        causes = [
            Cause("leak", 0.7 if steady_feeder else 0.6, f"more is used, and {name} did not follow ({response:+.1f} sd)"),
            Cause("raw_water_change", 0.4, f"a higher demand would use more and leave {name} where it was"),
            Cause("feeder_drift", 0.38, "the feeder may deliver more"),
        ]
        if known.strength_short_pct and known.strength_short_pct > 5:
            causes.append(
                Cause("weak_product", 0.65, f"last strength test {known.strength_short_pct:.0f} % below the certificate")
            )
        return causes
    if response is not None and response < -CLEAR_SDS:
        return [
            Cause("feeder_drift", 0.8, f"less is used, and {name} moved with it ({response:+.1f} sd)"),
            Cause("process_change", 0.2, "a setting may have been changed"),
        ]
    return [
        Cause("feeder_drift", 0.55, "less is used than before"),
        Cause("raw_water_change", 0.3, "a lower demand would use less"),
        Cause("unbooked_delivery", 0.25, "something poured in and not booked would look the same"),
    ]


def _of_response(known: Clues, size: float) -> list[Cause]:
    """The water answers differently to a dose that has not changed."""
    name = known.response_name.replace("_", " ")
    steady = known.used is None or abs(known.used) < 0.05
    out = []
    # A change within a few days after a delivery speaks of the lot; the test may date it a day early.
    fresh = known.delivered_days_before is not None and -1 <= known.delivered_days_before <= 4
    if size < 0:
        weak = 0.5 + (0.25 if fresh else 0.0)
        words = f"{name} fell while the dose stayed" if steady else f"{name} fell"
        if fresh:
            words += "; it began when a new lot came in"
        out.append(Cause("weak_product", weak, words))
        life = known.product.shelf_life_days
        if known.lot_days is not None and life and known.lot_days > life:
            out.append(Cause("aged_stock", 0.7, f"the newest lot is {known.lot_days} days old, {life:g} are stated"))
    out.append(Cause("raw_water_change", 0.55, f"the water's own demand changed: {name} moved and the dose did not"))
    if known.need is not None and abs(known.need) > 0.04:
        out.append(Cause("raw_water_change", 0.8, f"the need moved by {100 * known.need:+.0f} % of design"))
    if known.used is not None and not steady and known.used * size > 0:
        out.append(Cause("feeder_drift", 0.75, f"the dose moved with it, by {100 * known.used:+.0f} %"))
    out.append(Cause("wrong_reading", 0.2, f"the {name} test itself may be off"))
    return out


def _of_stock(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
    feeds = [point for point in day.stated.dosing_points(day.moment) if finding.subject in point.vessels]
    out = []
    if (finding.size or 0.0) > 0:
        out.append(Cause("unbooked_delivery", 0.8, "more in the vessel than the book says"))
    else:
        out.append(Cause("leak", 0.6, "less in the vessel than the book says"))
        out.append(Cause("feeder_drift", 0.35, "or more was fed than the book knows of"))
    out.append(Cause("wrong_reading", 0.35, "one wrong level would look the same"))
    for point in feeds:
        for other in found:
            if other.subject == point.code and other.kind in ("dose_vs_design", "drift"):
                out += likely(other, day, found) if other.causes else _of_dose(other, day, found)
    if any(item.kind == "stuck" and item.subject == finding.subject for item in found):
        out.append(Cause("stuck_sensor", 0.95, "its gauge does not move"))
    return out


def _of_water(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
    """A value in the water outside its limit: the doses that end in it are looked at."""
    out = []
    if any(item.kind == "suspicious_reading" and item.key[2:] == finding.key[2:] for item in found):
        out.append(Cause("wrong_reading", 0.7, "the value is marked doubtful"))
    low = finding.limit.startswith("≥") or finding.kind == "held_below"
    since = max(day.of.calendar.day_of(finding.since), day.day - dt.timedelta(days=30))
    for point in day.stated.dosing_points(day.moment):
        if point.sample_point != finding.subject:
            continue
        known = clues.gather(day, point.code, since)
        if known is None or known.response_name != finding.parameter:
            continue
        if known.used is not None and abs(known.used) > 0.05 and (known.used < 0) == low:
            out.append(Cause("feeder_drift", 0.7, f"{point.code} uses {100 * known.used:+.0f} % against before"))
        elif known.used is not None:
            out += _of_response(known, -1.0 if low else 1.0)
    return out


def _fixed(name: str, likelihood: float, words: str) -> Callable[[Finding, Day, Sequence[Finding]], list[Cause]]:
    def cause(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
        return [Cause(name, likelihood, words)]

    return cause


def _of_strength(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
    aged = any(item.kind == "lot_age" and item.subject == finding.subject for item in found)
    return [
        Cause("aged_stock", 0.8 if aged else 0.4, "strength falls with time and warmth"),
        Cause("weak_product", 0.6, "the lot may have come weaker than its certificate"),
    ]


def _of_stuck(finding: Finding, day: Day, found: Sequence[Finding]) -> list[Cause]:
    name = "meter_error" if finding.subject_kind == "meter" else "stuck_sensor"
    return [Cause("stuck_sensor", 0.9, finding.sentence)] + (
        [Cause(name, 0.5, "a counter that stands still counts nothing")] if name == "meter_error" else []
    )


_BY_KIND: dict[str, Callable[[Finding, Day, Sequence[Finding]], list[Cause]]] = {
    "dose_vs_design": _of_dose,
    "dose_vs_need": _of_dose,
    "drift": _of_dose,
    "certified_maximum": _of_dose,
    "stock_loss": _of_stock,
    "stuck": _of_stuck,
    "missing": _fixed("missing_readings", 0.9, "the value was due and nobody has entered it, or said why not"),
    "lot_age": _fixed("aged_stock", 0.9, "the lot is past its date"),
    "strength_low": _of_strength,
    "days_of_supply": _fixed("unknown", 0.1, "use and deliveries on record explain it: see the stock page"),
    "holding": _fixed("unknown", 0.1, "deliveries on record explain it: see the stock page"),
}
