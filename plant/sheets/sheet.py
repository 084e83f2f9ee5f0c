"""What a sheet is made of. Pure; a new sheet is a function and a few fields in one of the topic files."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from plant.scene import numbers


@dataclass(frozen=True)
class Field:
    """One thing to enter. ``parameter`` names the reading it is filled from at the sample point chosen."""

    name: str
    label: str
    unit: str = ""
    start: float | str | None = None
    parameter: str = ""
    choices: tuple[tuple[str, str], ...] = ()
    optional: bool = False
    hint: str = ""


@dataclass(frozen=True)
class Result:
    """One figure of the answer; ``value`` may be words."""

    label: str
    value: float | str
    unit: str = ""
    decimals: int = 2
    large: bool = False

    @property
    def shown(self) -> str:
        return self.value if isinstance(self.value, str) else f"{self.value:.{self.decimals}f}"

    @property
    def printed_label(self) -> str:
        return numbers.formula(self.label)

    @property
    def printed_unit(self) -> str:
        return numbers.formula(self.unit)


@dataclass(frozen=True)
class Line:
    """One step of the working. ``source`` is a key of chemistry.sources, or a citation in words."""

    words: str
    formula: str
    source: str = ""

    @property
    def printed(self) -> str:
        return numbers.formula(self.formula)

    @property
    def printed_words(self) -> str:
        return numbers.formula(self.words)


@dataclass(frozen=True)
class Answer:
    """What a sheet says."""

    results: tuple[Result, ...]
    lines: tuple[Line, ...]
    cautions: tuple[str, ...] = ()


Values = dict[str, Any]


@dataclass(frozen=True)
class Sheet:
    """One worked sheet. ``work`` raises ChemistryError in words a person understands."""

    slug: str
    title: str
    group: str
    about: str
    fields: tuple[Field, ...]
    work: Callable[[Values], Answer]


WATER = (
    Field("temperature", "Temperature", "°C", 12, "temperature"),
    Field("ph", "pH", "", 7.5, "pH"),
    Field("alkalinity", "Alkalinity", "mg/L as CaCO3", 150, "alkalinity"),
    Field("calcium", "Calcium", "mg/L as Ca", 60, "calcium"),
    Field("magnesium", "Magnesium", "mg/L as Mg", 12, "magnesium"),
    Field("sodium", "Sodium", "mg/L", 15, "sodium", optional=True),
    Field("chloride", "Chloride", "mg/L", 20, "chloride", optional=True),
    Field("sulfate", "Sulfate", "mg/L", 25, "sulfate", optional=True),
)
"""The water most sheets begin with."""
