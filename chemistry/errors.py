"""What the chemistry says when it will not answer.

A value outside the range a formula was made for raises :class:`OutOfRange`; a question with no answer (a pH
no dose of that chemical reaches, an alkalinity that cannot stand at that pH) raises :class:`ChemistryError`.
Nothing here returns a number in place of an answer.
"""

from typing import Any

import numpy as np

Values = Any  # a float or a numpy array


class ChemistryError(ValueError):
    """The question has no chemical answer; the message says why."""


class OutOfRange(ChemistryError):
    """A value lies outside the range the formula holds for.

    Carries ``quantity``, ``value``, ``unit``, ``low``, ``high`` and ``source`` so that a screen can phrase it
    anew.
    """

    def __init__(self, quantity: str, value: Values, unit: str, low: float, high: float, source: str) -> None:
        self.quantity = quantity
        self.value = value
        self.unit = unit
        self.low = low
        self.high = high
        self.source = source
        unit_text = f" {unit}" if unit else ""
        super().__init__(f"{quantity} {value:g}{unit_text} is outside {low:g} to {high:g}{unit_text} ({source})")


def require(quantity: str, value: Values, unit: str, low: float, high: float, source: str) -> None:
    """Raise :class:`OutOfRange` unless every element of ``value`` is a number within ``low`` to ``high``.

    Not-a-number fails as well: a missing reading must never turn into a dose.
    """
    if type(value) is float or type(value) is int:
        if low <= value <= high:
            return
        raise OutOfRange(quantity, value, unit, low, high, source)
    values = np.asarray(value, dtype=float)
    if values.size == 0 or (values.min() >= low and values.max() <= high):
        return
    outside = ~((values >= low) & (values <= high))
    raise OutOfRange(quantity, float(values[outside].flat[0]), unit, low, high, source)
