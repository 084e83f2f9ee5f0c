"""Feeding arithmetic: mass, dose and flow; pump settings and draw-down; drums, cylinders, bags and days of supply.

mg/L x ML = kg (definition). ``active_fraction`` is kg on the dose basis per kg product
(`chemistry.products`). Floats or arrays. Sources: ABC-TABLES for the operator forms; the rest follows from
the definitions.
"""

from typing import Any

import numpy as np

from chemistry import constants, errors, products, units

Values = Any  # a float or a numpy array

MINUTES_PER_DAY = 1440.0
LB_PER_US_MGAL_PER_MG_L = units.convert(1.0, "mg/L", "lb/US_Mgal")  # 8.3454; hand sheets print 8.34
_SOURCE = "feeding arithmetic"


def dose_mg_l(product_kg: Values, active_fraction: Values, volume_ml: Values) -> Values:
    """Dose in mg/L from product fed (kg) into a volume (ML) over the same time.

    Refuses a volume of 0 or less: no water, no dose. A negative use is refused as well, because it is a
    reading to resolve (a refill, a wrong dip), never a dose of 0.
    """
    errors.require("product used", product_kg, "kg", 0.0, np.inf, _SOURCE)
    errors.require("active fraction", active_fraction, "kg/kg", 0.0, 3.0, _SOURCE)
    _positive("volume treated", volume_ml, "ML")
    return product_kg * active_fraction / volume_ml


def product_kg(dose_mg_l: Values, active_fraction: Values, volume_ml: Values) -> Values:
    """Product in kg for a dose (mg/L) in a volume (ML), or kg/d for a flow in ML/d."""
    errors.require("dose", dose_mg_l, "mg/L", 0.0, 1e6, _SOURCE)
    errors.require("volume", volume_ml, "ML", 0.0, np.inf, _SOURCE)
    _positive("active fraction", active_fraction, "kg/kg")
    return dose_mg_l * volume_ml / active_fraction


def volume_treated_ml(product_kg: Values, active_fraction: Values, dose_mg_l: Values) -> Values:
    """Water in ML that so much product (kg) doses at ``dose_mg_l``."""
    _positive("dose", dose_mg_l, "mg/L")
    return product_kg * active_fraction / dose_mg_l


def mass_lb(dose_mg_l: Values, volume_us_mgal: Values, active_fraction: Values = 1.0) -> Values:
    """The same in pounds and million US gallons: mg/L x MG x 8.3454 / active fraction (ABC-TABLES use 8.34)."""
    _positive("active fraction", active_fraction, "lb/lb")
    return dose_mg_l * volume_us_mgal * LB_PER_US_MGAL_PER_MG_L / active_fraction


def feed_l_h(dose_mg_l: Values, flow_m3_h: Values, active_fraction: Values, density_kg_l: Values) -> Values:
    """Product feed in L/h for a dose (mg/L) at a flow (m3/h): C Q / (1000 w ρ)."""
    _positive("active fraction x density", active_fraction * density_kg_l, "kg/L")
    return dose_mg_l * flow_m3_h / (1000.0 * active_fraction * density_kg_l)


def feed_ml_min(dose_mg_l: Values, flow_m3_d: Values, active_fraction: Values, density_kg_l: Values) -> Values:
    """Product feed in mL/min for a dose (mg/L) at a flow (m3/d): C Q / (w ρ 1440) (ABC-TABLES)."""
    _positive("active fraction x density", active_fraction * density_kg_l, "kg/L")
    return dose_mg_l * flow_m3_d / (active_fraction * density_kg_l * MINUTES_PER_DAY)


def dose_from_feed_mg_l(feed_l_h: Values, flow_m3_h: Values, active_fraction: Values, density_kg_l: Values) -> Values:
    """Dose in mg/L that a feed (L/h of product) gives at a flow (m3/h)."""
    _positive("flow", flow_m3_h, "m3/h")
    return feed_l_h * 1000.0 * active_fraction * density_kg_l / flow_m3_h


def drawdown_ml_min(volume_ml: Values, seconds: Values) -> Values:
    """Draw-down of a calibration cylinder in mL/min, at running pressure (common practice, no source)."""
    _positive("time", seconds, "s")
    return volume_ml * 60.0 / seconds


def stroke_pct(wanted: Values, maximum: Values) -> Values:
    """Stroke or speed in % for a wanted feed, same unit as the feeder's maximum; above 100 % is refused (ABC-TABLES)."""
    _positive("feeder maximum", maximum, "")
    setting = wanted / maximum * 100.0
    errors.require("feeder setting", setting, "%", 0.0, 100.0, "the feeder can't give more than its maximum")
    return setting


def feed_from_setting(setting_pct: Values, maximum: Values) -> Values:
    """Feed from a setting in % of the feeder's maximum, in the maximum's unit."""
    errors.require("feeder setting", setting_pct, "%", 0.0, 100.0, _SOURCE)
    return setting_pct / 100.0 * maximum


def cylinder_net_kg(gross_kg: Values, tare_kg: Values) -> Values:
    """Gas left in a cylinder or container: gross less its own stamped tare. Pressure tells nothing about contents."""
    _positive("tare", tare_kg, "kg")
    errors.require("net weight", gross_kg - tare_kg, "kg", 0.0, np.inf, "a cylinder weighs its tare or more")
    return gross_kg - tare_kg


def used_on_scale_kg(start_gross_kg: Values, end_gross_kg: Values, added_kg: Values = 0.0) -> Values:
    """Product used from a scale: start + added - end; negative is refused as a reading to resolve."""
    used = start_gross_kg + added_kg - end_gross_kg
    errors.require("product used", used, "kg", 0.0, np.inf, "start + added - end")
    return used


def containers_for(product_kg: Values, container_kg: Values) -> Values:
    """Whole drums, bags or cylinders that hold so much product."""
    _positive("container", container_kg, "kg")
    return np.ceil(product_kg / container_kg - 1e-9)


def days_of_supply(usable_active_kg: Values, active_kg_per_day: Values) -> Values:
    """Days that usable active mass lasts at a daily use; infinite when nothing is used."""
    errors.require("stock", usable_active_kg, "kg", 0.0, np.inf, _SOURCE)
    errors.require("daily use", active_kg_per_day, "kg/d", 0.0, np.inf, _SOURCE)
    use = np.asarray(active_kg_per_day, dtype=float)
    with np.errstate(divide="ignore"):
        days = np.where(use > 0, usable_active_kg / np.where(use > 0, use, 1.0), np.inf)
    return float(days) if np.ndim(usable_active_kg) == 0 and np.ndim(active_kg_per_day) == 0 else days


def stock_to_hold_kg(daily_use_kg: Values, least_days: Values, shipping_days: Values, *, shipping_factor: float) -> Values:
    """Stock to hold: daily use x (least days + factor x shipping days).

    DAVIS-2010 table 5-1 (opened): 30 d and factor 2 for critical chemicals, 10 d and 1.5 for those that may
    be interrupted.
    """
    errors.require("daily use", daily_use_kg, "kg/d", 0.0, np.inf, _SOURCE)
    return daily_use_kg * (least_days + shipping_factor * shipping_days)


def blend(amount_a: Values, strength_a: Values, amount_b: Values, strength_b: Values) -> Values:
    """Strength of two streams or batches put together, weighted by amount (one unit for both)."""
    _positive("total", amount_a + amount_b, "")
    return (amount_a * strength_a + amount_b * strength_b) / (amount_a + amount_b)


def solution_strength_pct(dry_kg: Values, water_kg: Values, purity: Values = 1.0) -> Values:
    """Weight % of a solution made from dry product and water: 100 m p / (m + water)."""
    _positive("total", dry_kg + water_kg, "kg")
    return 100.0 * dry_kg * purity / (dry_kg + water_kg)


def threshold_solution_kg(threshold_kg: Values, weight_fraction: Values) -> Values:
    """Solution that holds a threshold quantity counted as the pure substance (40 CFR 68.115, as EPA explains it)."""
    errors.require("weight fraction", weight_fraction, "kg/kg", 1e-9, 1.0, "40 CFR 68.115")
    return threshold_kg / weight_fraction


def caco3_equivalent_mg_l(dose_mg_l: Values, formula: str) -> Values:
    """Alkalinity added (+) or taken (-), mg/L as CaCO3, by a dose of a pure alkali or acid (equivalents per mole)."""
    if formula not in products.ALKALINITY_EQ_MOL:
        known = ", ".join(products.ALKALINITY_EQ_MOL)
        raise errors.ChemistryError(f"no alkalinity equivalents for {formula!r}; known: {known}")
    per_mg = products.ALKALINITY_EQ_MOL[formula] / constants.molar_mass(formula) * constants.CACO3_MG_MEQ
    return dose_mg_l * per_mg


def _positive(quantity: str, value: Values, unit: str) -> None:
    errors.require(quantity, value, unit, np.nextafter(0.0, 1.0), np.inf, f"{quantity} must be above 0")
