"""What leaves this room: figures with unit and standard uncertainty, and the rows that hold them."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field


@dataclass(frozen=True)
class Step:
    """One step of a trail: what was done in words, the formula with its numbers, the source, the readings it used."""

    words: str
    formula: str = ""
    source: str = ""
    readings: tuple[str, ...] = ()
    statements: tuple[str, ...] = ()


@dataclass(frozen=True)
class Figure:
    """A number, its unit, its standard uncertainty, and why it is missing where it is.

    ``key`` (``kind:subject:day``) is what its trail is asked by: the trail is computed again, never stored.
    """

    value: float | None
    unit: str
    sd: float | None = None
    key: str = ""
    remarks: tuple[str, ...] = ()

    @property
    def known(self) -> bool:
        return self.value is not None


@dataclass(frozen=True)
class DayDose:
    """One dosing point on one operating day: used, designed, needed.

    ``active_kg`` and the three doses are in the product's dose basis. ``expected`` is False where the point or the works
    was not in service all day. ``weak``: the day's use is under 5 % of the vessel, so seven days are judged instead.
    """

    day: dt.date
    dosing_point: str
    product: str
    dose_basis: str
    volume_ml: Figure
    product_kg: Figure
    active_kg: Figure
    used_mg_l: Figure
    design_mg_l: Figure
    need_mg_l: Figure
    expected: bool = True
    weak: bool = False
    interpolated: bool = False
    corrected: bool = False
    strength_sd_pct: float = 0.0
    remarks: tuple[str, ...] = ()

    @property
    def ratio(self) -> float | None:
        """Used over designed; None when either is unknown or the design is zero."""
        if self.used_mg_l.value is None or not self.design_mg_l.value:
            return None
        return self.used_mg_l.value / self.design_mg_l.value


@dataclass(frozen=True)
class PeriodDose:
    """One dosing point over several days: masses and volumes added, dose = mass over volume, never a mean of doses.

    Only days on which both are known count; ``days_counted`` of ``days_expected`` says how many.
    """

    dosing_point: str
    product: str
    dose_basis: str
    first: dt.date
    last: dt.date
    days_expected: int
    days_counted: int
    volume_ml: Figure
    product_kg: Figure
    active_kg: Figure
    used_mg_l: Figure
    design_mg_l: Figure
    need_mg_l: Figure
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True)
class VesselStock:
    """What a vessel holds at a moment: by the book, by the dip, and the difference with its uncertainty.

    ``days_of_supply`` is the product's, over all its vessels, at the mean use of the last four weeks. plant.supply looks
    ahead: there it is reckoned from the forecast, and the order window is filled in.
    """

    vessel: str
    product: str
    at: dt.datetime
    book_kg: float | None
    dip_kg: float | None
    dip_at: dt.datetime | None
    difference_kg: float | None
    difference_sd_kg: float | None
    active_kg: float | None
    usable_active_kg: float | None
    strength: float | None
    strength_basis: str
    days_of_supply: float | None
    level_fraction: float | None = None
    order_from: dt.date | None = None
    order_by: dt.date | None = None
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True)
class ProductReconciliation:
    """One product over a period, kg of product: opening + received - witnessed use - closing = unexplained.

    Where no independent witness exists ``witnessed_kg`` and ``unexplained_kg`` are None and ``remarks`` say so.
    """

    product: str
    opening_kg: float | None
    received_kg: float
    closing_kg: float | None
    used_by_dips_kg: float | None
    witnessed_kg: float | None
    unexplained_kg: float | None
    unexplained_sd_kg: float | None
    deliveries: int
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True)
class Trail:
    """What stands behind one figure, step by step."""

    figure: Figure
    title: str
    steps: tuple[Step, ...] = field(default_factory=tuple)
