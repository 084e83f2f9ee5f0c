"""The water of a simulated works, hour by hour: raw, what it asks of each chemical, and what comes out."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from chemistry import carbonate, constants
from plant.demo.clockwork import Grid
from plant.demo.plan import Plan, Season

_CA = constants.CACO3_G_MOL / constants.molar_mass("Ca")
_MG = constants.CACO3_G_MOL / constants.molar_mass("Mg")
_LIME_MG_MEQ = constants.molar_mass("Ca(OH)2") / 2
_FE_ALKALINITY = 3 * constants.CACO3_MG_MEQ / constants.molar_mass("Fe")


@dataclass
class RawWater:
    """Hourly arrays, canonical units."""

    flow_ml_h: np.ndarray
    temperature: np.ndarray
    calcium: np.ndarray
    magnesium: np.ndarray
    alkalinity: np.ndarray
    ph: np.ndarray
    turbidity: np.ndarray
    iron: np.ndarray
    manganese: np.ndarray
    fluoride: np.ndarray
    chlorine_demand: np.ndarray
    peroxide_demand: np.ndarray
    filtered_ph: np.ndarray
    store_temperature: np.ndarray
    extra: dict[str, np.ndarray] = field(default_factory=dict)

    @property
    def hardness(self) -> np.ndarray:
        return _CA * self.calcium + _MG * self.magnesium


def raw_water(plan: Plan, grid: Grid, rng: np.random.Generator, shift: dict[str, np.ndarray]) -> RawWater:
    """Seasons and noise, plus what incidents add (``shift``: name -> hourly array)."""

    def hourly(name: str, season: Season, memory: float = 0.85) -> np.ndarray:
        days = grid.days + 4
        noise = np.zeros(days)
        steps = rng.normal(0.0, season.noise * np.sqrt(1 - memory**2), days)
        for day in range(1, days):
            noise[day] = memory * noise[day - 1] + steps[day]
        smooth = np.interp(np.arange(grid.hours) / 24, np.arange(days), noise)
        return np.maximum(season.mean + season.summer * grid.season + smooth, season.low) + shift.get(name, 0.0)

    waters = plan.waters
    calm = hourly("turbidity", waters.turbidity_ntu)
    return RawWater(
        flow_ml_h=_flow(plan, grid, hourly("flow", waters.flow_ml_d), rng) * (1 + shift.get("flow_share", 0.0)),
        temperature=hourly("temperature", waters.temperature_c),
        calcium=hourly("calcium", waters.calcium_mg_l),
        magnesium=hourly("magnesium", waters.magnesium_mg_l),
        alkalinity=hourly("alkalinity", waters.alkalinity_mg_l),
        ph=hourly("ph", waters.ph),
        turbidity=calm + _storms(grid, rng),
        iron=hourly("iron", waters.iron_mg_l),
        manganese=hourly("manganese", waters.manganese_mg_l),
        fluoride=hourly("fluoride", waters.fluoride_mg_l),
        chlorine_demand=hourly("chlorine_demand", waters.chlorine_demand_mg_l),
        peroxide_demand=hourly("peroxide_demand", waters.peroxide_demand_mg_l),
        filtered_ph=hourly("filtered_ph", waters.filtered_ph),
        store_temperature=hourly("store_temperature", waters.store_temperature_c),
    )


def _flow(plan: Plan, grid: Grid, ml_d: np.ndarray, rng: np.random.Generator) -> np.ndarray:
    """ML in each hour: more in the morning, less at night and at week-ends."""
    shape = np.array(
        [0.82, 0.78, 0.76, 0.76, 0.80, 0.92, 1.08, 1.20, 1.28, 1.26, 1.18, 1.12,
         1.08, 1.05, 1.02, 1.00, 1.00, 1.04, 1.08, 1.08, 1.04, 0.98, 0.92, 0.86]
    )  # fmt: skip
    shape = shape / shape.mean()
    weekend = np.where(grid.weekday >= 5, 0.94, 1.02)
    return ml_d / 24 * shape[grid.local_hour] * weekend * (1 + rng.normal(0, 0.01, grid.hours))


def _storms(grid: Grid, rng: np.random.Generator) -> np.ndarray:
    """A turbid spell every three weeks or so, falling off over a day or two."""
    out = np.zeros(grid.hours)
    for start in np.flatnonzero(rng.random(grid.hours) < 1 / (21 * 24)):
        tail = np.arange(grid.hours - start)
        out[start:] += rng.uniform(4, 16) * (1 - np.exp(-tail / 4)) * np.exp(-tail / 22)
    return out


def carbon_dioxide(raw: RawWater) -> np.ndarray:
    """CO2 of the raw water, mg/L."""
    return np.asarray(carbonate.co2_mg_l(np.maximum(raw.temperature, 0.5), raw.ph, raw.alkalinity))


def lime_wanted(raw: RawWater, target_mg_l: float) -> np.ndarray:
    """Hydrated lime (mg/L Ca(OH)2) that takes the CO2 and brings calcium carbonate hardness down to the target."""
    remove = np.clip(raw.hardness - target_mg_l, 0.0, np.minimum(_CA * raw.calcium, raw.alkalinity))
    meq = 2 * carbon_dioxide(raw) / constants.molar_mass("CO2") + remove / constants.CACO3_MG_MEQ
    return meq * _LIME_MG_MEQ


@dataclass
class Softened:
    """The filtered water that came of the doses really given."""

    calcium: np.ndarray
    magnesium: np.ndarray
    alkalinity: np.ndarray
    ph: np.ndarray

    @property
    def hardness(self) -> np.ndarray:
        return _CA * self.calcium + _MG * self.magnesium


def softened(raw: RawWater, lime_mg_l: np.ndarray | None, iron_dose_mg_l: np.ndarray | None) -> Softened:
    """What lime (mg/L Ca(OH)2) and ferric (mg/L Fe) leave: stoichiometric; pH is set by blending and follows lime."""
    removed = np.zeros_like(raw.calcium)
    surplus = np.zeros_like(raw.calcium)
    if lime_mg_l is not None:
        free = lime_mg_l / _LIME_MG_MEQ - 2 * carbon_dioxide(raw) / constants.molar_mass("CO2")
        most = np.minimum(_CA * raw.calcium, raw.alkalinity) * 0.95
        removed = np.clip(free * constants.CACO3_MG_MEQ, 0.0, most)
        surplus = free * constants.CACO3_MG_MEQ - removed
    taken = _FE_ALKALINITY * iron_dose_mg_l if iron_dose_mg_l is not None else 0.0
    return Softened(
        calcium=raw.calcium - removed / _CA,
        magnesium=raw.magnesium,
        alkalinity=raw.alkalinity - removed - taken,
        ph=raw.filtered_ph + 0.01 * np.clip(surplus, -30, 30),
    )


def _as_water(water: Softened, temperature: np.ndarray) -> carbonate.Water:
    return carbonate.Water(
        temperature_c=np.maximum(temperature, 0.5),
        ph=water.ph,
        alkalinity_mg_l_caco3=water.alkalinity,
        calcium_mg_l=water.calcium,
        magnesium_mg_l=water.magnesium,
    )


def caustic_wanted(water: Softened, temperature: np.ndarray, target_ph: float) -> np.ndarray:
    """NaOH in mg/L to the target pH by carbonate equilibrium; 0 where the water is there already."""
    below = water.ph < target_ph - 1e-6
    safe = Softened(water.calcium, water.magnesium, water.alkalinity, np.minimum(water.ph, target_ph - 1e-3))
    dose = np.asarray(carbonate.dose_for_target_ph(_as_water(safe, temperature), "NaOH", target_ph))
    return np.where(below, dose, 0.0)


def final_ph(
    water: Softened, temperature: np.ndarray, caustic_mg_l: np.ndarray | None, chlorine_mg_l: np.ndarray | None
) -> np.ndarray:
    """pH after caustic and hypochlorite really given, closed to the air."""
    doses = {}
    if caustic_mg_l is not None:
        doses["NaOH"] = caustic_mg_l
    if chlorine_mg_l is not None:
        doses["NaOCl"] = chlorine_mg_l
    if not doses:
        return water.ph
    return np.asarray(carbonate.speciation_after_doses(_as_water(water, temperature), doses).ph)
