"""One simulated history of a works: what really happened, and what was written down.

Deterministic for a plan, a seed and the days. Masses balance: what a tank held, took in, gave to the water and lost adds
up to rounding (a test holds it to that).
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np

from plant.demo import clockwork, effects, observe, tanks, water
from plant.demo.clockwork import Grid
from plant.demo.plan import Feed, Incident, Plan


@dataclass(frozen=True)
class TrueDay:
    """What one dosing point really did on one operating day; mg/L in the product's dose basis."""

    day: dt.date
    dosing_point: str
    volume_ml: float
    product_kg: float
    active_kg: float
    wanted_mg_l: float

    @property
    def used_mg_l(self) -> float:
        return self.active_kg / self.volume_ml if self.volume_ml else 0.0


@dataclass
class Simulated:
    """The history. ``book`` is what was written down; the rest is the truth behind it."""

    plan: Plan
    seed: int
    grid: Grid
    until: dt.datetime
    incidents: list[Incident]
    histories: list[tanks.FeedHistory]
    truth: dict[tuple[str, str], np.ndarray]
    flow_ml_h: np.ndarray
    wanted: dict[str, np.ndarray]
    book: observe.Book

    def flow_of(self, feed: Feed) -> np.ndarray:
        """ML in each hour of the water a feed goes into."""
        return self.flow_ml_h * share_of_flow(self.plan, feed)

    def designs(self) -> list[tuple[dt.datetime, str, float]]:
        """(from when, dosing point, mg/L) of every design dose, in order."""
        out = []
        for history in self.histories:
            out += [
                (self.grid.calendar.start_of(self.grid.date(day)), history.feed.code, dose) for day, dose in history.designs
            ]
        return sorted(out)

    def true_days(self) -> list[TrueDay]:
        """What really happened, day by day and dosing point by dosing point."""
        out = []
        for history in self.histories:
            volume = self.grid.daily(self.flow_of(history.feed))
            product, active = self.grid.daily(history.product_kg), self.grid.daily(history.active_kg)
            wanted = self.grid.daily(self.wanted[history.feed.wants]) / np.diff(self.grid.day_edges)
            out += [
                TrueDay(
                    self.grid.date(day),
                    history.feed.code,
                    float(volume[day]),
                    float(product[day]),
                    float(active[day]),
                    float(wanted[day]),
                )
                for day in range(self.grid.days)
            ]
        return sorted(out, key=lambda item: item.day)

    def span(self, incident: Incident) -> tuple[dt.datetime, dt.datetime]:
        """When an incident began and ended, UTC."""
        return tuple(self.grid.moment(self.grid.hour_of_day(day)) for day in (incident.start, incident.end))  # type: ignore[return-value]


def simulate(
    plan: Plan,
    *,
    seed: int,
    first: dt.date,
    last: dt.date,
    incidents: list[Incident] | None = None,
    until: dt.datetime | None = None,
) -> Simulated:
    """The history of the operating days ``first`` to ``last``, as far as it had been written down by ``until``.

    Without ``until`` the round that closes the last day is in it. Incidents outside the days are left out.
    """
    grid = clockwork.grid(plan, first, last)
    chosen = [item for item in incidents or [] if 0 <= item.start < grid.days]
    effect = effects.effects(plan, grid, chosen)
    rng = np.random.default_rng([seed, len(plan.code), *map(ord, plan.code)])
    raw = water.raw_water(plan, grid, rng, effect.water)
    wanted = _wanted(plan, raw)
    histories, doses = _feeds(plan, grid, raw, wanted, effect, seed)
    truth = _truth(plan, grid, raw, doses, histories, effect)
    closing = grid.calendar.start_of(last + dt.timedelta(days=1)) + dt.timedelta(hours=2)
    end = min(until, closing) if until else closing
    book = observe.Book(
        rounds=observe.write_rounds(plan, grid, truth, histories, effect, rng),
        extra=observe.write_changes(grid, histories),
        loads=observe.write_loads(grid, histories),
        moves=observe.write_moves(grid, histories, rng),
    )
    for item in chosen:
        if item.what == "feeder_stop" and item.end - item.start < 1:
            site = next(feed.point["sample_point"] for feed in plan.feeds if feed.code == item.subject)
            begin, finish = grid.hour_of_day(item.start), grid.hour_of_day(item.end)
            checks = observe.write_low_chlorine(grid, truth, site, begin, finish, rng)
            book.extra += checks
    return Simulated(plan, seed, grid, end, chosen, histories, truth, raw.flow_ml_h, wanted, book.until(end))


RAW_SHARE = 1.032
"""Raw water per treated water: what the filters' backwash takes."""


def share_of_flow(plan: Plan, feed: Feed) -> float:
    """The flow a feed goes into, as a share of the treated water."""
    return RAW_SHARE if feed.point["meter"] == plan.raw_meter else 1.0


def _wanted(plan: Plan, raw: water.RawWater) -> dict[str, np.ndarray]:
    """The dose each feed's water asks for, hour by hour, in the feed's dose basis."""
    curve = np.array(plan.coagulant_curve or ((0.0, 0.0), (1.0, 0.0)))
    out = {
        "peroxide": raw.peroxide_demand + plan.target_peroxide_mg_l,
        "chlorine": raw.chlorine_demand + plan.target_residual_mg_l,
        "coagulant": np.interp(raw.turbidity, curve[:, 0], curve[:, 1]),
        "sequestrant": plan.sequestrant_base_mg_l + plan.sequestrant_per_manganese * raw.manganese,
        "fluoride": np.maximum(plan.target_fluoride_mg_l - raw.fluoride, 0.0),
    }
    lime = water.lime_wanted(raw, plan.target_hardness_mg_l) if plan.target_hardness_mg_l else None
    if lime is not None:
        out["lime"] = lime
    return out


def _feeds(
    plan: Plan,
    grid: Grid,
    raw: water.RawWater,
    wanted: dict[str, np.ndarray],
    effect: effects.Effects,
    seed: int,
) -> tuple[list[tanks.FeedHistory], dict[str, np.ndarray]]:
    """All feeds, and the doses they gave. Caustic comes last: it mends the water that lime and coagulant really left."""
    histories: dict[str, tanks.FeedHistory] = {}
    doses: dict[str, np.ndarray] = {}
    for number, feed in sorted(enumerate(plan.feeds), key=lambda item: item[1].wants == "caustic"):
        if feed.wants == "caustic":
            left = water.softened(raw, doses.get("lime"), doses.get("coagulant"))
            wanted["caustic"] = water.caustic_wanted(left, raw.temperature, plan.target_ph)
        rng = np.random.default_rng([seed, 7919, number])
        flow = raw.flow_ml_h * share_of_flow(plan, feed)
        history = tanks.run(feed, grid, flow, wanted[feed.wants], raw.store_temperature, effect, rng)
        histories[feed.code] = history
        doses[feed.wants] = history.dose_mg_l(flow)
    return [histories[feed.code] for feed in plan.feeds], doses


def _truth(
    plan: Plan,
    grid: Grid,
    raw: water.RawWater,
    doses: dict[str, np.ndarray],
    histories: list[tanks.FeedHistory],
    effect: effects.Effects,
) -> dict[tuple[str, str], np.ndarray]:
    """Hourly truth of every (site, parameter) that a round may read. Effects reach the sample point at once."""
    soft = water.softened(raw, doses.get("lime"), doses.get("coagulant"))
    chlorine = doses.get("chlorine")
    free = np.maximum(chlorine - raw.chlorine_demand, 0.0) if chlorine is not None else np.zeros(grid.hours)
    smooth = np.convolve(free, np.ones(3) / 3, mode="full")[: grid.hours]
    smooth[:2] = free[:2]
    filtered = 0.09 + 0.006 * raw.turbidity + 0.012 * _short_of(doses, "coagulant", plan, raw)
    out = {
        ("RAW", name): values
        for name, values in (
            ("temperature", raw.temperature),
            ("pH", raw.ph),
            ("turbidity", raw.turbidity),
            ("hardness", raw.hardness),
            ("calcium", raw.calcium),
            ("magnesium", raw.magnesium),
            ("alkalinity", raw.alkalinity),
            ("iron", raw.iron),
            ("manganese", raw.manganese),
            ("fluoride", raw.fluoride),
        )
    }
    peroxide = np.maximum(doses["peroxide"] - raw.peroxide_demand, 0.0) if "peroxide" in doses else np.zeros(grid.hours)
    left = np.exp(-0.05 * plan.network_hours)
    out |= {
        ("SETTLED", "hydrogen_peroxide"): peroxide,
        ("SETTLED", "pH"): soft.ph + 0.12,
        ("FILTERED", "turbidity"): filtered,
        ("FILTERED", "pH"): soft.ph,
        ("FILTERED", "temperature"): raw.temperature + 0.2,
        ("FILTERED", "alkalinity"): soft.alkalinity,
        ("FILTERED", "hardness"): soft.hardness,
        ("FILTERED", "calcium"): soft.calcium,
        ("FILTERED", "iron"): 0.06 * raw.iron,
        ("FILTERED", "manganese"): 0.45 * raw.manganese,
        ("FILTERED", "fluoride"): raw.fluoride,
        ("ENTRY", "free_chlorine"): smooth,
        ("ENTRY", "total_chlorine"): smooth + 0.07,
        ("ENTRY", "pH"): water.final_ph(soft, raw.temperature, doses.get("caustic"), chlorine),
        ("ENTRY", "temperature"): raw.temperature + 0.3,
        ("ENTRY", "turbidity"): filtered * 0.9,
        ("ENTRY", "hardness"): soft.hardness,
        ("ENTRY", "alkalinity"): soft.alkalinity + 1.25 * doses.get("caustic", np.zeros(grid.hours)),
        ("ENTRY", "fluoride"): raw.fluoride + doses.get("fluoride", np.zeros(grid.hours)),
        ("ENTRY", "iron"): 0.05 * raw.iron,
        ("ENTRY", "manganese"): 0.4 * raw.manganese,
        ("NETWORK", "free_chlorine"): smooth * left,
        ("NETWORK", "total_coliform"): np.zeros(grid.hours),
        ("NETWORK", "e_coli"): np.zeros(grid.hours),
    }
    for meter, share, offset in ((plan.treated_meter, 1.0, 4_183_220.0), (plan.raw_meter, RAW_SHARE, 9_561_870.0)):
        if meter:
            flow = raw.flow_ml_h * 1000 * share * effect.meter.get(meter, 1.0)
            out[meter, "totaliser"] = offset + np.concatenate([[0.0], np.cumsum(flow)])[: grid.hours + 1]
            out[meter, "peak_hourly_flow"] = _peak_so_far(grid, flow)
    for history in histories:
        out |= _feed_truth(grid, history, raw.flow_ml_h, effect)
    return out


def _short_of(doses: dict[str, np.ndarray], name: str, plan: Plan, raw: water.RawWater) -> np.ndarray:
    """How much less coagulant was given than the curve asks, mg/L."""
    if name not in doses:
        return np.zeros_like(raw.turbidity)
    curve = np.array(plan.coagulant_curve)
    return np.maximum(np.interp(raw.turbidity, curve[:, 0], curve[:, 1]) - doses[name], 0.0)


def _peak_so_far(grid: Grid, flow_m3_h: np.ndarray) -> np.ndarray:
    """The highest hour of the operating day so far, at each hour."""
    out = np.zeros(grid.hours)
    for start, end in zip(grid.day_edges[:-1], grid.day_edges[1:], strict=True):
        out[start:end] = np.maximum.accumulate(flow_m3_h[start:end])
    out[grid.day_edges[-1] :] = flow_m3_h[grid.day_edges[-1] :]
    return out


def _feed_truth(
    grid: Grid, history: tanks.FeedHistory, flow_ml_h: np.ndarray, effect: effects.Effects
) -> dict[tuple[str, str], np.ndarray]:
    feed: Feed = history.feed
    out = {}
    if feed.feeder_unit == "L/h":
        density = float(feed.product["density_kg_per_L"])
        out[feed.code, "feeder_setting"] = history.setting_kg_ml * flow_ml_h.mean() / density
    elif feed.feeder_unit == "kg/h":
        out[feed.code, "feeder_setting"] = history.setting_kg_ml * flow_ml_h.mean()
    else:
        out[feed.code, "feeder_setting"] = 45 * history.setting_kg_ml / np.mean(history.setting_kg_ml)
    if feed.product["strength_basis"] == "g_per_L_available_chlorine":
        for code, held in history.held.items():
            out[code, "strength"] = held.fraction * float(feed.product["density_kg_per_L"]) * 1000
    meter = feed.point.get("feed_meter")
    if meter:
        rng = np.random.default_rng([len(meter), grid.hours])
        counted = history.product_kg * (1 + rng.normal(0, feed.feed_meter_sd, grid.hours)) * effect.meter.get(meter, 1.0)
        out[meter, "totaliser"] = 51_840.0 + np.concatenate([[0.0], np.cumsum(counted)])[: grid.hours + 1]
    return out
