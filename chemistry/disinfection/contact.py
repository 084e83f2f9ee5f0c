"""Contact time: volume at the minimum level, peak hourly flow, baffling. Floats or arrays."""

from typing import Any

import numpy as np

from chemistry import errors

Values = Any  # a float or a numpy array

# T10 over theoretical time. 0.1 to 1.0: EPA manuals, from memory; 0.0, 0.2 and 0.9: Pennsylvania DEP page,
# opened.
BAFFLING_FACTORS: dict[str, float] = {
    "none": 0.0,  # no contact time
    "unbaffled": 0.1,  # mixed, low length to width, high inlet and outlet speed
    "unbaffled, diffuser walls": 0.2,
    "poor": 0.3,  # unbaffled inlets and outlets, no internal baffles
    "average": 0.5,  # baffled inlet or outlet with some internal baffles
    "superior": 0.7,  # perforated inlet baffle, serpentine or perforated internal baffles, outlet weir
    "near plug flow": 0.9,
    "plug flow": 1.0,  # pipe; very high length to width
}
_ABOVE_ZERO = float(np.nextafter(0.0, 1.0))


def theoretical_time_min(volume_m3: Values, peak_flow_m3_h: Values) -> Values:
    """Volume at the minimum operating level over peak hourly flow, in min (EPA-816-R-03-004 ch. 4, from memory)."""
    errors.require("volume", volume_m3, "m3", _ABOVE_ZERO, 1e7, "contact time")
    errors.require("peak hourly flow", peak_flow_m3_h, "m3/h", _ABOVE_ZERO, 1e7, "contact time")
    return volume_m3 / peak_flow_m3_h * 60.0


def t10_min(volume_m3: Values, peak_flow_m3_h: Values, baffling_factor: Values) -> Values:
    """T10 in min: theoretical time x baffling factor 0 to 1 (a tracer study overrides it)."""
    errors.require("baffling factor", baffling_factor, "", 0.0, 1.0, "contact time")
    return theoretical_time_min(volume_m3, peak_flow_m3_h) * baffling_factor


def pipe_volume_m3(inside_diameter_m: Values, length_m: Values) -> Values:
    """Internal volume of a pipe, which counts as plug flow (factor 1.0)."""
    errors.require("diameter", inside_diameter_m, "m", _ABOVE_ZERO, 20.0, "contact time")
    errors.require("length", length_m, "m", _ABOVE_ZERO, 1e6, "contact time")
    return np.pi / 4.0 * inside_diameter_m**2 * length_m


def ct_mg_min_l(residual_mg_l: Values, time_min: Values) -> Values:
    """CT = C x T, mg min/L; residual at the end of the segment, both during peak hourly flow (40 CFR 141.720(a)(1))."""
    errors.require("residual", residual_mg_l, "mg/L", 0.0, 100.0, "CT")
    errors.require("contact time", time_min, "min", 0.0, 1e6, "CT")
    return residual_mg_l * time_min
