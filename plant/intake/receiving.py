"""One delivery or transfer typed at the works: checked before it is connected, recorded when it has gone in."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django.db import transaction

from plant.intake import actions, deliveries, filling, ground, numbers, transfers
from plant.ledger.models import Book
from plant.readings import marks
from plant.stock import models
from plant.works import actions as works_actions
from plant.works.stated import Stated


class NotToBeConnected(ValueError):
    """Something speaks against it; ``problems`` say what. There is no way round, except that it has gone in already."""

    def __init__(self, problems: list[str]) -> None:
        self.problems = problems
        super().__init__(" ".join(problems))


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
) -> actions.Taken:
    """Records a delivery. Raises cells.Unreadable, NotToBeConnected.

    What has gone in already is always recorded; if it should not have, it is marked and its vessel goes out of service.
    """
    delivery = deliveries.read(cells, _here(stated, now), already_in=True)
    delivery.second_person = second_person
    # Sent again, it is recognised before the room is looked at, which this very load has taken.
    repeated = actions.known(book, client_id)
    problems = [] if repeated else filling.problems(book, stated, delivery, delivery.taken_at)
    if problems and not already_in:
        raise NotToBeConnected(problems)
    if problems and marks.WRONG_PRODUCT not in delivery.marks:
        delivery.marks = [*delivery.marks, marks.OVERFILL]
    received = {"cells": cells, "second_person": second_person, "already_in": already_in}
    with transaction.atomic():
        taken = actions.take(
            book=book, client_id=client_id, kind="delivery", received=received, rows=[delivery], by=by, now=now, judge=False
        )
        if problems and taken.created:
            works_actions.state(
                book=book,
                kind="state",
                subject=f"vessel:{delivery.vessel}",
                value={"is": "off"},
                effective_from=now,
                reason=f"unloaded against a check: {' '.join(problems)}",
                by=by,
                now=now,
            )
    return actions.judge_taken(book=book, taken=taken, by=by)


def move(
    *,
    book: Book,
    stated: Stated,
    cells: dict[str, str],
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    """Records a transfer. Raises cells.Unreadable."""
    transfer: models.Transfer = transfers.read(cells, _here(stated, now))
    return actions.take(
        book=book, client_id=client_id, kind="transfer", received={"cells": cells}, rows=[transfer], by=by, now=now
    )


def _here(stated: Stated, now: dt.datetime) -> ground.Ground:
    decimal = numbers.POINT if stated.works(now).units == "us" else numbers.EITHER
    return ground.Ground(stated, stated.calendar(now), spelling=ground.Spelling(decimal=decimal))
