"""The inactivation ratio of a day: the sum over segments of CT calculated over CT required, at least 1.0.

40 CFR 141.74(b)(4)(i)(B) and 141.172(b)(4).
"""

from __future__ import annotations

from collections.abc import Sequence


def total_ratio(segments: Sequence[float]) -> float | None:
    """The sum of the segments' ratios; None with no segment."""
    return sum(segments) if segments else None


def adequate(ratio: float, low: float = 1.0) -> bool:
    """Whether the total ratio reaches the minimum; exactly 1.0 does."""
    return ratio >= low - 1e-12
