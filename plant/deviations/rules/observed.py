"""What the rules look at, and what they find."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from decimal import Decimal


@dataclass(frozen=True)
class Observed:
    """One value as a limit sees it: the exact decimal, its qualifier (``<``, ``>`` or none) and its instant."""

    at: dt.datetime
    value: Decimal
    qualifier: str = ""
    ref: str = ""

    @property
    def text(self) -> str:
        """As it is printed."""
        return f"{self.qualifier}{self.value.normalize():f}"


@dataclass(frozen=True)
class Breach:
    """One crossing of a limit: since when, until when (None: still), what was found against what was allowed."""

    since: dt.datetime
    until: dt.datetime | None
    value: str
    limit: str
    sentence: str
    refs: tuple[str, ...] = field(default_factory=tuple)
