"""What stands behind a number: computed again from the figure's key and a seq, never stored.

A key is ``what:subject:day`` or ``what:subject:first..last`` (what: used, volume, product, active, design, need).
"""

from __future__ import annotations

import datetime as dt
from typing import Any

from plant.dosing import carry, comparison
from plant.dosing.day import day_dose, design_for_day, dose_mg_l, in_service
from plant.dosing.figures import DayDose, Figure, Step, Trail
from plant.dosing.need import day_need
from plant.dosing.period import period
from plant.dosing.reckoning import Consumption, Reckoning, consumption
from plant.dosing.spells import Used
from plant.ledger.models import Book
from plant.works import queries as works
from plant.works.described import DosingPoint, Product
from plant.works.stated import Stated

FIELDS = {
    "used": "used_mg_l",
    "volume": "volume_ml",
    "product": "product_kg",
    "active": "active_kg",
    "design": "design_mg_l",
    "need": "need_mg_l",
}
TITLES = {
    "used": "Dose used",
    "volume": "Water treated",
    "product": "Product used",
    "active": "Active used",
    "design": "Design dose",
    "need": "Dose needed",
}


class NoSuchFigure(LookupError):
    """The key names no figure of this works."""


def trail(book: Book, key: str, *, known: int | None = None) -> Trail:
    """The steps behind a figure, down to readings and statements by their refs. Raises NoSuchFigure."""
    what, _, rest = key.partition(":")
    subject, _, when = rest.rpartition(":")
    if what not in FIELDS or not subject:
        raise NoSuchFigure(f"no figure is called {key!r}")
    first, _, last = when.partition("..")
    try:
        days = dt.date.fromisoformat(first), dt.date.fromisoformat(last or first)
    except ValueError:
        raise NoSuchFigure(f"no figure is called {key!r}") from None
    stated = works.stated(book, known=known)
    if subject not in stated.subjects("dosing_point"):
        raise NoSuchFigure(f"no dosing point {subject!r} is stated")
    if last:
        return _of_period(book, stated, what, subject, days, known)
    return _of_day(book, stated, what, subject, days[0], known)


def _of_period(book: Book, stated: Stated, what: str, subject: str, days: tuple[dt.date, dt.date], known: int | None) -> Trail:
    rows = [row for row in comparison.comparison(book, *days, known=known) if row.dosing_point == subject]
    if not rows:
        raise NoSuchFigure(f"{subject} has no days between {days[0]} and {days[1]}")
    total = period(rows)[0]
    counted = [row for row in rows if row.active_kg.value is not None and row.volume_ml.value is not None]
    steps = [
        Step("Days on which mass and volume are both known", f"{total.days_counted} of {total.days_expected} expected"),
        Step(
            "Active mass added up",
            " + ".join(f"{row.active_kg.value:.3f}" for row in counted) + f" = {total.active_kg.value or 0:.3f} kg",
        ),
        Step(
            "Water added up",
            " + ".join(f"{row.volume_ml.value:.4f}" for row in counted) + f" = {total.volume_ml.value or 0:.4f} ML",
        ),
        Step(
            "Dose is mass over volume, not a mean of daily doses",
            _over(total.active_kg, total.volume_ml, total.used_mg_l),
            "definition: 1 mg/L = 1 kg/ML",
        ),
    ]
    wanted = [1] if what in ("active", "product") else [2] if what == "volume" else [0, 1, 2, 3]
    return Trail(
        getattr(total, FIELDS[what]),
        f"{TITLES[what]}, {subject}, {days[0]} to {days[1]}",
        tuple(steps[index] for index in wanted),
    )


def _over(mass: Figure, volume: Figure, dose: Figure) -> str:
    if dose.value is None:
        return "not known"
    return f"{mass.value:.3f} kg ÷ {volume.value:.4f} ML = {dose.value:.4f} mg/L"


def _of_day(book: Book, stated: Stated, what: str, subject: str, day: dt.date, known: int | None) -> Trail:
    out = carry.reckon(book, stated, [day], known=known)
    end = out.bounds(day)[1] - dt.timedelta(microseconds=1)
    point = stated.dosing_point(subject, end)
    product = stated.product(point.product, end)
    row = day_dose(out, point, product, day, expected=in_service(out, point, out.bounds(day)[0], end))
    volume, drawn = out.volume(point.meter, day), consumption(out, point, product, day)
    steps: list[Step] = []
    if what in ("used", "volume"):
        steps.append(_volume_step(out, point, volume, day))
    if what in ("used", "product", "active"):
        steps += _mass_steps(out, product, drawn, day)
    if what == "used":
        steps += _dose_steps(row, volume, drawn, product)
    if what == "design":
        steps.append(_design_step(out, point, day))
    if what == "need":
        steps += _need_steps(out, point, product, day)
    return Trail(getattr(row, FIELDS[what]), f"{TITLES[what]}, {subject}, operating day {day}", tuple(steps))


def _volume_step(out: Reckoning, point: DosingPoint, volume: Used, day: dt.date) -> Step:
    start, end = out.bounds(day)
    hours = (end - start).total_seconds() / 3600
    words = f"Water through {point.meter} in the {hours:g} h of the operating day"
    if volume.amount is None:
        return Step(words, "; ".join(volume.remarks) or "not known")
    meter, _ = out.counters[point.meter]
    parts = [f"{spell.used:,.6g} × {share:.4g}" if share < 1 else f"{spell.used:,.6g}" for spell, share in volume.pieces]
    return Step(
        words + (" (boundary interpolated by elapsed hours)" if volume.interpolated else ""),
        f"{' + '.join(parts)} {meter.unit} = {volume.amount:.4f} ML",
        f"meter accuracy {meter.accuracy_pct:g} % as stated",
        volume.refs,
        _statement(out, "meter", point.meter, end),
    )


def _mass_steps(out: Reckoning, product: Product, drawn: Consumption, day: dt.date) -> list[Step]:
    start, end = out.bounds(day)
    if drawn.product_kg is None:
        return [Step("Product used", "; ".join(drawn.remarks) or "not known")]
    steps = []
    for walked, used, kg, active in drawn.parts:
        if walked is None:
            continue
        unit = "kg" if walked.walk.in_kg else "L"
        parts = [f"{spell.used:.5g} × {share:.4g}" if share < 1 else f"{spell.used:.5g}" for spell, share in used.pieces]
        steps.append(
            Step(
                f"Out of {walked.vessel.name}: start + in − out − end between its readings",
                f"{' + '.join(parts)} = {used.amount:.5g} {unit}",
                "mass balance of the vessel",
                used.refs,
                _statement(out, "vessel", walked.vessel.code, end),
            )
        )
        contents = walked.walk.contents_at(start + (end - start) / 2, walked.decay)
        if contents is None:
            continue
        density = "" if walked.walk.in_kg else f" × {contents.density_kg_l or 0:.4g} kg/L"
        share = active / kg if kg else 0.0
        lots = f" (lots {', '.join(contents.lots)})" if contents.lots else ""
        steps.append(
            Step(
                f"As product and as {product.dose_basis}, at the strength of the contents at the middle of the day{lots}",
                f"{used.amount:.5g} {unit}{density} = {kg:.4f} kg; × {share:.5g} = {active:.4f} kg",
                "strength: certificates, tests and loss in store (chemistry.products, chemistry.decay)",
                (),
                _statement(out, "product", product.code, end),
            )
        )
    return steps


def _dose_steps(row: DayDose, volume: Used, drawn: Consumption, product: Product) -> list[Step]:
    dose, sd = dose_mg_l(volume, drawn, product)
    if dose is None or volume.amount is None or drawn.active_kg is None:
        return [Step("Dose", "not known: " + ("; ".join(row.remarks) or "mass or volume is missing"))]
    gauge = drawn.sd_active_kg / drawn.active_kg if drawn.active_kg else 0.0
    strength = 0.0 if product.dose_basis == "product" else product.strength_sd_pct
    return [
        Step(
            "Dose is mass over volume",
            f"{drawn.active_kg:.4f} kg ÷ {volume.amount:.4f} ML = {dose:.4f} mg/L",
            "definition: 1 mg/L = 1 kg/ML",
        ),
        Step(
            "Standard uncertainty: gauges, strength and meter, independent",
            f"√(({gauge:.2%})² + ({strength:.2f} %)² + ({volume.sd / volume.amount:.2%})²) × {dose:.4f} = {sd or 0:.4f} mg/L",
            "JCGM 100:2008, eq. 10",
        ),
    ]


def _design_step(out: Reckoning, point: DosingPoint, day: dt.date) -> Step:
    start, end = out.bounds(day)
    dose, changed = design_for_day(out, point, day)
    sayings = [item for item in out.stated.history("design_dose", point.code) if item.effective_from < end]
    recent = [item for item in sayings if item.effective_from > start] + [
        item for item in sayings if item.effective_from <= start
    ][-1:]
    words = "Design dose in force" + (", weighted by time over the change" if changed else "")
    reasons = "; ".join(f"{out.calendar.local(item.effective_from):%Y-%m-%d %H:%M}: {item.reason}" for item in recent)
    shown = "none stated" if dose is None else f"{dose:.4g} mg/L"
    return Step(words, shown, reasons, (), tuple(item.ref for item in recent))


def _need_steps(out: Reckoning, point: DosingPoint, product: Product, day: dt.date) -> list[Step]:
    need = day_need(out, point, product, day)
    model = str(point.need.get("model", "none"))
    ref = _statement(out, "dosing_point", point.code, out.bounds(day)[1])
    steps = [Step(f"Need model “{model}” as stated for {point.name}", "; ".join(need.remarks), "", tuple(need.refs), ref)]
    return steps + [_chemistry_step(item) for item in need.steps]


def _chemistry_step(item: Any) -> Step:
    words, formula, value, unit, source = item
    shown = f"{value:.5g}" if isinstance(value, float | int) else str(value)
    return Step(str(words), f"{formula} = {shown} {unit}".strip(), str(source))


def _statement(out: Reckoning, kind: str, subject: str, at: dt.datetime) -> tuple[str, ...]:
    saying = out.stated.saying(kind, subject, at)
    return () if saying is None else (saying.ref,)
