"""Chlorine dioxide at the entry point and, the day after, in the network."""

from __future__ import annotations

from collections.abc import Sequence


def acute(entry_day1: float, network_day2: Sequence[float] | None, limit: float = 0.8) -> bool:
    """Above the limit at the entry point one day and in any of the three network samples the next: an acute breach;
    not taking those samples is the same breach (40 CFR 141.133(c)(2)(i)). mg/L as ClO2.
    """
    if entry_day1 <= limit:
        return False
    return network_day2 is None or len(network_day2) < 3 or any(value > limit for value in network_day2)
