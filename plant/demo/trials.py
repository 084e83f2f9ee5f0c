"""Invented works and incidents drawn at random, to see how well deviations are found: every works another one.

Sizes of gauges, scatter and incidents are common practice, no source.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from plant.demo import effects
from plant.demo.heath import HEATH
from plant.demo.kestrel import KESTREL
from plant.demo.plan import Block, Feed, Incident, Line, Plan, Season

_USUAL_MG_L = {"chlorine": 1.05, "caustic": 5.0, "peroxide": 1.8, "coagulant": 2.4, "sequestrant": 2.9, "fluoride": 0.5}
_STEADY_MG_L = {"sequestrant": 2.9, "fluoride": 0.5}
"""What some works dose whatever the water asks for."""
_FEEDS = {feed.wants: feed for feed in KESTREL.feeds}
QUIET_DAYS = 60
"""Nothing happens before: what is usual must be learnt from something."""
_WHAT = {
    "feeder_ramp": 0.18, "feeder_step": 0.14, "leak": 0.12, "meter_error": 0.16, "unbooked_delivery": 0.1, "stuck": 0.08,
    "weak_lot": 0.1, "demand_change": 0.12,
}  # fmt: skip
"""How often each is drawn; a meter is free less often than a feeder, since no dose of it may be in trouble."""


def works(seed: int, code: str = "") -> Plan:
    """A works of three to five chemicals, hypochlorite among them; its size, tanks, gauges and scatter are drawn."""
    rng = np.random.default_rng([seed, 4711])
    flow = float(np.exp(rng.uniform(np.log(2.0), np.log(25.0))))
    others = [str(name) for name in rng.permutation(["caustic", "peroxide", "coagulant", "sequestrant", "fluoride"])]
    wanted = ["chlorine", *others[: int(rng.integers(2, 5))]]
    demand = float(rng.uniform(0.3, 0.7))
    steady = _STEADY_MG_L | {"chlorine": round(demand + HEATH.target_residual_mg_l, 2)}
    feeds = tuple(
        _feed(_FEEDS[name], flow, steady.get(name, 0.0) * (rng.random() < 0.6), rng) for name in _FEEDS if name in wanted
    )
    raw = bool(rng.random() < 0.3)
    if not raw:
        feeds = tuple(replace(feed, point=feed.point | {"meter": "FT-TREATED"}) for feed in feeds)
    read = ("FT-TREATED", "FT-RAW") if raw else ("FT-TREATED",)
    meters = [block for block in KESTREL.blocks["meter"] if block["code"] in read]
    return replace(
        HEATH,
        code=code or f"TRY{seed}",
        name=f"Trial works {seed}",
        waters=replace(
            HEATH.waters,
            flow_ml_d=Season(flow, 0.13 * flow, float(rng.uniform(0.02, 0.06)) * flow, 0.3 * flow),
            chlorine_demand_mg_l=Season(demand, float(rng.uniform(0, 0.12)), float(rng.uniform(0.01, 0.035)), 0.1),
            turbidity_ntu=HEATH.waters.turbidity_ntu,
        ),
        raw_meter="FT-RAW" if raw else None,
        coagulant_curve=KESTREL.coagulant_curve,
        feeds=feeds,
        lines=_lines(feeds, raw, rng),
        sequestrant_base_mg_l=KESTREL.sequestrant_base_mg_l,
        sequestrant_per_manganese=KESTREL.sequestrant_per_manganese,
        blocks=HEATH.blocks
        | {"meter": [block | {"accuracy_pct": 0.5, "digits": 8, "max_flow_m3_per_h": 4000} for block in meters]},
    )


def _feed(feed: Feed, flow_ml_d: float, steady_mg_l: float, rng: np.random.Generator) -> Feed:
    """A feed in a tank that fits it: a load lasts two to four weeks. ``steady_mg_l``: the dose where it never changes."""
    use_kg = use_kg_h(feed, flow_ml_d) * 24
    load = round(use_kg * float(rng.uniform(14, 28)))
    room_kg = 2.3 * load
    product = feed.product | {"load_kg": load, "reserve_days": 5, "lead_time_days": 3}
    code = str(feed.tank["code"])
    tank: Block = {"code": code, "name": f"Tank {code}", "product": feed.product["code"], "role": "bulk", "max_fill_pct": 95}
    if rng.random() < 0.3:
        digit = 10.0 ** np.floor(np.log10(max(room_kg / 3000, 0.1)))
        tank |= {"shape": "scale", "capacity_kg": round(room_kg), "tare_kg": 50.0, "heel_kg": round(0.03 * room_kg)}
        tank |= {"weight_sd_kg": round(float(digit * rng.uniform(0.5, 2)), 2)}
    else:
        litres = room_kg / float(feed.product["density_kg_per_L"])
        height = float(rng.uniform(1.8, 4.5))
        diameter = round(float(np.sqrt(litres / 1000 / height * 4 / np.pi)), 2)
        tank |= {"shape": "vertical_cylinder", "diameter_m": diameter, "height_m": round(height, 1)}
        tank |= {"level_sd_m": float(rng.choice([0.003, 0.005, 0.01])), "heel_L": round(0.03 * litres)}
    point = feed.point
    if feed.wants == "caustic":
        point = point | {"need": {"model": "target_ph", "target_ph": HEATH.target_ph}}
    return replace(
        feed,
        product=product,
        tank=tank,
        day_tank=None,
        load_kg=load,
        refill="delivery",
        point=point,
        design_mg_l=steady_mg_l,
        follows=0.0 if steady_mg_l else 0.05 if feed.wants == "coagulant" else 0.2,
        restated=not steady_mg_l,
        scatter=float(rng.uniform(0.025, 0.045)),
        opening_share=float(rng.uniform(0.4, 0.8)),
        feeder_unit="L/h",
    )


def _lines(feeds: tuple[Feed, ...], raw: bool, rng: np.random.Generator) -> tuple[Line, ...]:
    """The round: what KESTREL reads at the sites that are here, and the gauges of the tanks."""
    wants = {feed.wants for feed in feeds}
    answers = {"hydrogen_peroxide": "peroxide", "fluoride": "fluoride"}
    sites = {"RAW", "FILTERED", "ENTRY", "NETWORK", "FT-TREATED"} | ({"FT-RAW"} if raw else set())
    sites |= {"SETTLED"} if "peroxide" in wants else set()
    skipped = {"total_coliform", "e_coli", "peak_hourly_flow", "strength"}
    lines = [
        replace(line, sd=line.sd * float(rng.uniform(0.8, 1.6)))
        for line in KESTREL.lines
        if line.site in sites and line.parameter not in skipped and answers.get(line.parameter, "chlorine") in wants
    ]
    for feed in feeds:
        scale = feed.tank["shape"] == "scale"
        lines.append(Line(str(feed.tank["code"]), "weight" if scale else "level", "kg" if scale else "m", 1 if scale else 3))
        if rng.random() < 0.3:
            lines.append(Line(feed.code, "feeder_setting", "L/h", 2))
    return tuple(lines)


def use_kg_h(feed: Feed, flow_ml_d: float) -> float:
    """About what a feed uses in an hour, kg of product."""
    share = float(feed.product["strength"]) / 100
    if feed.product["strength_basis"] == "g_per_L_available_chlorine":
        share = float(feed.product["strength"]) / 1000 / float(feed.product["density_kg_per_L"])
    return _USUAL_MG_L[feed.wants] * flow_ml_d / 24 / (1.0 if feed.product["dose_basis"] == "product" else share)


def incidents(plan: Plan, *, seed: int, days: int) -> list[Incident]:
    """What goes wrong: about seven things a year, never two on one subject within six weeks; and what is no incident but
    happens everywhere: a round missed, a line left empty, a value mistyped and corrected, a round typed in late.
    """
    rng = np.random.default_rng([seed, 815])
    out: list[Incident] = []
    busy: dict[str, float] = {}
    day = float(QUIET_DAYS)
    while day < days - 25:
        found = _one(plan, rng, np.floor(day) + float(rng.choice([0.05, 0.3, 0.55])))
        own = _points_of(plan, found.subject)
        if all(busy.get(code, -99.0) + 45 < found.start for code in own):
            busy |= dict.fromkeys(own, found.end)
            out.append(found)
            day += float(rng.uniform(25, 65))
        else:
            day += 6.0
    return sorted([*out, *_nuisances(plan, rng, days)], key=lambda item: item.start)


def _points_of(plan: Plan, subject: str) -> list[str]:
    """The dosing points that a subject is about; all of them for the meter."""
    site = subject.partition(":")[0]
    found = [feed.code for feed in plan.feeds if site in (feed.code, feed.tank["code"])]
    return found or [feed.code for feed in plan.feeds]


def _one(plan: Plan, rng: np.random.Generator, start: float) -> Incident:
    what = str(rng.choice(list(_WHAT), p=list(_WHAT.values())))
    feed = plan.feeds[int(rng.integers(len(plan.feeds)))]
    tank = str(feed.tank["code"])
    sign = float(rng.choice([-1, 1]))
    chlorine = next(item for item in plan.feeds if item.wants == "chlorine")
    use = use_kg_h(feed, plan.waters.flow_ml_d.mean)
    long = float(rng.uniform(5, 20))
    cause, subject, length, size = {
        "feeder_ramp": ("feeder_drift", feed.code, 1.5 * long, sign * float(rng.uniform(0.10, 0.30))),
        "feeder_step": ("feeder_drift", feed.code, float(rng.uniform(8, 16)), sign * float(rng.uniform(0.08, 0.25))),
        "leak": ("leak", tank, float(rng.uniform(6, 14)), float(rng.uniform(0.15, 0.5)) * use),
        "meter_error": ("meter_error", plan.treated_meter, float(rng.uniform(8, 16)), 1 + sign * float(rng.uniform(0.08, 0.2))),
        "unbooked_delivery": ("unbooked_delivery", tank, 60.0, 0.0),
        "stuck": ("stuck_sensor", f"{tank}:{_gauge(feed)}", float(rng.integers(4, 8)), 0.0),
        "weak_lot": ("weak_product", str(chlorine.tank["code"]), 45.0, float(rng.uniform(0.7, 0.85))),
        "demand_change": (
            "raw_water_change", "RAW", float(rng.uniform(12, 25)), float(rng.uniform(0.12, 0.25)),
        ),
    }[what]  # fmt: skip
    return Incident(what, cause, subject, start, start + length, size, effects.KINDS[what])


def _gauge(feed: Feed) -> str:
    return "weight" if feed.tank["shape"] == "scale" else "level"


def _nuisances(plan: Plan, rng: np.random.Generator, days: int) -> list[Incident]:
    out: list[Incident] = []

    def often(what: str, cause: str, every: float, subject: str, length: float, size: float) -> None:
        day = float(rng.uniform(0.3, 1.3)) * every
        while day < days - 3:
            out.append(Incident(what, cause, subject, np.floor(day) + 0.45, np.floor(day) + 0.45 + length, size, "as happens"))
            day += float(rng.uniform(0.5, 1.5)) * every

    often("missing_round", "missing_readings", 50, "", 0.3, 0.0)
    often("late_entry", "", 60, "", 0.4, 1.0)
    often("second_thoughts", "", 70, "ENTRY:free_chlorine", 1.0, 1.1)
    for feed in plan.feeds:
        subject = f"{feed.tank['code']}:{_gauge(feed)}"
        often("not_taken", "missing_readings", 90, subject, 0.3, 0.0)
    return out
