"""Rounding before comparing, on decimals made from the text, half up.

Half up (away from zero) to the digits of the limit itself is the usual convention for comparing with United States
limits (from memory); the works states whether it is used.
"""

from __future__ import annotations

from decimal import ROUND_HALF_UP, Decimal


def half_up(value: Decimal, decimals: int) -> Decimal:
    """Rounded to so many decimals; a 5 goes away from zero. ``decimals`` may be negative (tens, hundreds)."""
    return value.quantize(Decimal(1).scaleb(-decimals), rounding=ROUND_HALF_UP)


def decimals_of(limit: Decimal) -> int:
    """The decimals a limit is stated with: 4.0 has one, 0.30 has two."""
    exponent = limit.as_tuple().exponent
    return -exponent if isinstance(exponent, int) and exponent < 0 else 0


def to_limit(value: Decimal, limit: Decimal) -> Decimal:
    """A value rounded to the limit's own digits, half up."""
    return half_up(value, decimals_of(limit))
