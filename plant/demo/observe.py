"""What people would have read and written down: rounds, loads, transfers, with the errors of gauges and of people."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field, replace

import numpy as np

from chemistry import vessels
from plant.demo.clockwork import Grid
from plant.demo.effects import Effects
from plant.demo.plan import Block, Incident, Line, Plan
from plant.demo.tanks import FeedHistory, Held, Load, Move

MINUTES_A_LINE = 0.8
WALK_STARTS_MIN, WALK_STARTS_MAX = 3, 11
_OVER = dt.timedelta(minutes=50)


@dataclass(frozen=True)
class Row:
    """One line as written: text, or nothing with the reason in ``note``. ``replaced`` is what stood there first."""

    site: str
    parameter: str
    at: dt.datetime
    text: str
    unit: str
    note: str = ""
    replaced: str = ""


@dataclass
class Round:
    """One shift's round. ``written`` is when it reached the book."""

    at: dt.datetime
    shift: str
    rows: list[Row]
    written: dt.datetime
    paper: bool = False


@dataclass(frozen=True)
class Booked:
    """A load as booked; ``written`` None: never. ``first_kg`` is what was booked at first where that was wrong."""

    load: Load
    at: dt.datetime
    written: dt.datetime | None
    kg: float
    first_kg: float | None = None


@dataclass(frozen=True)
class Moved:
    """A transfer as booked, litres."""

    move: Move
    at: dt.datetime
    litres: float


@dataclass
class Book:
    """Everything written down, in order of happening."""

    rounds: list[Round] = field(default_factory=list)
    extra: list[Round] = field(default_factory=list)
    loads: list[Booked] = field(default_factory=list)
    moves: list[Moved] = field(default_factory=list)

    def until(self, end: dt.datetime) -> Book:
        """What had happened, and was over, by a moment."""
        return Book(
            [item for item in self.rounds if item.at + _OVER < end],
            sorted((item for item in self.extra if item.written < end), key=lambda item: item.at),
            [item for item in self.loads if item.at + _OVER < end],
            [item for item in self.moves if item.at + _OVER < end],
        )


def rounds_of(plan: Plan, grid: Grid, rng: np.random.Generator) -> list[tuple[dt.datetime, str, int]]:
    """(start of the walk, shift, operating day) of every round, the one that closes the last day included."""
    out = []
    for day in range(grid.days + 1):
        for name, starts in plan.shifts:
            late = dt.timedelta(minutes=int(rng.integers(WALK_STARTS_MIN, WALK_STARTS_MAX)))
            local = dt.datetime.combine(grid.date(day), starts, grid.calendar.zone)
            at = local.astimezone(dt.UTC) + late
            out.append((at, name, day))
    return out


def due(line: Line, date: dt.date, first_of_day: bool) -> bool:
    """Whether a line is due on this round."""
    if line.due == "shift":
        return True
    if line.due == "day":
        return first_of_day
    if line.due == "evening":
        return not first_of_day
    return first_of_day and date.weekday() == 1


def write_rounds(
    plan: Plan,
    grid: Grid,
    truth: dict[tuple[str, str], np.ndarray],
    histories: list[FeedHistory],
    effect: Effects,
    rng: np.random.Generator,
) -> list[Round]:
    """All rounds: each line read at its minute of the walk."""
    starts = rounds_of(plan, grid, rng)
    first_shift = plan.shifts[0][0]
    held = {code: item for history in histories for code, item in history.held.items()}
    rounds = [Round(at, shift, [], at + dt.timedelta(minutes=35)) for at, shift, _ in starts]
    for place, line in enumerate(plan.lines):
        offset = dt.timedelta(minutes=round(place * MINUTES_A_LINE))
        chosen = [index for index, (_, shift, day) in enumerate(starts) if due(line, grid.date(day), shift == first_shift)]
        if not chosen:
            continue
        moments = [starts[index][0] + offset for index in chosen]
        values = read(plan, line, grid.hours_of(moments), truth, held, rng)
        for index, moment, text in zip(chosen, moments, written(line, values), strict=True):
            rounds[index].rows.append(Row(line.site, line.parameter, moment, text, line.unit))
    return spoil(plan, grid, rounds, effect, rng)


def read(
    plan: Plan,
    line: Line,
    hours: np.ndarray,
    truth: dict[tuple[str, str], np.ndarray],
    held: dict[str, Held],
    rng: np.random.Generator,
) -> np.ndarray:
    """What the instrument shows at moments of the grid."""
    if line.site in held and line.parameter in ("level", "weight"):
        vessel = held[line.site]
        return _gauge(vessel.block, _product_of(plan, vessel.block), vessel.kg_at(hours), rng)
    series = truth[line.site, line.parameter]
    if line.parameter == "totaliser":
        whole = hours.astype(int)
        value = series[whole] + (series[whole + 1] - series[whole]) * (hours - whole)
        return np.floor(np.mod(value, 10.0 ** _digits(plan, line.site)))
    value = np.interp(hours, np.arange(len(series)), series)
    return value + rng.normal(0, 1, len(hours)) * (line.sd + line.sd_share * np.abs(value))


def _gauge(block: Block, product: Block, kg: np.ndarray, rng: np.random.Generator) -> np.ndarray:
    if block["shape"] == "scale":
        return kg + float(block.get("tare_kg", 0.0)) + rng.normal(0, float(block.get("weight_sd_kg", 1.0)), len(kg))
    level = np.asarray(vessels.level_m(block, np.maximum(kg, 0.0) / float(product["density_kg_per_L"])))
    noisy = level + rng.normal(0, float(block.get("level_sd_m", 0.005)), len(kg))
    return np.clip(noisy, 0.0, vessels.full_level_m(block))


def _product_of(plan: Plan, block: Block) -> Block:
    return next(feed.product for feed in plan.feeds if feed.product["code"] == block["product"])


def _digits(plan: Plan, meter: str) -> int:
    return int(next(block["digits"] for block in plan.blocks["meter"] if block["code"] == meter))


def written(line: Line, values: np.ndarray) -> list[str]:
    """Values as they are written: the line's decimals, and "<" below what the method sees."""
    out = []
    for value in values:
        kept = value if line.parameter in ("alkalinity", "temperature") else max(value, 0.0)
        low = line.below is not None and kept < line.below
        out.append(f"<{line.below:.{line.decimals}f}" if low else f"{kept:.{line.decimals}f}")
    return out


def spoil(plan: Plan, grid: Grid, rounds: list[Round], effect: Effects, rng: np.random.Generator) -> list[Round]:
    """What people and gauges did wrong."""
    for start, end, incident in sorted(effect.on_paper, key=lambda item: item[0]):
        inside = [item for item in rounds if start <= grid.hour_of(item.at) < end]
        if incident.what == "missing_round":
            rounds = [item for item in rounds if item not in inside]
        elif incident.what == "late_entry":
            for item in inside:
                item.written += dt.timedelta(days=incident.size)
                item.paper = True
        elif incident.what in ("stuck", "wrong_reading", "not_taken", "second_thoughts"):
            _spoil_line(incident, inside, rng)
        elif incident.what == "meter_change":
            _change_meter(grid, plan, rounds, start, incident)
    return rounds


def _spoil_line(incident: Incident, inside: list[Round], rng: np.random.Generator) -> None:
    frozen: str | None = None
    for item in inside:
        for index, row in enumerate(item.rows):
            if f"{row.site}:{row.parameter}" != incident.subject:
                continue
            if incident.what == "stuck":
                frozen = frozen if frozen is not None else row.text
                item.rows[index] = replace(row, text=frozen)
            elif incident.what == "not_taken":
                item.rows[index] = replace(row, text="", note=incident.words)
            elif incident.what == "wrong_reading":
                item.rows[index] = replace(row, text=row.text.replace(".", "", 1))
                return
            else:
                wrong = f"{float(row.text) * incident.size:.{len(row.text.partition('.')[2])}f}"
                item.rows[index] = replace(row, replaced=wrong, note="figures swapped when typing")
                return


def _change_meter(grid: Grid, plan: Plan, rounds: list[Round], start: float, incident: Incident) -> None:
    """From the first round on, the new meter counts; that round says what the old one showed."""
    digits = _digits(plan, incident.subject)
    base: float | None = None
    for item in rounds:
        if grid.hour_of(item.at) < start:
            continue
        for index, row in enumerate(list(item.rows)):
            if (row.site, row.parameter) != (incident.subject, "totaliser") or not row.text:
                continue
            if base is None:
                base = float(row.text)
                note = "meter exchanged; this is the old one's last count"
                old = replace(row, parameter="totaliser_reset", note=note)
                item.rows[index : index + 1] = [old, replace(row, text=f"{incident.size:.0f}")]
            else:
                item.rows[index] = replace(row, text=f"{(float(row.text) - base + incident.size) % 10**digits:.0f}")


def write_changes(grid: Grid, histories: list[FeedHistory]) -> list[Round]:
    """Containers changed on a scale: the old one weighed just before, then the new one."""
    out = []
    for history in histories:
        for change in history.changes:
            at = grid.moment(change.hour)
            before = at - dt.timedelta(minutes=1)
            rows = [
                Row(change.vessel, "weight", before, f"{change.old_gross_kg:.1f}", "kg"),
                Row(change.vessel, "container_change", at, f"{change.new_gross_kg:.1f}", "kg"),
            ]
            out.append(Round(at, "", rows, at + dt.timedelta(minutes=5)))
    return out


def write_low_chlorine(
    grid: Grid, truth: dict[tuple[str, str], np.ndarray], site: str, start: float, end: float, rng: np.random.Generator
) -> list[Round]:
    """Checks every hour and a half while the residual is low, and one after."""
    out = []
    series = truth[site, "free_chlorine"]
    hour = start + 0.6
    while hour < end + 1.6:
        value = max(float(np.interp(hour, np.arange(len(series)), series)) + rng.normal(0, 0.01), 0.0)
        at = grid.moment(hour)
        out.append(Round(at, "", [Row(site, "free_chlorine", at, f"{value:.2f}", "mg/L")], at + dt.timedelta(minutes=3)))
        hour += 1.5
    return out


def write_loads(grid: Grid, histories: list[FeedHistory]) -> list[Booked]:
    """Loads as booked: on the spot, late, wrong at first, or never."""
    out = []
    for history in histories:
        for load in history.loads:
            at = grid.moment(load.hour)
            written_at: dt.datetime | None = at + dt.timedelta(minutes=40)
            first = None
            what = load.incident.what if load.incident else ""
            if load.incident and what == "unbooked_delivery":
                size = load.incident.size
                written_at = at + dt.timedelta(days=size, hours=1) if size else None
            if load.incident and what == "wrong_booking":
                first = round(load.kg * load.incident.size)
            out.append(Booked(load, at, written_at, load.kg, first))
    return sorted(out, key=lambda item: item.at)


def write_moves(grid: Grid, histories: list[FeedHistory], rng: np.random.Generator) -> list[Moved]:
    """Transfers as booked: read off the day tank's sight glass."""
    out = []
    for history in histories:
        density = float(history.feed.product.get("density_kg_per_L", 1.0))
        for move in history.moves:
            at = grid.moment(move.hour)
            out.append(Moved(move, at, round(move.kg / density + rng.normal(0, 1.0), 0)))
    return sorted(out, key=lambda item: item.at)
