"""Disinfection by CT: contact time, required CT with its evidence, closed forms, log credit by segment.

US federal tables and rules (40 CFR 141.74, 141.172, 141.720) as the worked case. The regulator's own table,
tracer study and rounding always win; a table cell marked "from memory" must be compared with the law before
it is used for compliance.
"""

from chemistry.disinfection.contact import BAFFLING_FACTORS, ct_mg_min_l, t10_min, theoretical_time_min
from chemistry.disinfection.credit import (
    Segment,
    SegmentResult,
    cryptosporidium_credit,
    giardia_inactivation,
    giardia_log_from_ratios,
    inactivation_ratio,
    log_from_percent,
    percent_from_log,
    segment_result,
)
from chemistry.disinfection.ct_tables import Cell, cells_behind, log_from_ct, required_ct_mg_min_l

__all__ = [
    "BAFFLING_FACTORS",
    "Cell",
    "Segment",
    "SegmentResult",
    "cells_behind",
    "cryptosporidium_credit",
    "ct_mg_min_l",
    "giardia_inactivation",
    "giardia_log_from_ratios",
    "inactivation_ratio",
    "log_from_ct",
    "log_from_percent",
    "percent_from_log",
    "required_ct_mg_min_l",
    "segment_result",
    "t10_min",
    "theoretical_time_min",
]
