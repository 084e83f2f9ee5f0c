"""Smaller, larger and either-or for single numbers and for arrays alike; numbers stay plain floats."""

import numpy as np

from chemistry.constants import Values


def least(one: Values, other: Values) -> Values:
    """The smaller of two, element by element."""
    if isinstance(one, np.ndarray) or isinstance(other, np.ndarray):
        return np.minimum(one, other)
    return min(one, other)


def most(one: Values, other: Values) -> Values:
    """The larger of two, element by element."""
    if isinstance(one, np.ndarray) or isinstance(other, np.ndarray):
        return np.maximum(one, other)
    return max(one, other)


def where(condition: Values, yes: Values, no: Values) -> Values:
    """``yes`` where the condition holds, else ``no``."""
    if any(isinstance(value, np.ndarray) for value in (condition, yes, no)):
        return np.where(condition, yes, no)
    return yes if condition else no


def number(value: Values) -> Values:
    """A plain float, or a float array; sequences become arrays, text and None are refused by numpy."""
    if type(value) is float:
        return value
    values = np.asarray(value, dtype=float)
    return float(values) if values.ndim == 0 else values
