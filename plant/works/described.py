"""The parts of a works, as stated at one moment. Frozen; units in the names; made by stated.py only."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass, field
from typing import Any, TypeVar

from plant.works import kinds


@dataclass(frozen=True)
class Works:
    """The works itself. ``units`` (si or us) is what screens and paper show."""

    code: str
    name: str
    timezone: str
    operating_day_starts: str = "00:00"
    units: str = "si"


@dataclass(frozen=True)
class SamplePoint:
    """Where water is sampled; ``stage`` orders the line of water: raw, process, entry, network."""

    code: str
    name: str
    stage: str = "process"


@dataclass(frozen=True)
class Meter:
    """A totaliser of water (m3, ML, L, US_gal, US_Mgal) or of product (kg, lb, L)."""

    code: str
    name: str
    unit: str
    digits: int | None = None
    max_flow_m3_per_h: float | None = None
    accuracy_pct: float = 0.5


@dataclass(frozen=True)
class Product:
    """A treatment chemical as bought. ``strength`` never stands without its basis."""

    code: str
    name: str
    chemical: str
    strength: float
    strength_basis: str
    strength_as: str | None = None
    density_kg_per_L: float | None = None
    strength_sd_pct: float = 0.0
    dose_basis: str = "product"
    certified_maximum_mg_per_L: float | None = None
    shelf_life_days: float | None = None
    storage_temperature_C: float | None = None
    lead_time_days: float | None = None
    load_kg: float | None = None
    accepted_strength_low: float | None = None
    accepted_strength_high: float | None = None
    reserve_days: float | None = None
    no_delivery_days: tuple[str, ...] = ()
    extra: dict[str, Any] = field(default_factory=dict)


SHAPE_KEYS = (
    "shape",
    "diameter_m",
    "height_m",
    "length_m",
    "heads",
    "cone_height_m",
    "table",
    "capacity_kg",
    "tare_kg",
    "weight_sd_kg",
)


@dataclass(frozen=True)
class Vessel:
    """A tank, drum, cylinder or silo. ``form`` holds its shape and measures as chemistry.vessels wants
    them; ``fed_from`` the vessel it is filled from.
    """

    code: str
    name: str
    product: str
    role: str = "bulk"
    level_sd_m: float = 0.005
    level_factor: float = 1.0
    heel_L: float = 0.0
    heel_kg: float = 0.0
    max_fill_pct: float = 95.0
    containment: str | None = None
    fill_line: str | None = None
    fed_from: str | None = None
    form: dict[str, Any] = field(default_factory=dict)

    @property
    def on_scale(self) -> bool:
        """Whether it is known by weight rather than by level."""
        return self.form["shape"] == "scale"


@dataclass(frozen=True)
class DosingPoint:
    """Where a product enters the water. ``vessels`` are the last measured ones: their outflow is the
    consumption.
    """

    code: str
    name: str
    product: str
    vessels: tuple[str, ...]
    meter: str
    feed_meter: str | None = None
    before: str | None = None
    sample_point: str | None = None
    need: dict[str, Any] = field(default_factory=lambda: {"model": "none"})


@dataclass(frozen=True)
class DesignDose:
    """The dose stated for a dosing point, mg/L in the product's dose basis."""

    code: str
    dose_mg_per_L: float


@dataclass(frozen=True)
class Limit:
    """A limit on a sample point, dosing point, vessel or contact segment; ``keys`` are those of its kind."""

    code: str
    kind: str
    level: str
    subject_kind: str
    subject: str
    parameter: str = ""
    unit: str = ""
    source: str = ""
    tell: tuple[dict[str, Any], ...] = ()
    keys: dict[str, Any] = field(default_factory=dict)


@dataclass(frozen=True)
class RoundLine:
    """One value that is due, in walking order."""

    code: str
    site: str
    parameter: str
    due: str | tuple[str, ...] = "shift"
    order: int = 0


@dataclass(frozen=True)
class ContactSegment:
    """A length of contact time for inactivation; its volume at the minimum operating level."""

    code: str
    volume_m3: float
    baffling_factor: float
    peak_flow_meter: str
    sample_point: str
    required_log_giardia: float | None = None
    required_log_virus: float | None = None


Part = TypeVar("Part")


def build(kind: type[Part], code: str, value: dict[str, Any]) -> Part:
    """The dataclass from a stated value; lists become tuples; keys it does not know stay out (or in
    ``extra``).
    """
    names = {item.name for item in dataclasses.fields(kind)}  # type: ignore[arg-type]
    known = {key: tuple(item) if isinstance(item, list) else item for key, item in value.items() if key in names}
    known["code"] = code
    if "extra" in names:
        known["extra"] = {key: item for key, item in value.items() if key not in names}
    return kind(**known)


def vessel(code: str, value: dict[str, Any]) -> Vessel:
    """A vessel, its shape gathered into ``form``."""
    form = {key: value[key] for key in SHAPE_KEYS if key in value}
    return build(Vessel, code, value | {"form": form})


LIMIT_HEAD = ("code", "kind", "level", "parameter", "unit", "source", "tell", "subject_kind", "subject")


def limit(code: str, value: dict[str, Any]) -> Limit:
    """A limit, what it stands on named by kind and code; the keys of its kind gathered into ``keys``."""
    subject_kind = next(
        (key for key in kinds.LIMIT_SUBJECTS if key in value),
        "works",
    )
    keys = {key: item for key, item in value.items() if key not in LIMIT_HEAD and key != subject_kind}
    head = {key: item for key, item in value.items() if key in LIMIT_HEAD}
    return build(
        Limit,
        code,
        head | {"keys": keys, "subject_kind": subject_kind, "subject": value.get(subject_kind, "")},
    )
