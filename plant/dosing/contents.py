"""What is in a vessel: mass, density and active strength, carried from event to event.

Pure. Lots mix by mass; strength falls by the product's decay law at the store's temperature; a strength test re-anchors it.
Amounts are kept in the vessel's own unit: litres where it is known by level, kilograms where it stands on a scale.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass, replace


@dataclass(frozen=True)
class Contents:
    """Strength and density of what is in the vessel at an instant.

    ``fraction`` is kg of the chemical (as the product's strength counts it) per kg of product; ``fresh_fraction`` is what it
    was when made, which fixes the ionic strength of hypochlorite. ``density_kg_l`` is None only where masses are weighed.
    """

    at: dt.datetime
    fraction: float
    fresh_fraction: float
    density_kg_l: float | None
    lots: tuple[str, ...] = ()

    def aged(self, to: dt.datetime, decay: Decay) -> Contents:
        """The same contents later."""
        if to <= self.at:
            return self
        return replace(self, at=to, fraction=decay(self, to))

    def mixed(self, own_kg: float, other: Contents, other_kg: float, water_l: float = 0.0) -> Contents:
        """With ``other_kg`` of something else, and carrier water, poured in. By mass; volumes are taken to add up."""
        total = own_kg + other_kg + water_l
        if total <= 0:
            return replace(other, at=self.at)
        density = self.density_kg_l
        if self.density_kg_l and other.density_kg_l:
            density = total / (own_kg / self.density_kg_l + other_kg / other.density_kg_l + water_l)
        return Contents(
            self.at,
            (own_kg * self.fraction + other_kg * other.fraction) / total,
            (own_kg * self.fresh_fraction + other_kg * other.fresh_fraction) / total,
            density,
            tuple(dict.fromkeys((*(self.lots if own_kg > 0 else ()), *other.lots))),
        )


Decay = Callable[[Contents, dt.datetime], float]
"""(contents, later instant) -> fraction then."""


def no_decay(contents: Contents, to: dt.datetime) -> float:
    """For products that keep."""
    return contents.fraction


@dataclass(frozen=True)
class Pour:
    """A delivery or a transfer into the vessel: how many kg of what, with how much carrier water."""

    at: dt.datetime
    kg: float
    contents: Contents
    water_l: float = 0.0
    ref: str = ""


@dataclass(frozen=True)
class StrengthTest:
    """A strength test: from here on the contents are what it found."""

    at: dt.datetime
    fraction: float
    ref: str = ""


@dataclass(frozen=True)
class Drawn:
    """What left the vessel by use in a span: product and chemical, kg."""

    amount: float
    kg: float
    active_kg: float
