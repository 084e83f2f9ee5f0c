"""Log credit over the segments of a works: Giardia adds CT ratios, Cryptosporidium adds CT.

Sources: 40 CFR 141.74(b)(4), 141.172(b)(4) and 141.534 (Giardia: logs = 3 x sum of CT / CT99.9),
141.720(a)(2) (Cryptosporidium: sum of CT, then the table); opened. A ratio is never rounded up: 0.995 is
not 1.0 (common practice).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from chemistry import errors
from chemistry.disinfection import contact, ct_tables

Values = Any  # a float or a numpy array


@dataclass(frozen=True)
class Segment:
    """One contact segment during peak hourly flow: volume at minimum level, and what was read at its end."""

    volume_m3: float
    baffling_factor: float
    peak_flow_m3_h: float
    residual_mg_l: float
    temperature_c: float
    ph: float | None = None


@dataclass(frozen=True)
class SegmentResult:
    """What a segment gives: T10, CT, the CT for 3 log Giardia, their ratio, and the table cells behind it."""

    t10_min: float
    ct_mg_min_l: float
    ct_3_log_mg_min_l: float
    ratio_to_3_log: float
    log_giardia: float
    cells: tuple[ct_tables.Cell, ...]


def segment_result(segment: Segment, *, disinfectant: str = "free chlorine", method: str = "conservative") -> SegmentResult:
    """T10, CT and the Giardia ratio of one segment; OutOfRange where its readings leave the table."""
    time = float(contact.t10_min(segment.volume_m3, segment.peak_flow_m3_h, segment.baffling_factor))
    ct = float(contact.ct_mg_min_l(segment.residual_mg_l, time))
    readings = (segment.temperature_c, segment.ph, segment.residual_mg_l)
    needed = float(ct_tables.required_ct_mg_min_l("Giardia", disinfectant, 3.0, *readings, method=method))
    cells = ct_tables.cells_behind("Giardia", disinfectant, 3.0, *readings, method=method)
    ratio = ct / needed
    return SegmentResult(time, ct, needed, ratio, 3.0 * ratio, cells)


def giardia_inactivation(
    segments: Sequence[Segment], *, disinfectant: str = "free chlorine", method: str = "conservative"
) -> float:
    """Logs of Giardia over all segments: 3 x sum of ratios, not capped and not rounded."""
    return giardia_log_from_ratios(
        [segment_result(segment, disinfectant=disinfectant, method=method).ratio_to_3_log for segment in segments]
    )


def giardia_log_from_ratios(ratios: Sequence[float]) -> float:
    """3 x the sum of the segments' CT / CT99.9 (40 CFR 141.172(b)(4)(iii), 141.534); ratios of 0 or more."""
    errors.require("CT ratio", list(ratios), "", 0.0, 1e6, "40 CFR 141.172")
    return 3.0 * float(sum(ratios))


def inactivation_ratio(log_achieved: Values, log_required: Values) -> Values:
    """Logs achieved over logs required: for a works that must do L logs, CT / (CT99.9 L / 3), not CT / CT99.9."""
    errors.require("logs achieved", log_achieved, "log", 0.0, 1e6, "inactivation ratio")
    errors.require("logs required", log_required, "log", 1e-6, 10.0, "inactivation ratio")
    return log_achieved / log_required


def cryptosporidium_credit(
    cts_mg_min_l: Sequence[float], disinfectant: str, temperature_c: float, *, method: str = "interpolate"
) -> float:
    """Logs of Cryptosporidium for the summed CT of all segments at one temperature, capped at the table's 3 log."""
    total = float(np.sum(np.asarray(cts_mg_min_l, dtype=float)))
    return float(ct_tables.log_from_ct("Cryptosporidium", disinfectant, total, temperature_c, method=method))


def log_from_percent(percent: Values) -> Values:
    """Logs from % inactivated, 0 to below 100: -log10(1 - p/100); 99.9 % is 3 (definition; 40 CFR 141.72(b)(1))."""
    errors.require("inactivation", percent, "%", 0.0, float(np.nextafter(100.0, 0.0)), "log inactivation")
    return -np.log10(1.0 - percent / 100.0)


def percent_from_log(log_inactivation: Values) -> Values:
    """% inactivated from logs, 0 to 15."""
    errors.require("log inactivation", log_inactivation, "log", 0.0, 15.0, "log inactivation")
    return 100.0 * (1.0 - 10.0 ** (-np.asarray(log_inactivation, dtype=float)))[()]
