"""First-order propagation of standard uncertainties, for independent inputs.

Source: GUM, eq. 10 (independent inputs); a function's slope is taken as the half difference over plus and
minus one standard uncertainty (GUM 5.1.3 note 2, from memory), which is exact for straight lines and kind
to corners.
"""

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np

from chemistry import errors

Values = Any  # a float or a numpy array


def of_function(function: Callable[..., Values], values: Mapping[str, Values], sds: Mapping[str, Values]) -> Values:
    """Standard uncertainty of ``function(**values)`` from those of its inputs (``sds``; an input left out is exact).

    Where the function refuses a shifted input (OutOfRange at the edge of a table), the shift inward is used
    alone; where it refuses both, ChemistryError.
    """
    total = 0.0
    for name, sd in sds.items():
        if name not in values:
            raise errors.ChemistryError(f"an uncertainty is given for {name!r}, which is no input")
        errors.require(f"uncertainty of {name}", sd, "", 0.0, np.inf, "GUM")
        total = total + _half_difference(function, values, name, sd) ** 2
    return total**0.5


def of_sum(sds: Sequence[Values]) -> Values:
    """Standard uncertainty of a sum or difference: root of the sum of squares."""
    return sum((sd**2 for sd in sds), start=0.0) ** 0.5


def relative_of_product(relative_sds: Sequence[Values]) -> Values:
    """Relative standard uncertainty of a product or quotient: root of the sum of squared relative ones."""
    return of_sum(relative_sds)


def of_interpolation(share_to_second: Values, sd_first: Values, sd_second: Values) -> Values:
    """Standard uncertainty of a value read off the straight line between two readings, at a share 0 to 1 of the way."""
    errors.require("share", share_to_second, "", 0.0, 1.0, "interpolation")
    return of_sum([(1.0 - share_to_second) * sd_first, share_to_second * sd_second])


def of_dose_mg_l(
    *, dose_mg_l: Values, use_relative_sd: Values, strength_relative_sd: Values, volume_relative_sd: Values
) -> Values:
    """Standard uncertainty of dose = use x strength / volume, in mg/L, from relative ones (fractions, not %)."""
    return dose_mg_l * relative_of_product([use_relative_sd, strength_relative_sd, volume_relative_sd])


def of_volume_l(slope_l_per_m: Values, level_sd_m: Values) -> Values:
    """Standard uncertainty of a volume read from a level: surface slope x that of the level."""
    return slope_l_per_m * level_sd_m


def _half_difference(function: Callable[..., Values], values: Mapping[str, Values], name: str, sd: Values) -> Values:
    results: list[Values] = []
    for sign in (1.0, -1.0):
        shifted = {**values, name: values[name] + sign * sd}
        try:
            results.append(function(**shifted))
        except errors.ChemistryError:
            results.append(None)
    up, down = results
    if up is None and down is None:
        raise errors.ChemistryError(f"no result within one standard uncertainty of {name}")
    if up is None or down is None:
        middle = function(**values)
        return (up if down is None else down) - middle
    return (up - down) / 2.0
