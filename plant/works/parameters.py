"""What can be read at a works: each parameter's label, canonical unit, decimals, and the values one may
believe.

``low``/``high`` bound what is physically possible (a value outside is kept, marked and left out of operating
figures until somebody has looked); ``usual_low``/``usual_high`` bound what is met in drinking water (a value
outside is only asked about once more). Canonical units are those of ``chemistry.units``. Ranges: pH by the
definition of the scale, temperature by water being liquid at the pressure of the air; all others common
practice, no source.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from plant.works.stated import Stated

SAMPLE_POINT, METER, VESSEL, DOSING_POINT = "sample_point", "meter", "vessel", "dosing_point"


@dataclass(frozen=True)
class Parameter:
    """One parameter. ``sites`` are the kinds of site where it is read; ``unit`` is canonical ("" for pH and
    counts).
    """

    name: str
    label: str
    unit: str
    decimals: int
    low: float | None
    high: float | None
    usual_low: float | None = None
    usual_high: float | None = None
    sites: tuple[str, ...] = (SAMPLE_POINT,)

    def possible(self, value: float) -> bool:
        """Whether a value in the canonical unit can be true at all."""
        return (self.low is None or value >= self.low) and (self.high is None or value <= self.high)

    def usual(self, value: float) -> bool:
        """Whether a value in the canonical unit needs no second look. Possible and within the usual range."""
        return (
            self.possible(value)
            and (self.usual_low is None or value >= self.usual_low)
            and (self.usual_high is None or value <= self.usual_high)
        )


_CACO3 = "mg/L as CaCO3"
_WATER = (
    Parameter("pH", "pH", "", 2, 0.0, 14.0, 6.0, 10.5),
    Parameter("free_chlorine", "Free chlorine", "mg/L", 2, 0.0, 50.0, 0.0, 4.0),
    Parameter("total_chlorine", "Total chlorine", "mg/L", 2, 0.0, 50.0, 0.0, 5.0),
    Parameter("combined_chlorine", "Combined chlorine", "mg/L", 2, 0.0, 50.0, 0.0, 4.0),
    Parameter("chlorine_dioxide", "Chlorine dioxide", "mg/L", 2, 0.0, 20.0, 0.0, 0.8),
    Parameter("ozone", "Ozone", "mg/L", 2, 0.0, 30.0, 0.0, 5.0),
    Parameter("hydrogen_peroxide", "Hydrogen peroxide", "mg/L", 2, 0.0, 500.0, 0.0, 25.0),
    Parameter("permanganate", "Permanganate", "mg/L", 2, 0.0, 100.0, 0.0, 5.0),
    Parameter("hardness", "Total hardness", _CACO3, 0, 0.0, 10000.0, 5.0, 800.0),
    Parameter("calcium_hardness", "Calcium hardness", _CACO3, 0, 0.0, 10000.0, 2.0, 600.0),
    Parameter("magnesium_hardness", "Magnesium hardness", _CACO3, 0, 0.0, 10000.0, 0.0, 400.0),
    Parameter("calcium", "Calcium", "mg/L", 1, 0.0, 4000.0, 1.0, 250.0),
    Parameter("magnesium", "Magnesium", "mg/L", 1, 0.0, 2000.0, 0.0, 120.0),
    Parameter("sodium", "Sodium", "mg/L", 1, 0.0, 12000.0, 0.5, 400.0),
    Parameter("alkalinity", "Alkalinity", _CACO3, 0, -500.0, 10000.0, 5.0, 500.0),
    Parameter("p_alkalinity", "Phenolphthalein alkalinity", _CACO3, 0, 0.0, 10000.0, 0.0, 150.0),
    Parameter("carbon_dioxide", "Carbon dioxide", "mg/L", 1, 0.0, 3000.0, 0.0, 120.0),
    Parameter("temperature", "Temperature", "°C", 1, -2.0, 100.0, 0.0, 35.0, (SAMPLE_POINT, VESSEL)),
    Parameter("turbidity", "Turbidity", "NTU", 2, 0.0, 10000.0, 0.0, 50.0),
    Parameter("conductance", "Conductance", "uS/cm", 0, 0.0, 100000.0, 10.0, 2500.0),
    Parameter("colour", "Colour", "mg/L", 0, 0.0, 2000.0, 0.0, 100.0),
    Parameter("fluoride", "Fluoride", "mg/L", 2, 0.0, 100.0, 0.0, 1.5),
    Parameter("iron", "Iron", "mg/L", 3, 0.0, 500.0, 0.0, 10.0),
    Parameter("manganese", "Manganese", "mg/L", 3, 0.0, 200.0, 0.0, 3.0),
    Parameter("aluminium", "Aluminium", "mg/L", 3, 0.0, 100.0, 0.0, 1.0),
    Parameter("ammonia", "Ammonia as N", "mg/L", 2, 0.0, 200.0, 0.0, 3.0),
    Parameter("nitrite", "Nitrite as N", "mg/L", 3, 0.0, 100.0, 0.0, 0.5),
    Parameter("nitrate", "Nitrate as N", "mg/L", 1, 0.0, 1000.0, 0.0, 25.0),
    Parameter("sulfide", "Sulfide as S", "mg/L", 2, 0.0, 100.0, 0.0, 5.0),
    Parameter("chloride", "Chloride", "mg/L", 0, 0.0, 25000.0, 0.0, 400.0),
    Parameter("sulfate", "Sulfate", "mg/L", 0, 0.0, 10000.0, 0.0, 500.0),
    Parameter("phosphate", "Phosphate as PO4", "mg/L", 2, 0.0, 500.0, 0.0, 10.0),
    Parameter("tds", "Total dissolved solids", "mg/L", 0, 0.0, 100000.0, 5.0, 2000.0),
    Parameter("total_organic_carbon", "Total organic carbon", "mg/L", 1, 0.0, 500.0, 0.0, 20.0),
    Parameter("heterotrophic_plate_count", "Heterotrophic plate count", "CFU/mL", 0, 0.0, 1e7, 0.0, 500.0),
    Parameter("total_coliform", "Total coliform", "CFU/100mL", 0, 0.0, 1e8, 0.0, 0.0),
    Parameter("e_coli", "E. coli", "CFU/100mL", 0, 0.0, 1e8, 0.0, 0.0),
)
_EQUIPMENT = (
    # Units of "totaliser" and "volume" at a meter are the meter's own: unit_at says which.
    Parameter("totaliser", "Totaliser", "L", 0, 0.0, None, sites=(METER,)),
    Parameter("totaliser_reset", "Totaliser before reset", "L", 0, 0.0, None, sites=(METER,)),
    Parameter("peak_hourly_flow", "Peak hourly flow", "m3/h", 0, 0.0, 100000.0, sites=(METER,)),
    Parameter("volume", "Volume", "L", 0, 0.0, None, sites=(METER, VESSEL)),
    Parameter("feeder_setting", "Feeder setting", "%", 1, 0.0, 100000.0, sites=(DOSING_POINT,)),
    Parameter("drawdown", "Draw-down", "mL/min", 1, 0.0, 100000.0, sites=(DOSING_POINT,)),
    Parameter("run_hours", "Run hours", "h", 1, 0.0, 1e6, sites=(DOSING_POINT,)),
    Parameter("bags", "Bags", "", 0, 0.0, 10000.0, 0.0, 200.0, sites=(DOSING_POINT,)),
    Parameter("level", "Level", "m", 3, 0.0, 40.0, sites=(VESSEL,)),
    Parameter("weight", "Gross weight", "kg", 1, 0.0, 200000.0, sites=(VESSEL,)),
    Parameter("strength", "Strength test", "%", 2, 0.0, 1000.0, sites=(VESSEL,)),
    Parameter("container_change", "Gross weight of new container", "kg", 1, 0.0, 200000.0, sites=(VESSEL,)),
)
PARAMETERS: dict[str, Parameter] = {parameter.name: parameter for parameter in (*_WATER, *_EQUIPMENT)}

STRENGTH_UNITS = {
    "g_per_L_available_chlorine": "g/L",
    "trade_pct": "%",
    "weight_pct_available_chlorine": "%",
    "weight_pct": "%",
}
"""The unit a strength test is written in, by the product's strength basis."""


def known(stated: Stated, at: dt.datetime) -> dict[str, Parameter]:
    """All parameters a works knows at a moment, by name: those above and its own ``[[parameter]]`` blocks."""
    return PARAMETERS | {
        name: Parameter(
            name,
            value.get("label") or name.replace("_", " ").capitalize(),
            value["unit"],
            int(value.get("decimals", 2)),
            value.get("low", 0.0),
            value.get("high"),
            value.get("usual_low"),
            value.get("usual_high"),
        )
        for name, value in stated.in_force("parameter", at)
    }


def own_unit(stated: Stated, at: dt.datetime, name: str) -> str | None:
    """The canonical unit of a parameter the works defines itself, as ``chemistry.units`` wants it; None for a
    built-in one.
    """
    value = stated.value("parameter", name, at) if name not in PARAMETERS else None
    return None if value is None else str(value["unit"])


def unit_at(stated: Stated, at: dt.datetime, site: str, name: str) -> str:
    """The unit in which a parameter is kept at a site.

    Totalisers and volumes of a meter count in the meter's own unit; a strength test in that of its product's
    basis; everything else in the parameter's canonical unit. Raises KeyError for a parameter nobody knows.
    """
    if name in ("totaliser", "totaliser_reset", "volume"):
        meter = stated.value("meter", site, at)
        if meter is not None:
            return str(meter["unit"])
    if name == "strength":
        vessel = stated.value("vessel", site, at)
        product = stated.value("product", str(vessel["product"]), at) if vessel else None
        if product is not None:
            return STRENGTH_UNITS.get(str(product["strength_basis"]), "%")
    return known(stated, at)[name].unit
