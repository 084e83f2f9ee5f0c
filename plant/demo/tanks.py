"""Feeds and their tanks, hour by hour: what was really fed, held, delivered, moved and lost."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from chemistry import decay, products, vessels
from plant.demo.clockwork import Grid
from plant.demo.effects import Effects
from plant.demo.plan import Block, Feed, Incident

_FILL_AT = 8
_RESTATE_BEYOND = 0.03
_LATEST_DELIVERY, _EARLIEST_DELIVERY = 13, 9


@dataclass(frozen=True)
class Load:
    """A load as it really was (kg, active fraction) and as its papers said."""

    hour: int
    vessel: str
    kg: float
    fraction: float
    certified: float
    lot: str
    incident: Incident | None = None


@dataclass(frozen=True)
class Move:
    """Product moved from a bulk tank into its day tank."""

    hour: int
    from_vessel: str
    to_vessel: str
    kg: float


@dataclass(frozen=True)
class Change:
    """A container exchanged: what the old one still weighed and the new one weighs, gross kg."""

    hour: int
    vessel: str
    old_gross_kg: float
    new_gross_kg: float


@dataclass
class Held:
    """kg in a vessel at the start of each hour (after what happens there) and at its end, and the active fraction."""

    block: Block
    start_kg: np.ndarray
    end_kg: np.ndarray
    fraction: np.ndarray

    def kg_at(self, hours: np.ndarray) -> np.ndarray:
        """kg held at moments that fall inside hours."""
        whole = hours.astype(int)
        part = hours - whole
        return self.start_kg[whole] + (self.end_kg[whole] - self.start_kg[whole]) * part


@dataclass
class FeedHistory:
    """Everything true about one feed. ``active`` is in the product's dose basis."""

    feed: Feed
    product_kg: np.ndarray
    active_kg: np.ndarray
    setting_kg_ml: np.ndarray
    held: dict[str, Held]
    loads: list[Load] = field(default_factory=list)
    moves: list[Move] = field(default_factory=list)
    changes: list[Change] = field(default_factory=list)
    designs: list[tuple[int, float]] = field(default_factory=list)

    @property
    def nominal_fraction(self) -> float:
        """The active fraction of the product as stated."""
        return float(products.fraction_of_product(self.feed.product))

    def dose_mg_l(self, flow_ml_h: np.ndarray) -> np.ndarray:
        """The dose really given in each hour, mg/L in the dose basis."""
        return self.active_kg / np.maximum(flow_ml_h, 1e-9)


def capacity_kg(block: Block, product: Block) -> float:
    """kg up to the highest filling."""
    share = block.get("max_fill_pct", 95.0) / 100
    if block["shape"] == "scale":
        return float(block["capacity_kg"]) * share
    return vessels.full_volume_l(block) * share * float(product["density_kg_per_L"])


def heel_kg(block: Block, product: Block) -> float:
    return float(block.get("heel_kg", 0.0)) or float(block.get("heel_L", 0.0)) * float(product.get("density_kg_per_L", 1.0))


class _Tank:
    """The state of one tank while the hours pass."""

    def __init__(self, block: Block, product: Block, hours: int, kg: float, fraction: float) -> None:
        self.block, self.product = block, product
        self.kg, self.fraction, self.believed = kg, fraction, fraction
        self.heel, self.capacity = heel_kg(block, product), capacity_kg(block, product)
        self.held = Held(block, np.zeros(hours), np.zeros(hours), np.zeros(hours))

    def pour(self, kg: float, fraction: float, believed: float) -> None:
        total = self.kg + kg
        self.fraction = (self.kg * self.fraction + kg * fraction) / total
        self.believed = (self.kg * self.believed + kg * believed) / total
        self.kg = total

    def take(self, kg: float) -> float:
        taken = float(min(kg, max(self.kg - self.heel, 0.0)))
        self.kg -= taken
        return taken

    def age(self, kept: float) -> None:
        self.fraction *= kept
        self.believed *= kept


def run(
    feed: Feed,
    grid: Grid,
    flow_ml_h: np.ndarray,
    wanted_mg_l: np.ndarray,
    store_temperature: np.ndarray,
    effect: Effects,
    rng: np.random.Generator,
) -> FeedHistory:
    """The whole history of one feed. ``wanted_mg_l`` is the dose the water asks for, hour by hour."""
    nominal = float(products.fraction_of_product(feed.product))
    wanted = grid.daily(wanted_mg_l) / np.diff(grid.day_edges)
    designs, desired = _doses(feed, grid, wanted)
    day_of_hour = np.clip(np.searchsorted(grid.day_edges, np.arange(grid.hours), side="right") - 1, 0, grid.days - 1)
    gain = _wander(grid.hours, feed.wander, rng) * effect.gain.get(feed.code, 1.0)
    if feed.scatter:
        gain = gain * np.exp(rng.normal(0.0, feed.scatter, grid.days))[day_of_hour]
    tank = _Tank(feed.tank, feed.product, grid.hours, 0.0, nominal)
    tank.kg = tank.heel + feed.opening_share * (tank.capacity - tank.heel)
    day = _Tank(feed.day_tank, feed.product, grid.hours, 0.0, nominal) if feed.day_tank else None
    if day is not None:
        day.kg = 0.8 * day.capacity
    last = day or tank
    use_kg_d = float(np.mean(desired) * flow_ml_h.sum() / grid.hours * 24 / nominal)
    supply = _Supply(feed, grid, use_kg_d, nominal, effect, rng)
    out = FeedHistory(
        feed,
        np.zeros(grid.hours),
        np.zeros(grid.hours),
        np.zeros(grid.hours),
        {item.block["code"]: item.held for item in (tank, day) if item is not None},
        designs=designs,
    )
    leaks = {item: effect.leak_kg_h.get(item.block["code"]) for item in (tank, day) if item is not None}
    for hour in range(grid.hours):
        if grid.local_hour[hour] == 0:
            for item in leaks:
                item.age(_kept(feed.product, item.fraction, float(store_temperature[hour])))
        supply.arrive(hour, tank, out)
        if day is not None and grid.local_hour[hour] == _FILL_AT and hour:
            _fill(hour, tank, day, out)
        if feed.refill == "change" and grid.local_hour[hour] in (8, 20) and hour:
            supply.change(hour, tank, out)
        for item in leaks:
            item.held.start_kg[hour], item.held.fraction[hour] = item.kg, item.fraction
        setting = desired[day_of_hour[hour]] / last.believed
        fed = last.take(setting * flow_ml_h[hour] * gain[hour])
        out.product_kg[hour], out.active_kg[hour], out.setting_kg_ml[hour] = fed, fed * last.fraction, setting
        for item, leak in leaks.items():
            if leak is not None and leak[hour]:
                item.take(float(leak[hour]))
            item.held.end_kg[hour] = item.kg
    return out


def _doses(feed: Feed, grid: Grid, wanted: np.ndarray) -> tuple[list[tuple[int, float]], np.ndarray]:
    """Design doses as (day stated, mg/L), and the dose the operators set each day, between design and need."""
    design = feed.design_mg_l or _tidy(float(wanted[:10].mean()))
    designs = [(0, design)]
    desired = np.zeros(grid.days)
    for day in range(grid.days):
        if feed.restated and day > 13 and grid.date(day).day in (1, 15):
            recent = float(wanted[day - 14 : day].mean())
            if abs(recent / design - 1) > _RESTATE_BEYOND:
                design = _tidy(recent)
                designs.append((day, design))
        before = float(wanted[max(day - 1, 0)])
        desired[day] = design + feed.follows * (before - design)
    return designs, desired


def _tidy(dose: float) -> float:
    """A dose as somebody would state it: two figures that count, or three."""
    return round(dose, 2) if dose < 10 else round(dose, 0)


def _wander(hours: int, sd: float, rng: np.random.Generator) -> np.ndarray:
    """The feeder's slow wandering about its setting."""
    knots = rng.normal(0.0, sd, hours // 36 + 3)
    return 1 + np.interp(np.arange(hours) / 36, np.arange(len(knots)), knots)


def _kept(product: Block, fraction: float, temperature_c: float) -> float:
    """The share of its strength a product keeps over a day in store."""
    if product["chemical"] != "NaOCl":
        return 1.0
    fresh = float(product["strength"])
    now = fraction * float(product["density_kg_per_L"]) * 1000
    after = decay.hypochlorite_strength_after(now, [temperature_c], [1.0], fresh_g_l=fresh, extrapolate=True)
    return float(after) / now


def _fill(hour: int, tank: _Tank, day: _Tank, out: FeedHistory) -> None:
    wanted = 0.92 * day.capacity - day.kg
    if wanted < 0.1 * day.capacity:
        return
    moved = tank.take(wanted)
    day.pour(moved, tank.fraction, tank.believed)
    out.moves.append(Move(hour, str(tank.block["code"]), str(day.block["code"]), moved))


class _Supply:
    """Orders, loads and containers of one feed."""

    def __init__(
        self, feed: Feed, grid: Grid, use_kg_d: float, nominal: float, effect: Effects, rng: np.random.Generator
    ) -> None:
        self.feed, self.grid, self.use, self.nominal, self.rng = feed, grid, use_kg_d, nominal, rng
        self.due: int | None = None
        self.count = 0
        self.waiting = sorted(effect.next_load.get(str(feed.tank["code"]), []), key=lambda item: item[0])

    def arrive(self, hour: int, tank: _Tank, out: FeedHistory) -> None:
        """Orders when stock runs low; takes the load when it comes and fits."""
        if self.feed.refill != "delivery":
            return
        lead = float(self.feed.product.get("lead_time_days", 3))
        if self.due is None:
            reorder = (float(self.feed.product.get("reserve_days", 7)) + lead + 2) * self.use
            if tank.kg - tank.heel < min(reorder, tank.capacity - self.feed.load_kg + lead * self.use):
                self.due = hour + round(lead * 24) + int(self.rng.integers(-6, 30))
            return
        on_time = _EARLIEST_DELIVERY <= self.grid.local_hour[hour] <= _LATEST_DELIVERY and self.grid.weekday[hour] < 5
        if hour < self.due or not on_time or tank.kg + self.feed.load_kg * 1.02 > tank.capacity:
            return
        kg = round(self.feed.load_kg * self.rng.uniform(0.985, 1.015) / 10) * 10.0
        certified = self.nominal * (1 + self.rng.normal(0, 0.012))
        load = Load(
            hour,
            str(self.feed.tank["code"]),
            kg,
            certified * (1 + self.rng.normal(0, 0.004)),
            certified,
            f"{self.feed.product['code']}-{self.count + 1:03d}",
        )
        if self.waiting and hour >= self.waiting[0][0]:
            _, incident = self.waiting.pop(0)
            load = replace(load, incident=incident)
            if incident.what == "weak_lot":
                load = replace(load, fraction=certified * incident.size)
        tank.pour(load.kg, load.fraction, load.certified)
        out.loads.append(load)
        self.count, self.due = self.count + 1, None

    def change(self, hour: int, tank: _Tank, out: FeedHistory) -> None:
        """Puts a full container on the scale when the old one would not last the shift."""
        if tank.kg - tank.heel > 0.7 * self.use:
            return
        tare = float(tank.block.get("tare_kg", 0.0))
        full = self.feed.load_kg * self.rng.uniform(0.995, 1.005)
        out.changes.append(Change(hour, str(tank.block["code"]), tare + tank.kg, tare + full))
        tank.kg = full
