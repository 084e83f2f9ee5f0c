"""The works as its line of water: what is sampled, in the order of the water, and what is dosed on the way there."""

from __future__ import annotations

import dataclasses
import datetime as dt
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from django.urls import reverse
from django.utils.safestring import SafeString, mark_safe

from plant import clock, scene
from plant.board import pictures, shown
from plant.dosing.figures import DayDose
from plant.readings.queries import Point
from plant.scene import svg
from plant.works import described, parameters
from plant.works.stated import Stated

ONE_ROUND = dt.timedelta(hours=2)
"""Values taken so near to each other belong to one walk. Common practice, no source."""


@dataclass(frozen=True)
class Value:
    """The newest value of one parameter at a point. ``level`` where an open deviation speaks of it."""

    label: str
    words: str
    unit: str
    when: str
    path: str
    level: str = ""
    doubtful: bool = False
    corrected: bool = False


@dataclass(frozen=True)
class Dose:
    """A dosing point with the strip of the last complete day. ``picture`` is None while it is not in service."""

    code: str
    name: str
    product: str
    state: str
    path: str
    level: str
    weak: bool
    picture: scene.Scene | None

    @property
    def strip(self) -> SafeString:
        """The picture as markup."""
        return mark_safe(svg.paint(self.picture, f"strip-{self.code}")) if self.picture else SafeString("")


@dataclass(frozen=True)
class Stop:
    """A sample point, its newest values, and the doses on the way to it. ``when`` is the time of the newest; a value
    that was not taken on the same round says its own.
    """

    code: str
    name: str
    stage: str
    when: str
    values: tuple[Value, ...]
    doses: tuple[Dose, ...]


def stops(
    stated: Stated,
    *,
    now: dt.datetime,
    newest: Mapping[tuple[str, str], Point],
    doses: Iterable[DayDose],
    levels: Mapping[tuple[str, str], str],
    whisker: bool,
    code: str,
) -> list[Stop]:
    """The line from source to supply.

    ``levels`` gives the worst open deviation of (place, parameter), and of (place, "") for the place itself. A dosing
    point stands on the way to the sample point that it is stated to act on; one that names none comes at the end.
    """
    works, calendar = stated.works(now), stated.calendar(now)
    known = parameters.known(stated, now)
    rows = {row.dosing_point: row for row in doses}
    points = stated.sample_points(now)
    places = {point.code for point in points}
    by_place: dict[str, list[Dose]] = {}
    for point in stated.dosing_points(now):
        place = point.sample_point if point.sample_point in places else ""
        by_place.setdefault(place or "", []).append(
            _dose(stated, point, rows.get(point.code), now, levels.get((point.code, ""), ""), whisker, code)
        )
    order = list(known)
    found = []
    for sample_point in points:
        here = sorted(
            (point for (site, _), point in newest.items() if site == sample_point.code),
            key=lambda point: order.index(point.parameter) if point.parameter in order else len(order),
        )
        values = tuple(_value(point, known.get(point.parameter), works, now, calendar, levels, code) for point in here)
        doses_here = tuple(by_place.get(sample_point.code, ()))
        when = max(here, key=lambda point: point.at) if here else None
        shared = shown.moment(when.at, now, calendar) if when else ""
        values = tuple(
            dataclasses.replace(value, when=_apart(point.at, when.at if when else now, value.when, calendar))
            for value, point in zip(values, here, strict=True)
        )
        found.append(Stop(sample_point.code, sample_point.name, sample_point.stage, shared, values, doses_here))
    if by_place.get(""):
        found.append(Stop("", "Dosed elsewhere", "", "", (), tuple(by_place[""])))
    return found


def _apart(at: dt.datetime, newest: dt.datetime, words: str, calendar: clock.Calendar) -> str:
    """When a value was taken, as far as that is not said by the newest beside it."""
    if newest - at < ONE_ROUND:
        return ""
    local = calendar.local(at)
    return f"{local:%H:%M}" if local.date() == calendar.local(newest).date() else words


def _value(
    point: Point,
    parameter: parameters.Parameter | None,
    works: described.Works,
    now: dt.datetime,
    calendar: clock.Calendar,
    levels: Mapping[tuple[str, str], str],
    code: str,
) -> Value:
    written = shown.reading(point, parameter, works)
    return Value(
        label=parameter.label if parameter else point.parameter.replace("_", " "),
        words=written.words,
        unit=written.unit,
        when=shown.moment(point.at, now, calendar),
        path=f"/w/{code}/reading/{point.ref}/",
        level=levels.get((point.site, point.parameter), ""),
        doubtful=point.doubtful,
        corrected=point.corrected,
    )


def _dose(
    stated: Stated,
    point: described.DosingPoint,
    row: DayDose | None,
    now: dt.datetime,
    level: str,
    whisker: bool,
    code: str,
) -> Dose:
    state = stated.state("dosing_point", point.code, now)
    picture = None
    weak = row is not None and row.weak
    if row is not None and state == "in_service":
        tolerance = pictures.tolerance_pct(stated, point.code, now)
        picture = pictures.day_strip(row, name=point.name, code=code, tolerance=tolerance, whisker=whisker, width=276)
    try:
        product = stated.product(point.product, now).name
    except LookupError:
        product = point.product
    path = reverse("board:dosing_point", args=[code, point.code])
    return Dose(point.code, point.name, product, state, path, level, weak, picture)
