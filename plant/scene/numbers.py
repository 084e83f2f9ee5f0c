"""Numbers as a person reads them, and the steps of a scale."""

from __future__ import annotations

import math
import re

LOW = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")


def tidy(value: float) -> str:
    """Three figures that count, never an exponent, at most four decimals: 0.043, 1.12, 12.3, 1 234."""
    if value == 0:
        return "0"
    text = _written(value, _decimals(value))
    return "0" if not any(figure in text for figure in "123456789") else text


def _decimals(value: float) -> int:
    return 4 if value == 0 else min(4, max(0, 2 - math.floor(math.log10(abs(value)))))


def _written(value: float, decimals: int) -> str:
    return f"{value:,.{decimals}f}".replace(",", "\u202f").replace("-", "−")


def with_spread(value: float, spread: float) -> str:
    """A value and what it is give or take, both to the second figure of the spread: 0.96 ± 0.52, 1.17 ± 0.08, −17 ± 47."""
    if spread <= 0:
        return tidy(value)
    decimals = max(0, min(_decimals(value), 1 - math.floor(math.log10(spread))))
    return f"{_written(value, decimals)} ± {_written(spread, decimals)}"


def scale(low: float, high: float, wanted: int = 4) -> list[float]:
    """Round steps (1, 2, 2.5 or 5 times a power of ten) that lie within [low, high], about ``wanted`` of them."""
    if not (math.isfinite(low) and math.isfinite(high)) or high <= low:
        return [low]
    rough = (high - low) / max(1, wanted)
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * n for n in (1, 2, 2.5, 5, 10) if power * n >= rough * 0.999)
    first = math.ceil(low / step - 1e-9)
    return [round(n * step, 10) for n in range(first, math.floor(high / step + 1e-9) + 1)]


def tick(value: float, steps: list[float]) -> str:
    """A step of a scale with just the decimals that the scale needs."""
    gap = steps[1] - steps[0] if len(steps) > 1 else abs(value) or 1
    decimals = next((n for n in range(5) if abs(gap * 10**n - round(gap * 10**n)) < 1e-6), 4)
    return _written(value, decimals)


def width_of(words: str, size: float = 14) -> float:
    """Roughly how wide words are in the typeface; for keeping labels apart, not for fitting."""
    return 0.56 * size * len(words)


def formula(text: str) -> str:
    """Chemical formulas inside a text with their indices set low: "as CaCO3" becomes "as CaCO₃"; "m3" becomes "m³"."""
    low = re.sub(
        r"\b(?=\w*[A-Z])(?:[A-Z][a-z]?\d*|\((?:[A-Z][a-z]?\d*)+\)\d*)+",
        lambda found: re.sub(r"(?<=[A-Za-z)])\d+", lambda digits: digits.group().translate(LOW), found.group()),
        text,
    )
    return re.sub(r"\bm3\b", "m³", low)
