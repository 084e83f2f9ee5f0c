"""Numbers as a person reads them, and the steps of a scale."""

from __future__ import annotations

import math


def tidy(value: float) -> str:
    """Three figures that count, never an exponent, at most four decimals: 0.043, 1.12, 12.3, 1 234."""
    if value == 0:
        return "0"
    decimals = min(4, max(0, 2 - math.floor(math.log10(abs(value)))))
    text = f"{value:,.{decimals}f}".replace(",", "\u202f").replace("-", "−")
    return "0" if not any(figure in text for figure in "123456789") else text


def alike(value: float, other: float) -> str:
    """``value`` with as many decimals as ``other`` shows; for an uncertainty beside its figure."""
    text = tidy(other)
    decimals = len(text.partition(".")[2])
    return f"{value:.{decimals}f}".replace("-", "−")


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
    return f"{value:,.{decimals}f}".replace(",", "\u202f").replace("-", "−")


def width_of(words: str, size: float = 14) -> float:
    """Roughly how wide words are in the typeface; for keeping labels apart, not for fitting."""
    return 0.56 * size * len(words)
