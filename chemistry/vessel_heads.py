"""The ends of vessels: heads of horizontal cylinders, bottoms of vertical ones, and the circular segment.

All in metres, square metres and cubic metres, for arrays of levels already known to be inside; sources as in
`chemistry.vessels`.
"""

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from chemistry import errors

Values = Any  # a float or a numpy array

OfLevel = Callable[[np.ndarray], np.ndarray]

DISH_RADIUS_RATIO = 1.0  # of the diameter; UG-32
KNUCKLE_RADIUS_RATIO = 0.06  # of the diameter; UG-32
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(48)


def segment_m2(radius_m: float, level_m: Values) -> Values:
    """Wetted area of a circle filled to a level: r² acos((r-h)/r) - (r-h) √(2rh-h²)."""
    rest = np.clip(radius_m - level_m, -radius_m, radius_m)
    return radius_m**2 * np.arccos(rest / radius_m) - rest * np.sqrt(radius_m**2 - rest**2)


def horizontal_heads(shape: Mapping[str, Any], radius_m: float) -> OfLevel:
    """Volume in both heads of a horizontal cylinder as a function of level.

    ``heads``: flat, elliptical_2_1 (depth a quarter of the diameter), hemispherical, torispherical, or
    spherical_cap with ``head_depth_m``. Two spheroidal heads make one spheroid: (depth/r) π h² (3r - h) /
    3.
    """
    heads = shape.get("heads", "flat")
    if heads == "flat":
        return lambda level: np.zeros_like(level)
    if heads in ("elliptical_2_1", "hemispherical"):
        flatness = 0.5 if heads == "elliptical_2_1" else 1.0
        return lambda level: flatness * np.pi * level**2 * (3 * radius_m - level) / 3
    if heads == "torispherical":
        pieces = _torispherical(shape, radius_m)
    elif heads == "spherical_cap":
        pieces = _spherical_cap(shape, radius_m)
    else:
        raise errors.ChemistryError(
            f"unknown heads {heads!r}; known: flat, elliptical_2_1, torispherical, hemispherical, spherical_cap"
        )
    return lambda level: 2.0 * _revolved(pieces, np.asarray(level - radius_m))


def vertical_bottom(shape: Mapping[str, Any], radius_m: float) -> OfLevel:
    """Volume of a vertical cylinder with its ``bottom`` as a function of level from the lowest inside point.

    ``bottom``: flat (default), ellipsoidal or conical (hanging below the wall by ``bottom_depth_m``), or
    concave_conical (rising into the vessel by it). ``height_m`` counts from the same lowest point.
    """
    bottom = shape.get("bottom", "flat")
    area = np.pi * radius_m**2
    if bottom == "flat":
        return lambda level: area * level
    depth = float(shape.get("bottom_depth_m") or 0.0)
    if not 0 < depth <= float(shape.get("height_m") or 0.0):
        raise errors.ChemistryError(f"bottom_depth_m must lie between 0 and height_m, not {depth!r}")
    if bottom == "ellipsoidal":
        return lambda level: (
            area
            * (
                np.minimum(level, depth) ** 2 * (3 * depth - np.minimum(level, depth)) / (3 * depth**2)
                + np.maximum(level - depth, 0.0)
            )
        )
    if bottom == "conical":
        return lambda level: area * (np.minimum(level, depth) ** 3 / (3 * depth**2) + np.maximum(level - depth, 0.0))
    if bottom == "concave_conical":
        return lambda level: area * (level - depth / 3 * (1 - (1 - np.minimum(level / depth, 1.0)) ** 3))
    raise errors.ChemistryError(f"unknown bottom {bottom!r}; known: flat, ellipsoidal, conical, concave_conical")


# A piece of a head's profile: where it starts and ends along the axis, its radius there, and where it has a
# radius.
Piece = tuple[float, float, Callable[[np.ndarray], np.ndarray], Callable[[np.ndarray], np.ndarray]]


def _torispherical(shape: Mapping[str, Any], radius: float) -> list[Piece]:
    crown = float(shape.get("dish_radius_ratio", DISH_RADIUS_RATIO)) * 2 * radius
    knuckle = float(shape.get("knuckle_radius_ratio", KNUCKLE_RADIUS_RATIO)) * 2 * radius
    if not (0 < knuckle < radius <= crown and knuckle < crown):
        raise errors.ChemistryError("a torispherical head needs 0 < knuckle < r <= dish radius")
    depth = crown - np.sqrt((crown - knuckle) ** 2 - (radius - knuckle) ** 2)
    sine = (radius - knuckle) / (crown - knuckle)
    cosine = np.sqrt(1 - sine**2)
    seam = knuckle * cosine  # where the knuckle meets the dish
    centre = depth - crown
    inner = radius - knuckle

    def knuckle_radius(x: Values) -> Values:
        return inner + np.sqrt(np.maximum(knuckle**2 - x**2, 0.0))

    def knuckle_place(r: Values) -> Values:
        return np.sqrt(np.maximum(knuckle**2 - np.maximum(r - inner, 0.0) ** 2, 0.0))

    return [(0.0, seam, knuckle_radius, knuckle_place), (seam, depth, *_sphere(crown, centre))]


def _spherical_cap(shape: Mapping[str, Any], radius: float) -> list[Piece]:
    depth = float(shape.get("head_depth_m") or 0.0)
    if not 0 < depth <= radius:
        raise errors.ChemistryError(f"head_depth_m must lie between 0 and the radius, not {depth!r}")
    sphere = (radius**2 + depth**2) / (2 * depth)
    return [(0.0, depth, *_sphere(sphere, depth - sphere))]


def _sphere(sphere_radius: float, centre: float) -> Values:
    def radius_at(x: Values) -> Values:
        return np.sqrt(np.maximum(sphere_radius**2 - (x - centre) ** 2, 0.0))

    def place_of(r: Values) -> Values:
        return centre + np.sqrt(np.maximum(sphere_radius**2 - r**2, 0.0))

    return radius_at, place_of


def _revolved(pieces: list[Piece], height: np.ndarray) -> np.ndarray:
    """Volume under ``height`` (above the axis) of a body turned about a horizontal axis, by Gauss-Legendre.

    Each piece is cut where its radius equals the height, the only place where the integrand has a corner,
    and each part is substituted x = a + (b-a) sin²(θ) to smooth the square roots at its ends.
    """
    total = np.zeros_like(height, dtype=float)
    theta = np.pi / 4 * (_NODES + 1.0)
    for start, end, radius_at, place_of in pieces:
        cut = np.clip(place_of(np.abs(height)), start, end)
        for a, b in ((np.full_like(cut, start), cut), (cut, np.full_like(cut, end))):
            width = (b - a)[..., None]
            x = a[..., None] + width * np.sin(theta) ** 2
            weight = width * np.sin(2 * theta) * (np.pi / 4) * _WEIGHTS
            radius = np.maximum(radius_at(x), 1e-300)
            total += (weight * segment_m2(1.0, 1.0 + height[..., None] / radius) * radius**2).sum(axis=-1)
    return total
