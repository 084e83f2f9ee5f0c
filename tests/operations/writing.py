"""A writer for the tests: `python -m tests.operations.writing NUMBER SECONDS STOP` adds rounds to the works TST as fast as it can,
until the seconds are over or there is a file STOP.

Straight through the door of the program, without a web server, so that the database is what is tried. Prints JSON:
entries written, errors by their words, and the seconds each took.
"""

import json
import sys
import time
import uuid
from pathlib import Path

import django

django.setup()

from plant import clock  # noqa: E402
from plant.intake import actions  # noqa: E402
from plant.ledger import queries  # noqa: E402
from plant.readings.models import Reading  # noqa: E402


def reading(number: int, at: object) -> Reading:
    return Reading(
        site="ENTRY",
        parameter="free_chlorine",
        taken_at=at,
        value=0.5,
        value_text="0.50",
        unit="mg/L",
        typed="0.50",
        typed_unit="mg/L",
        note=f"writer {sys.argv[1]}, {number}",
    )


def main() -> None:
    end = time.monotonic() + float(sys.argv[2])
    book = queries.book("TST")
    written, errors, seconds = [], [], []
    number = 0
    while time.monotonic() < end and not Path(sys.argv[3]).exists():
        number += 1
        now, ident = clock.now(), str(uuid.uuid4())
        began = time.monotonic()
        try:
            actions.take(
                book=book,
                client_id=ident,
                kind="round",
                received={"writer": sys.argv[1], "number": number},
                rows=[reading(number, now) for _ in range(5)],
                by=None,
                now=now,
                judge=False,
            )
        except Exception as problem:  # noqa: BLE001 — what a person would have been told
            errors.append(f"{type(problem).__name__}: {problem}")
        else:
            written.append(ident)
        seconds.append(time.monotonic() - began)
    json.dump({"written": written, "errors": errors, "seconds": seconds}, sys.stdout)


if __name__ == "__main__":
    main()
