"""Spellings, factors and parameters that `chemistry.units` converts between. Sources: see `chemistry.units`."""

from dataclasses import dataclass
from fractions import Fraction

from chemistry import constants


@dataclass(frozen=True)
class Unit:
    """value in the kind's base unit = value * factor + offset; ``exact`` when a definition fixes the factor."""

    kind: str
    factor: Fraction = Fraction(1)
    offset: Fraction = Fraction(0)
    exact: bool = True


@dataclass(frozen=True)
class Parameter:
    """Canonical unit of a measured parameter, the species its mg/L count, that species' charge
    (equivalents), and the other canonical unit where a meter may count mass instead of volume."""

    unit: str
    formula: str = ""
    charge: int = 0
    or_unit: str = ""


def _f(text: str) -> Fraction:
    return Fraction(text)


_US_GAL_L = _f("3.785411784")
_IMP_GAL_L = _f("4.54609")
_LB_KG = _f("0.45359237")
_GRAIN_MG = _f("64.79891")
_FT_M = _f("0.3048")
_CAO_TO_CACO3 = Fraction(str(constants.molar_mass("CaCO3"))) / Fraction(str(constants.molar_mass("CaO")))
_FT3_L = _FT_M**3 * 1000

UNITS: dict[str, Unit] = {
    "": Unit("number"),
    "pH": Unit("pH"),
    # mass per volume, base mg/L
    "mg/L": Unit("mass per volume"),
    "mg/l": Unit("mass per volume"),
    "g/L": Unit("mass per volume", _f("1000")),
    "µg/L": Unit("mass per volume", _f("0.001")),
    "ug/L": Unit("mass per volume", _f("0.001")),
    "g/m3": Unit("mass per volume"),
    "kg/ML": Unit("mass per volume"),
    "lb/US_Mgal": Unit("mass per volume", _LB_KG / _US_GAL_L),
    "gr/US_gal": Unit("mass per volume", _GRAIN_MG / _US_GAL_L),
    # hardness and alkalinity, base mg/L as CaCO3
    "mg/L as CaCO3": Unit("as CaCO3"),
    "mg/L CaCO3": Unit("as CaCO3"),
    "°fH": Unit("as CaCO3", _f("10")),
    "°dH": Unit("as CaCO3", 10 * _CAO_TO_CACO3, exact=False),
    "°e": Unit("as CaCO3", _GRAIN_MG / _IMP_GAL_L),
    "gr/gal": Unit("as CaCO3", _GRAIN_MG / _US_GAL_L),
    "mmol/L": Unit("amount per volume"),
    "meq/L": Unit("equivalents"),
    # temperature, base °C
    "°C": Unit("temperature"),
    "C": Unit("temperature"),
    "deg C": Unit("temperature"),
    "°F": Unit("temperature", Fraction(5, 9), Fraction(-160, 9)),
    "F": Unit("temperature", Fraction(5, 9), Fraction(-160, 9)),
    "K": Unit("temperature", offset=_f("-273.15")),
    "NTU": Unit("turbidity"),
    "FNU": Unit("turbidity"),
    "uS/cm": Unit("conductance"),
    "µS/cm": Unit("conductance"),
    "mS/cm": Unit("conductance", _f("1000")),
    # length, base m
    "m": Unit("length"),
    "cm": Unit("length", _f("0.01")),
    "mm": Unit("length", _f("0.001")),
    "ft": Unit("length", _FT_M),
    "in": Unit("length", _f("0.0254")),
    "mi": Unit("length", 5280 * _FT_M),
    "%": Unit("share"),
    # volume, base L
    "L": Unit("volume"),
    "mL": Unit("volume", _f("0.001")),
    "m3": Unit("volume", _f("1000")),
    "ML": Unit("volume", _f("1000000")),
    "US_gal": Unit("volume", _US_GAL_L),
    "US_Mgal": Unit("volume", _US_GAL_L * 1000000),
    "imp_gal": Unit("volume", _IMP_GAL_L),
    "US_fl_oz": Unit("volume", _US_GAL_L / 128),
    "US_qt": Unit("volume", _US_GAL_L / 4),
    "ft3": Unit("volume", _FT3_L),
    "in3": Unit("volume", _f("0.016387064")),
    # mass, base kg
    "kg": Unit("mass"),
    "t": Unit("mass", _f("1000")),
    "g": Unit("mass", _f("0.001")),
    "mg": Unit("mass", _f("0.000001")),
    "lb": Unit("mass", _LB_KG),
    "oz": Unit("mass", _LB_KG / 16),
    "grain": Unit("mass", _GRAIN_MG / 1000000),
    "US_ton": Unit("mass", _LB_KG * 2000),
    # flow, base m3/h
    "m3/h": Unit("flow"),
    "m3/d": Unit("flow", Fraction(1, 24)),
    "m3/s": Unit("flow", _f("3600")),
    "ML/d": Unit("flow", Fraction(1000, 24)),
    "L/s": Unit("flow", _f("3.6")),
    "L/min": Unit("flow", _f("0.06")),
    "L/h": Unit("flow", _f("0.001")),
    "mL/min": Unit("flow", _f("0.00006")),
    "US_gal/min": Unit("flow", _US_GAL_L * 60 / 1000),
    "US_gal/h": Unit("flow", _US_GAL_L / 1000),
    "US_gal/d": Unit("flow", _US_GAL_L / 24000),
    "US_Mgal/d": Unit("flow", _US_GAL_L * 1000 / 24),
    "MGD": Unit("flow", _US_GAL_L * 1000 / 24),
    "imp_Mgal/d": Unit("flow", _IMP_GAL_L * 1000 / 24),
    "imp_gal/min": Unit("flow", _IMP_GAL_L * 60 / 1000),
    "ft3/s": Unit("flow", _FT3_L * 3600 / 1000),
    # mass flow, base kg/h
    "kg/h": Unit("mass flow"),
    "kg/d": Unit("mass flow", Fraction(1, 24)),
    "g/min": Unit("mass flow", _f("0.06")),
    "lb/d": Unit("mass flow", _LB_KG / 24),
    "lb/h": Unit("mass flow", _LB_KG),
    # time, base h
    "h": Unit("time"),
    "min": Unit("time", Fraction(1, 60)),
    "s": Unit("time", Fraction(1, 3600)),
    "d": Unit("time", _f("24")),
    # counts, base per 100 mL
    "CFU/100mL": Unit("count"),
    "MPN/100mL": Unit("count"),
    "CFU/mL": Unit("count", _f("100")),
    # density, base kg/L; a specific gravity needs its reference water, see chemistry.densities
    "kg/L": Unit("density"),
    "kg/m3": Unit("density", _f("0.001")),
    "g/cm3": Unit("density"),
    "lb/US_gal": Unit("density", _LB_KG / _US_GAL_L),
    # available chlorine per volume of product, base g/L
    "g/L available chlorine": Unit("chlorine strength"),
    "trade_pct": Unit("chlorine strength", _f("10")),
}

# What a record may be written in; everything else is refused with this list.
ACCEPTED_UNITS: tuple[str, ...] = (
    "pH",
    "",
    "mg/L",
    "mg/l",
    "µg/L",
    "ug/L",
    "g/L",
    "mg/L as CaCO3",
    "mg/L CaCO3",
    "mmol/L",
    "meq/L",
    "°dH",
    "°fH",
    "°e",
    "gr/gal",
    "°C",
    "C",
    "deg C",
    "°F",
    "F",
    "NTU",
    "FNU",
    "uS/cm",
    "µS/cm",
    "mS/cm",
    "m",
    "cm",
    "mm",
    "%",
    "ft",
    "in",
    "L",
    "m3",
    "ML",
    "US_gal",
    "US_Mgal",
    "imp_gal",
    "kg",
    "t",
    "g",
    "lb",
    "m3/h",
    "ML/d",
    "L/s",
    "US_gal/min",
    "US_Mgal/d",
    "h",
    "CFU/mL",
    "CFU/100mL",
    "MPN/100mL",
    "L/h",
    "kg/h",
    "mL/min",
)

_AS_CACO3 = "mg/L as CaCO3"
# Hardness charge 2: one mmol/L is one mmol/L of CaCO3. Alkalinity charge 1: one mmol/L is one mmol/L of H+
# (m-value).
PARAMETERS: dict[str, Parameter] = {
    "pH": Parameter(""),
    "free_chlorine": Parameter("mg/L", "Cl2", 2),
    "total_chlorine": Parameter("mg/L", "Cl2", 2),
    "combined_chlorine": Parameter("mg/L", "Cl2", 2),
    "chlorine_dioxide": Parameter("mg/L", "ClO2"),
    "ozone": Parameter("mg/L", "O3"),
    "hydrogen_peroxide": Parameter("mg/L", "H2O2"),
    "permanganate": Parameter("mg/L", "KMnO4"),
    "hardness": Parameter(_AS_CACO3, "", 2),
    "calcium_hardness": Parameter(_AS_CACO3, "", 2),
    "magnesium_hardness": Parameter(_AS_CACO3, "", 2),
    "alkalinity": Parameter(_AS_CACO3, "", 1),
    "p_alkalinity": Parameter(_AS_CACO3, "", 1),
    "calcium": Parameter("mg/L", "Ca", 2),
    "magnesium": Parameter("mg/L", "Mg", 2),
    "sodium": Parameter("mg/L", "Na", 1),
    "potassium": Parameter("mg/L", "K", 1),
    "carbon_dioxide": Parameter("mg/L", "CO2"),
    "temperature": Parameter("°C"),
    "turbidity": Parameter("NTU"),
    "conductance": Parameter("uS/cm"),
    "colour": Parameter("mg/L"),
    "fluoride": Parameter("mg/L", "F", 1),
    "iron": Parameter("mg/L", "Fe", 2),
    "manganese": Parameter("mg/L", "Mn", 2),
    "aluminium": Parameter("mg/L", "Al", 3),
    "ammonia": Parameter("mg/L", "N", 1),
    "nitrite": Parameter("mg/L", "N", 1),
    "nitrate": Parameter("mg/L", "N", 1),
    "sulfide": Parameter("mg/L", "S", 2),
    "chloride": Parameter("mg/L", "Cl", 1),
    "sulfate": Parameter("mg/L", "SO4", 2),
    "phosphate": Parameter("mg/L", "PO4", 3),
    "tds": Parameter("mg/L"),
    "total_organic_carbon": Parameter("mg/L", "C"),
    "heterotrophic_plate_count": Parameter("CFU/mL"),
    "total_coliform": Parameter("CFU/100mL"),
    "e_coli": Parameter("CFU/100mL"),
    "totaliser": Parameter("L", or_unit="kg"),
    "totaliser_reset": Parameter("L", or_unit="kg"),
    "volume": Parameter("L", or_unit="kg"),
    "peak_hourly_flow": Parameter("m3/h"),
    "feeder_setting": Parameter("%"),
    "drawdown": Parameter("mL/min"),
    "run_hours": Parameter("h"),
    "bags": Parameter(""),
    "level": Parameter("m"),
    "weight": Parameter("kg"),
    "container_change": Parameter("kg"),
    "strength": Parameter("%"),
}

# Units that stay as they are, because another fact (the vessel's height, the product's basis) gives them
# meaning.
KEPT_UNITS: dict[str, tuple[str, ...]] = {
    "level": ("%",),
    "feeder_setting": ("%", "L/h", "kg/h"),
    "strength": ("%", "g/L"),
}

# Spellings that are only another name of the canonical unit, for that parameter alone. Colour counts mg/L
# of platinum (ISO 7887, one Hazen unit; from memory), often written without a unit.
SAME_AS_CANONICAL: dict[str, tuple[str, ...]] = {"pH": ("pH",), "colour": ("", "TCU", "mg/L Pt")}

# Species whose concentration the trade also states as CaCO3.
STATED_AS_CACO3: frozenset[str] = frozenset({"Ca", "Mg", "Na", "K", "Cl", "SO4"})
