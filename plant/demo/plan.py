"""What a simulated works is: its water, its feeds with their tanks, its round, and what goes wrong there.

All numbers are invented; shapes of seasons and sizes of noise are common practice, no source.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from typing import Any

Block = dict[str, Any]


@dataclass(frozen=True)
class Season:
    """A quantity over the year: mean, half the swing between mid January and mid July, day-to-day noise (sd)."""

    mean: float
    summer: float = 0.0
    noise: float = 0.0
    low: float = 0.0


@dataclass(frozen=True)
class Waters:
    """The raw water and what it asks for, in canonical units."""

    flow_ml_d: Season
    temperature_c: Season
    calcium_mg_l: Season
    magnesium_mg_l: Season
    alkalinity_mg_l: Season
    ph: Season
    turbidity_ntu: Season
    iron_mg_l: Season
    manganese_mg_l: Season
    fluoride_mg_l: Season
    chlorine_demand_mg_l: Season
    peroxide_demand_mg_l: Season
    filtered_ph: Season
    store_temperature_c: Season


@dataclass(frozen=True)
class Feed:
    """One dosing point with its product and tanks.

    ``wants`` names what the dose follows (a key of water.wanted). ``product``, ``tank`` and ``point`` are the
    blocks of the works file. ``day_tank`` is filled from the tank each morning. ``refill``: "delivery" by load, or
    "change" of the container on the scale. ``feed_meter_sd`` (share) where a feed meter counts the product.
    ``wander`` and ``scatter`` are the feeder's slow and its day-by-day unsteadiness (shares); ``follows`` is how far
    the operators go from the design dose towards what the water asks for; ``restated``: whether the design dose is
    stated anew when the water has moved away from it.
    """

    wants: str
    product: Block
    tank: Block
    point: Block
    design_mg_l: float
    load_kg: float
    refill: str = "delivery"
    day_tank: Block | None = None
    feed_meter_sd: float = 0.0
    wander: float = 0.008
    scatter: float = 0.0
    follows: float = 0.2
    restated: bool = True
    opening_share: float = 0.6
    feeder_unit: str = "%"

    @property
    def code(self) -> str:
        return str(self.point["code"])

    @property
    def measured(self) -> Block:
        """The last measured vessel."""
        return self.day_tank or self.tank


@dataclass(frozen=True)
class Line:
    """One line of the round: what is read where, how well, and how often."""

    site: str
    parameter: str
    unit: str
    decimals: int
    sd: float = 0.0
    sd_share: float = 0.0
    due: str = "shift"
    below: float | None = None


@dataclass(frozen=True)
class Incident:
    """Something that went wrong. ``start`` and ``end`` are days (with fractions) after the first operating day.

    ``what`` is one of effects.KINDS; ``cause`` is the word a deviation would name (or "" where nothing should be
    found); ``subject`` a dosing point, vessel, meter or "site:parameter"; ``size`` depends on ``what``.
    """

    what: str
    cause: str
    subject: str
    start: float
    end: float
    size: float
    words: str


@dataclass(frozen=True)
class Plan:
    """A works to simulate."""

    code: str
    name: str
    timezone: str
    day_starts: dt.time
    shifts: tuple[tuple[str, dt.time], ...]
    waters: Waters
    treated_meter: str
    raw_meter: str | None
    feeds: tuple[Feed, ...]
    lines: tuple[Line, ...]
    blocks: dict[str, list[Block]] = field(default_factory=dict)
    network_hours: float = 6.0
    target_hardness_mg_l: float | None = None
    target_ph: float = 8.2
    target_residual_mg_l: float = 0.5
    target_peroxide_mg_l: float = 0.25
    target_fluoride_mg_l: float = 0.7
    coagulant_curve: tuple[tuple[float, float], ...] = ()
    sequestrant_base_mg_l: float = 0.0
    sequestrant_per_manganese: float = 0.0
