"""Volumes of vessels from their level, and levels from volumes, for every shape a works may state.

A shape is the mapping of a vessel's stated keys: ``shape`` and its measures in metres (``diameter_m``,
``height_m``, ``length_m``, ``heads``, ``cone_height_m``, ``table``, ``bottom``, ``bottom_depth_m``). Levels
count from the lowest inside point, volumes are litres; floats or arrays. A level outside the vessel or a
volume it can't hold raises OutOfRange; an impossible shape raises ChemistryError.

Sources: circular segment, cone, spheroid and spherical cap are elementary geometry; the combinations follow
D. Jones, Calculating Tank Volume (JONES-TANKS). Torispherical heads are integrated numerically from their
profile; unless ``dish_radius_ratio`` and ``knuckle_radius_ratio`` say otherwise they are 1.0 and 0.06 of
the diameter (UG-32); a head to DIN 28011 has 1.0 and 0.10.
"""

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from chemistry import errors, vessel_heads

Values = Any  # a float or a numpy array

_SOURCE = "the vessel's stated shape"
_SLACK = 1e-9  # relative; a level read back from a volume may miss the rim by rounding
_BISECTIONS = 100

Shape = Mapping[str, Any]


def volume_l(shape: Shape, level_m: Values) -> Values:
    """Litres in the vessel at a level in m, 0 to :func:`full_level_m`."""
    if shape.get("shape") == "strapping":
        levels, volumes = _strapping(shape)
        level = _checked("level", level_m, "m", levels[0], levels[-1])
        return _like(level_m, np.interp(level, levels, volumes))
    top = full_level_m(shape)
    level = _checked("level", level_m, "m", 0.0, top)
    return _like(level_m, 1000.0 * _volume_m3(shape)(level))


def level_m(shape: Shape, volume_l: Values) -> Values:
    """Level in m that holds so many litres, 0 to :func:`full_volume_l`: the inverse of ``volume_l``.

    By bisection to rounding; a strapping table is read backwards along its straight lines.
    """
    if shape.get("shape") == "strapping":
        levels, volumes = _strapping(shape)
        volume = _checked("volume", volume_l, "L", volumes[0], volumes[-1])
        return _like(volume_l, np.interp(volume, volumes, levels))
    volume = _checked("volume", volume_l, "L", 0.0, full_volume_l(shape)) / 1000.0
    of_level = _volume_m3(shape)
    low = np.zeros_like(volume)
    high = np.full_like(volume, full_level_m(shape))
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        short = of_level(middle) < volume
        low, high = np.where(short, middle, low), np.where(short, high, middle)
        if np.all(high - low <= 1e-14 * (1.0 + high)):
            break
    return _like(volume_l, 0.5 * (low + high))


def full_level_m(shape: Shape) -> float:
    """Level of the brim in m; for a strapping table its last level."""
    kind = shape.get("shape")
    if kind == "vertical_cylinder":
        return _measure(shape, "height_m")
    if kind == "horizontal_cylinder":
        return _measure(shape, "diameter_m")
    if kind == "cone_bottom":
        return _measure(shape, "height_m") + _measure(shape, "cone_height_m")
    if kind == "strapping":
        return float(_strapping(shape)[0][-1])
    raise _unknown(shape)


def full_volume_l(shape: Shape) -> float:
    """Litres when full to the brim; for a strapping table its last volume."""
    if shape.get("shape") == "strapping":
        return float(_strapping(shape)[1][-1])
    return float(volume_l(shape, full_level_m(shape)))


def dvolume_dlevel_l_per_m(shape: Shape, level_m: Values) -> Values:
    """Litres per metre of level at a level: the liquid's surface x 1000.

    The standard uncertainty of a volume is this times that of the level. Central difference over a
    millionth of the height (one-sided at the ends); for a strapping table the slope of the segment the
    level lies in.
    """
    if shape.get("shape") == "strapping":
        levels, volumes = _strapping(shape)
        level = _checked("level", level_m, "m", levels[0], levels[-1])
        index = np.clip(np.searchsorted(levels, level, side="right") - 1, 0, len(levels) - 2)
        return _like(level_m, np.diff(volumes)[index] / np.diff(levels)[index])
    top = full_level_m(shape)
    level = _checked("level", level_m, "m", 0.0, top)
    step = 1e-6 * top
    low, high = np.maximum(level - step, 0.0), np.minimum(level + step, top)
    of_level = _volume_m3(shape)
    return _like(level_m, 1000.0 * (of_level(high) - of_level(low)) / (high - low))


def level_from_pct(shape: Shape, level_pct: Values) -> Values:
    """Level in m from a reading in % of the height, 0 to 100."""
    pct = _checked("level", level_pct, "%", 0.0, 100.0)
    return _like(level_pct, pct / 100.0 * full_level_m(shape))


def net_mass_kg(shape: Shape, gross_kg: Values) -> Values:
    """Product on a scale: gross less the stated ``tare_kg`` (none stated: 0).

    Refuses a weight below the tare by more than three of the scale's standard uncertainties
    (``weight_sd_kg``), and a net above the stated ``capacity_kg``. Within the uncertainty a slightly
    negative net is returned as it is: clipping it would hide a wrong tare.
    """
    if shape.get("shape") != "scale":
        raise errors.ChemistryError(f"only a scale has a gross weight, not {shape.get('shape')!r}")
    tare = float(shape.get("tare_kg") or 0.0)
    slack = 3.0 * float(shape.get("weight_sd_kg") or 0.0)
    capacity = shape.get("capacity_kg")
    high = tare + float(capacity) + slack if capacity is not None else float("inf")
    gross = _checked("gross weight", gross_kg, "kg", tare - slack, high)
    return _like(gross_kg, gross - tare)


def contents_kg(shape: Shape, reading: Values, density_kg_l: float) -> Values:
    """Product in kg from what the vessel shows: a level in m times density in kg/L, or a gross weight on a scale."""
    if shape.get("shape") == "scale":
        return net_mass_kg(shape, reading)
    errors.require("density", density_kg_l, "kg/L", 0.5, 2.5, "liquids and slurries a works doses")
    return volume_l(shape, reading) * density_kg_l


def check_shape(shape: Shape) -> None:
    """Raise ChemistryError when a stated shape can't be used: unknown kind, missing, zero or impossible measures."""
    if shape.get("shape") == "scale":
        tare = shape.get("tare_kg")
        if tare is not None and not 0 <= float(tare) < float("inf"):
            raise errors.ChemistryError(f"tare_kg must be 0 or more, not {tare!r}")
        return
    full_volume_l(shape)


def _volume_m3(shape: Shape) -> Callable[[np.ndarray], np.ndarray]:
    """Volume in m3 as a function of an array of levels already known to be inside."""
    kind = shape.get("shape")
    radius = _measure(shape, "diameter_m") / 2
    if kind == "vertical_cylinder":
        return vessel_heads.vertical_bottom(shape, radius)
    if kind == "horizontal_cylinder":
        length = _measure(shape, "length_m")
        heads = vessel_heads.horizontal_heads(shape, radius)
        return lambda level: length * vessel_heads.segment_m2(radius, level) + heads(level)
    if kind == "cone_bottom":
        cone = _measure(shape, "cone_height_m")
        _measure(shape, "height_m", zero_allowed=True)
        area = np.pi * radius**2
        return lambda level: area * (np.minimum(level, cone) ** 3 / (3 * cone**2) + np.maximum(level - cone, 0.0))
    raise _unknown(shape)


def _strapping(shape: Shape) -> tuple[np.ndarray, np.ndarray]:
    rows = shape.get("table") or []
    try:
        table = np.array([[float(level), float(volume)] for level, volume in rows])
    except (TypeError, ValueError):
        raise errors.ChemistryError("a strapping table is a list of [level_m, volume_L] pairs") from None
    if len(table) < 2 or not np.all(np.isfinite(table)):
        raise errors.ChemistryError("a strapping table needs two or more pairs of numbers")
    levels, volumes = table[:, 0], table[:, 1]
    if levels[0] < 0 or volumes[0] < 0 or np.any(np.diff(levels) <= 0) or np.any(np.diff(volumes) <= 0):
        raise errors.ChemistryError("a strapping table must rise in level and volume, row by row")
    return levels, volumes


def _measure(shape: Shape, key: str, *, zero_allowed: bool = False) -> float:
    value = shape.get(key)
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise errors.ChemistryError(f"{shape.get('shape')} needs {key} as a number, not {value!r}")
    if not (0 < value < float("inf") or (zero_allowed and value == 0)):
        raise errors.ChemistryError(f"{key} must be greater than 0, not {value!r}")
    return float(value)


def _unknown(shape: Shape) -> errors.ChemistryError:
    kind = shape.get("shape")
    if kind == "scale":
        return errors.ChemistryError("a scale has no volume: use its net mass")
    return errors.ChemistryError(
        f"unknown shape {kind!r}; known: vertical_cylinder, horizontal_cylinder, cone_bottom, strapping, scale"
    )


def _checked(quantity: str, value: Values, unit: str, low: float, high: float) -> np.ndarray:
    slack = _SLACK * (1.0 + abs(high)) if np.isfinite(high) else 0.0
    values = np.asarray(value, dtype=float)
    if not np.all((values >= low - slack) & (values <= high + slack)):
        errors.require(quantity, value, unit, low, high, _SOURCE)
    inside: np.ndarray = np.clip(values, low, high)
    return inside


def _like(given: Values, result: np.ndarray) -> Values:
    return float(result) if np.ndim(given) == 0 else result
