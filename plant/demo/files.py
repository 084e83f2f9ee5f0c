"""A simulated history as files: the works, what was observed, and the truth behind it."""

from __future__ import annotations

import csv
import datetime as dt
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any

from plant.demo import works_file
from plant.demo.observe import Booked
from plant.demo.simulate import Simulated

RECORD_COLUMNS = ("site", "timestamp", "parameter", "value", "unit", "replaces", "note")
DELIVERY_COLUMNS = (
    "timestamp", "vessel", "product", "quantity", "unit", "lot", "strength", "strength_basis", "density_kg_per_L",
    "manufactured_on", "cost", "currency", "supplier", "document",
)  # fmt: skip
TRANSFER_COLUMNS = ("timestamp", "from_vessel", "to_vessel", "quantity", "unit", "carrier_water_L")
TRUTH_COLUMNS = ("what", "cause", "subject", "start", "end", "size", "words")
DAY_COLUMNS = ("operating_day", "dosing_point", "volume_ml", "product_kg", "active_kg", "used_mg_per_L", "wanted_mg_per_L")


def write(history: Simulated, folder: Path) -> dict[str, int]:
    """Writes works.toml, records.csv, deliveries.csv, transfers.csv, truth.csv and truth_days.csv; rows in each."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "works.toml").write_text(works_file.text(history.plan, history), encoding="utf-8")
    return {
        "records.csv": _table(folder / "records.csv", RECORD_COLUMNS, _records(history)),
        "deliveries.csv": _table(folder / "deliveries.csv", DELIVERY_COLUMNS, _deliveries(history)),
        "transfers.csv": _table(folder / "transfers.csv", TRANSFER_COLUMNS, _transfers(history)),
        "truth.csv": _table(folder / "truth.csv", TRUTH_COLUMNS, _truth(history)),
        "truth_days.csv": _table(folder / "truth_days.csv", DAY_COLUMNS, _days(history)),
    }


def _table(path: Path, header: Sequence[str], rows: Iterable[Sequence[Any]]) -> int:
    count = 0
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(header)
        for row in rows:
            writer.writerow(row)
            count += 1
    return count


def _local(history: Simulated, at: dt.datetime) -> str:
    return history.grid.calendar.local(at).isoformat(timespec="seconds")


def _records(history: Simulated) -> Iterable[Sequence[Any]]:
    rounds = sorted([*history.book.rounds, *history.book.extra], key=lambda item: item.at)
    for item in rounds:
        for row in item.rows:
            at = _local(history, row.at)
            if row.replaced:
                yield row.site, at, row.parameter, row.replaced, row.unit, "", ""
                yield row.site, at, row.parameter, row.text, row.unit, "yes", row.note
            else:
                yield row.site, at, row.parameter, row.text, row.unit, "", row.note


def strength_of(history: Simulated, booked: Booked) -> float:
    """The certificate's strength, in the product's own basis."""
    product = product_of(history, booked)
    nominal = next(item for item in history.histories if item.feed.product["code"] == product["code"]).nominal_fraction
    return round(float(product["strength"]) * booked.load.certified / nominal, 2)


def product_of(history: Simulated, booked: Booked) -> dict[str, Any]:
    """The product of a load."""
    return next(feed.product for feed in history.plan.feeds if feed.tank["code"] == booked.load.vessel)


def _deliveries(history: Simulated) -> Iterable[Sequence[Any]]:
    for booked in history.book.loads:
        # Somebody who asks from outside sees the book before the missing load was found.
        if booked.load.incident and booked.load.incident.what == "unbooked_delivery":
            continue
        product = product_of(history, booked)
        yield (
            _local(history, booked.at), booked.load.vessel, product["code"], f"{booked.kg:.0f}", "kg", booked.load.lot,
            strength_of(history, booked), product["strength_basis"], product.get("density_kg_per_L", ""),
            (booked.at.date() - dt.timedelta(days=1)).isoformat(), "", "", "Invented Supplies",
            f"D-{booked.load.lot}",
        )  # fmt: skip


def _transfers(history: Simulated) -> Iterable[Sequence[Any]]:
    for moved in history.book.moves:
        yield (
            _local(history, moved.at), moved.move.from_vessel, moved.move.to_vessel, f"{moved.litres:.0f}", "L", "0",
        )  # fmt: skip


def _truth(history: Simulated) -> Iterable[Sequence[Any]]:
    for incident in sorted(history.incidents, key=lambda item: item.start):
        start, end = history.span(incident)
        load = next((item for item in history.book.loads if item.load.incident is incident), None)
        if load is not None:
            start = load.at
        yield (
            incident.what, incident.cause, incident.subject, _local(history, start), _local(history, end), incident.size,
            incident.words,
        )  # fmt: skip


def _days(history: Simulated) -> Iterable[Sequence[Any]]:
    for day in history.true_days():
        yield (
            day.day.isoformat(), day.dosing_point, f"{day.volume_ml:.4f}", f"{day.product_kg:.3f}",
            f"{day.active_kg:.4f}", f"{day.used_mg_l:.4f}", f"{day.wanted_mg_l:.4f}",
        )  # fmt: skip
