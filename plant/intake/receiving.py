"""One delivery or transfer typed at the works: checked before it is connected, recorded when it has gone in."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.files.models import Document
from plant.intake import accepting, actions, deliveries, filling, ground, numbers, transfers, weighing
from plant.intake.cells import Unreadable
from plant.ledger.models import Book, Row
from plant.readings import marks
from plant.stock import actions as stock_actions
from plant.stock import models
from plant.works import actions as works_actions
from plant.works.stated import Stated


class NotToBeConnected(ValueError):
    """Something speaks against it; ``problems`` say what. There is no way round, except that it has gone in already."""

    def __init__(self, problems: list[str]) -> None:
        self.problems = problems
        super().__init__(" ".join(problems))


class WantsAcceptance(ValueError):
    """The load is outside its stated terms; a supervisor may accept it with a reason."""

    def __init__(self, problems: list[str]) -> None:
        self.problems = problems
        super().__init__(" ".join(problems))


@dataclass(frozen=True)
class Received:
    """What came of it, and what the vessel's own rise says of the papers; ``differs`` where somebody should look."""

    taken: actions.Taken
    rise: str = ""
    differs: bool = False


def deliver(
    *,
    book: Book,
    stated: Stated,
    cells: dict[str, str],
    second_person: str,
    already_in: bool,
    by: Any,
    now: dt.datetime,
    client_id: str,
    levels: weighing.Levels | None = None,
    papers: Sequence[Document] = (),
    order: models.Order | None = None,
    accepted_because: str = "",
    quarantine: bool = False,
) -> Received:
    """Records a delivery. Raises cells.Unreadable, NotToBeConnected, WantsAcceptance.

    What has gone in already is always recorded; if it should not have, it is marked and its vessel goes out of service.
    ``levels`` are the vessel's readings before and after: they become readings, and their rise is held against the papers.
    ``papers`` are documents of the load, such as its certificate; ``order`` is the one it fulfils. ``accepted_because`` is a
    supervisor's reason for a load outside its terms; ``quarantine`` keeps its vessel out of service until stated otherwise.
    """
    here = _here(stated, now)
    delivery = deliveries.read(cells, here, already_in=True)
    delivery.second_person = second_person
    # Sent again, it is recognised before the room is looked at, which this very load has taken.
    repeated = actions.known(book, client_id)
    problems = [] if repeated else filling.problems(book, stated, delivery, delivery.taken_at)
    if problems and not already_in:
        raise NotToBeConnected(problems)
    day = here.calendar.local(delivery.taken_at).date()
    terms = [] if repeated else accepting.outside_terms(stated, delivery, day)
    if terms and not already_in and len(accepted_because.strip()) < 3:
        raise WantsAcceptance(terms)
    if terms:
        delivery.marks = [*delivery.marks, marks.ACCEPTED]
    if problems and marks.WRONG_PRODUCT not in delivery.marks:
        delivery.marks = [
            *delivery.marks,
            marks.OVERFILL if all("room for" in one for one in problems) else marks.WRONG_PRODUCT,
        ]
    rise = weighing.rise(stated, delivery, levels, here, by) if levels is not None else None
    received = {"cells": cells, "second_person": second_person, "already_in": already_in}
    if levels is not None:
        received["levels"] = levels.as_received()
    if papers:
        received["papers"] = [paper.sha256 for paper in papers]
    if terms:
        received["accepted_because"] = accepted_because.strip() or "it had gone in already"
    rows: list[Row] = [delivery, *(rise.readings if rise else ()), *papers]
    if order is not None:
        received["order"] = order.ref
        rows += stock_actions.reversal(old=order, reason=f"delivered: {delivery}")
    why = problems or (["quarantine until accepted"] if quarantine else [])
    taken = _take(book, "delivery", received, rows, delivery.vessel if why else "", why, by, now, client_id)
    return Received(taken, rise.words if rise else "", bool(rise and rise.differs))


def move(
    *,
    book: Book,
    stated: Stated,
    cells: dict[str, str],
    already_in: bool = False,
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> Received:
    """Records a transfer. Raises cells.Unreadable, NotToBeConnected; what has been moved already is recorded and marked."""
    transfer: models.Transfer = transfers.read(cells, _here(stated, now))
    repeated = actions.known(book, client_id)
    problems = [] if repeated else filling.transfer_problems(book, stated, transfer, transfer.taken_at)
    if problems and not already_in:
        raise NotToBeConnected(problems)
    if problems:
        transfer.marks = [_mark(problems)]
    received = {"cells": cells, "already_in": already_in} if already_in else {"cells": cells}
    vessel = transfer.to_vessel if problems else ""
    return Received(_take(book, "transfer", received, [transfer], vessel, problems, by, now, client_id))


def against(*, book: Book, stated: Stated, cells: dict[str, str], now: dt.datetime) -> list[str]:
    """What speaks against a load, as far as it has been typed: said even while something else on the form is still missing."""
    try:
        delivery = deliveries.read(cells, _here(stated, now), already_in=True)
    except Unreadable:
        return []
    return filling.problems(book, stated, delivery, delivery.taken_at)


def _mark(problems: list[str]) -> str:
    """More than there was room for, or something that must not meet what is there."""
    return marks.WRONG_PRODUCT if any("holds" in one or "stands on" in one for one in problems) else marks.OVERFILL


def _take(
    book: Book,
    kind: str,
    received: dict[str, Any],
    rows: Sequence[Row],
    out_of_service: str,
    problems: list[str],
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    with transaction.atomic():
        taken = actions.take(
            book=book, client_id=client_id, kind=kind, received=received, rows=rows, by=by, now=now, judge=False
        )
        if out_of_service and taken.created:
            works_actions.state(
                book=book,
                kind="state",
                subject=f"vessel:{out_of_service}",
                value={"is": "off"},
                effective_from=now,
                reason=f"filled: {' '.join(problems)}",
                by=by,
                now=now,
            )
    return actions.judge_taken(book=book, taken=taken, by=by)


def _here(stated: Stated, now: dt.datetime) -> ground.Ground:
    decimal = numbers.POINT if stated.works(now).units == "us" else numbers.EITHER
    return ground.Ground(stated, stated.calendar(now), spelling=ground.Spelling(decimal=decimal))
