"""What a line is read against: the works as stated, how its files spell things, and what its series look like.

Facts may be older than the statements that describe their site (a file of last year brought in on the first day), so a
code counts as stated when it ever was; its particulars are those in force at the time, or the earliest there are.
"""

from __future__ import annotations

import datetime as dt
from collections import deque
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from chemistry import errors, unit_tables, units, vessels
from plant import clock
from plant.intake import moments, numbers
from plant.readings import marks, models
from plant.works import described, parameters
from plant.works.stated import Stated

BY_METER = frozenset({"totaliser", "totaliser_reset", "volume"})
SITE_KINDS = ("sample_point", "meter", "vessel", "dosing_point")
REMEMBERED = 12
"""How many of the newest values of a series say what it looks like."""

FEWEST_POINTED = 3
"""How many of them must be written with a decimal sign before a missing one says anything."""

Recent = tuple[float, bool]
"""A value of a series and whether it was typed with a decimal sign."""


class WrongUnit(ValueError):
    """A unit that doesn't fit the parameter; ``accepted`` lists those that do."""

    def __init__(self, accepted: Iterable[str]) -> None:
        self.accepted = ", ".join(name or "(empty)" for name in accepted)
        super().__init__(self.accepted)


@dataclass(frozen=True)
class Spelling:
    """How a file spells things."""

    decimal: str = numbers.POINT
    ambiguous: str = moments.REFUSE
    sites: Mapping[str, str] | None = None
    units: Mapping[str, str] | None = None


def no_history(site: str, parameter: str, before: dt.datetime) -> list[Recent]:
    """For lines judged by themselves alone."""
    return []


class Ground:
    """Read against; asked once a line, so it remembers what it has looked up."""

    def __init__(
        self,
        stated: Stated,
        calendar: clock.Calendar,
        *,
        spelling: Spelling | None = None,
        history: Callable[[str, str, dt.datetime], list[Recent]] = no_history,
        extra_sites: Iterable[str] = (),
    ) -> None:
        self.stated = stated
        self.calendar = calendar
        self.spelling = spelling or Spelling()
        self.decimal = self.spelling.decimal
        self._history = history
        self._extra_sites = frozenset(extra_sites)
        self._recent: dict[tuple[str, str], deque[Recent]] = {}
        self._moments: dict[str, moments.Moment] = {}
        self._own: dict[str, parameters.Parameter] | None = None
        self._kept: dict[tuple[str, str, str, str], str] = {}
        self._remarks: dict[tuple[str, str], str] = {}

    def moment(self, typed: str) -> moments.Moment:
        """Raises moments.NotATime. Lines of one round share their time, so the last few are remembered."""
        found = self._moments.get(typed)
        if found is None:
            found = moments.read(typed, self.calendar, ambiguous=self.spelling.ambiguous)
            if len(self._moments) > 1000:
                self._moments.clear()
            self._moments[typed] = found
        return found

    def parameter(self, name: str, at: dt.datetime) -> parameters.Parameter | None:
        """A parameter by its name: built in, or ever stated by the works."""
        built_in = parameters.PARAMETERS.get(name)
        if built_in is not None:
            return built_in
        value = self.value("parameter", name, at)
        if value is None:
            return None
        if self._own is None or name not in self._own:
            last = max((item.effective_from for item in self.stated.history("parameter", name)), default=at)
            self._own = (self._own or {}) | parameters.known(self.stated, max(last, at))
        return self._own.get(name)

    def site(self, typed: str) -> str:
        code = typed.strip()
        return (self.spelling.sites or {}).get(code, code)

    def site_kind(self, code: str, at: dt.datetime) -> str | None:
        """What a code names at that time, or ever named."""
        found = self.stated.site_kind(code, at)
        if found is not None:
            return found
        ever = next((kind for kind in SITE_KINDS if self.value(kind, code, at) is not None), None)
        return parameters.SAMPLE_POINT if ever is None and code in self._extra_sites else ever

    def value(self, kind: str, subject: str, at: dt.datetime) -> dict[str, Any] | None:
        """What is stated of a subject at that time, or else the first that was ever stated of it."""
        found = self.stated.value(kind, subject, at)
        if found is not None:
            return found
        return next((item.value for item in self.stated.history(kind, subject) if not item.withdrawn), None)

    def unit(self, typed: str) -> str:
        text = " ".join(typed.split())
        return (self.spelling.units or {}).get(text, text)

    def kept_unit(self, unit: str, known: parameters.Parameter, site: str, at: dt.datetime) -> str:
        """The unit a value typed in ``unit`` is kept in. Raises WrongUnit."""
        own = self._own_unit(known, site, at)
        key = (unit, known.name, own, site if known.name == "strength" else "")
        kept = self._kept.get(key)
        if kept is None:
            kept = self._kept[key] = _kept(unit, known.name, own)
        return kept

    def _own_unit(self, known: parameters.Parameter, site: str, at: dt.datetime) -> str:
        """The unit that a site, a product or the works itself prescribes; "" where chemistry's table decides."""
        if known.name in BY_METER:
            meter = self.value("meter", site, at)
            return str(meter["unit"]) if meter else "L"
        if known.name == "strength":
            vessel = self.value("vessel", site, at)
            product = self.value("product", str(vessel["product"]), at) if vessel else None
            return parameters.STRENGTH_UNITS.get(str(product["strength_basis"]), "%") if product else "%"
        return "" if known.name in parameters.PARAMETERS else known.unit

    def remark(self, unit: str, parameter: str) -> str:
        """What should be said about a unit once, e.g. that mg/L of hardness was taken as CaCO3."""
        key = (unit, parameter)
        if key not in self._remarks:
            basis = parameter in unit_tables.PARAMETERS and parameter not in BY_METER and parameter != "strength"
            self._remarks[key] = units.basis_remark(unit, parameter) if basis else ""
        return self._remarks[key]

    def doubts(self, reading: models.Reading, known: parameters.Parameter, *, pointed: bool) -> list[str]:
        """The marks a value earns by itself and beside the newest of its series; then it joins the series."""
        assert reading.value is not None
        found = []
        if not self._possible(reading, known):
            found.append(marks.IMPOSSIBLE)
        recent = self._series(reading)
        if not pointed and lost_point(reading.value, recent):
            found.append(marks.LOST_POINT)
        if not found and not reading.qualifier:
            recent.append((reading.value, pointed))
        return found

    def _series(self, reading: models.Reading) -> deque[Recent]:
        key = (reading.site, reading.parameter)
        if key not in self._recent:
            before = self._history(reading.site, reading.parameter, reading.taken_at)
            self._recent[key] = deque(before, maxlen=REMEMBERED)
        return self._recent[key]

    def _possible(self, reading: models.Reading, known: parameters.Parameter) -> bool:
        value = reading.value
        assert value is not None
        if reading.unit != "%" and not known.possible(value):
            return False
        if known.name in ("totaliser", "totaliser_reset"):
            digits = (self.value("meter", reading.site, reading.taken_at) or {}).get("digits")
            return digits is None or value < 10.0 ** int(digits)
        if known.name in ("level", "volume", "weight"):
            vessel = self.value("vessel", reading.site, reading.taken_at)
            return vessel is None or fits(described.vessel(reading.site, vessel), reading)
        return True


def lost_point(value: float, recent: Iterable[Recent]) -> bool:
    """Whether a value typed without a decimal sign looks like one of the series with its point lost.

    The series is written with decimals, the value lies above five times its highest, and a tenth, hundredth or
    thousandth of it falls among its values (common practice, no source).
    """
    seen = list(recent)
    pointed = [number for number, had_point in seen if had_point]
    if len(pointed) < FEWEST_POINTED or 2 * len(pointed) <= len(seen):
        return False
    low, high = min(pointed), max(pointed)
    if high <= 0 or value <= 5 * high:
        return False
    return any(0.8 * low <= value / 10**places <= 1.25 * high for places in (1, 2, 3))


def fits(vessel: described.Vessel, reading: models.Reading) -> bool:
    """Whether a level, volume or gross weight can be true of a vessel, by its stated shape; a percent by being one."""
    assert reading.value is not None
    try:
        if vessel.on_scale:
            if reading.parameter == "weight":
                vessels.net_mass_kg(vessel.form, reading.value)
            return True
        if reading.parameter == "level" and reading.unit == "%":
            return 0 <= reading.value <= 100
        if reading.parameter == "level":
            # The float of a gauge may stand at the rim by its own uncertainty.
            return (
                -vessel.level_sd_m
                <= reading.value
                <= vessels.full_level_m(vessel.form) / vessel.level_factor + 3 * vessel.level_sd_m
            )
        if reading.parameter == "volume":
            return 0 <= reading.value <= 1.01 * vessels.full_volume_l(vessel.form)
    except errors.OutOfRange:
        return False
    return True


def _kept(unit: str, name: str, own: str) -> str:
    if name == "strength":
        return _strength(unit, own)
    if own:
        # Whatever is converted to a unit of its own must be of the same kind: litres for cubic metres, not hours.
        if unit == own:
            return own
        fitting = _same_kind(own)
        if unit not in fitting:
            raise WrongUnit(fitting)
        return own
    try:
        return str(units.canonical(1.0, unit, name)[1])
    except units.UnknownUnit:
        raise WrongUnit(units.accepted_for(name)) from None


def _strength(unit: str, own: str) -> str:
    if unit in ("", own):
        return own
    raise WrongUnit((own, ""))


def _same_kind(own: str) -> tuple[str, ...]:
    try:
        kind = units.kind_of(own)
    except units.UnknownUnit:
        return (own,)
    return tuple(name for name in unit_tables.ACCEPTED_UNITS if unit_tables.UNITS[name].kind == kind)
