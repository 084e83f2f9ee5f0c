"""A works whose round has 25 lines, with a telephone, a feeder, and people."""

from __future__ import annotations

import datetime as dt

from plant.ledger.models import Book
from plant.readings.models import Reading
from plant.works import queries
from plant.works.tablets import actions
from tests import people

WATER = {
    "temperature": "11.5",
    "pH": "8.1",
    "turbidity": "0.4",
    "hardness": "180",
    "alkalinity": "150",
    "conductance": "420",
    "iron": "0.05",
}
VALUES = {f"{site}:{parameter}": text for site in ("RAW", "FILTERED", "ENTRY") for parameter, text in WATER.items()} | {
    "ENTRY:free_chlorine": "0.55",
    "HYPO-BULK:level": "1.5",
    "HYPO-POST:feeder_setting": "45",
    "FT-TREATED:totaliser": "120500",
}
"""What is typed, by line; all of it inside every limit."""


def toml() -> str:
    """The small works with another round."""
    text = people.SMALL.read_text()
    kept, rest = text[: text.index("[[round_line]]")], text[text.index("[[state]]") :]
    kept = kept.replace('units = "si"', 'units = "si"\ntelephone = "0555 0123"', 1)
    lines = "".join(
        f'[[round_line]]\nsite = "{key.partition(":")[0]}"\nparameter = "{key.partition(":")[2]}"\ndue = "shift"\n'
        for key in VALUES
    )
    return kept + lines + rest


def book(*, now: dt.datetime = people.OPENED) -> Book:
    """That works with everybody in it."""
    made = people.open_works(toml(), now=now)
    people.join(made, now=now)
    people.person("stan")
    return made


def enrolled(made: Book, name: str = "Filter hall", *, now: dt.datetime = people.OPENED) -> tuple[actions.Device, str]:
    """A tablet of the works, and the token of its cookie."""
    return actions.enrol(book=made, name=name, by=people.person("sam"), now=now)


def give_pin(made: Book, username: str, pin: str = "29384", *, now: dt.datetime = people.OPENED) -> None:
    actions.set_pin(book=made, person=people.person(username), pin=pin, by=people.person("sam"), now=now)


def stated(made: Book):
    return queries.stated(made)


def field(page, key: str):
    return page.locator(f'li.line[data-key="{key}"] input[name^=value-]')


def wait_for(page, text: str, timeout: float = 10_000) -> None:
    page.wait_for_function("text => document.body.innerText.includes(text)", arg=text, timeout=timeout)


def ready(page):
    page.wait_for_selector("form[data-ready=yes]")
    page.wait_for_selector("html[data-offline=ready]", timeout=20_000)


def waiting(page) -> list[dict]:
    return page.evaluate(
        """() => new Promise((resolve, reject) => {
            const request = indexedDB.open("weirbook-round");
            request.onsuccess = () => {
                const all = request.result.transaction("outbox").objectStore("outbox").getAll();
                all.onsuccess = () => { request.result.close(); resolve(all.result); };
            };
            request.onerror = () => reject(request.error);
        })"""
    )


def exactly_once() -> dict[str, int]:
    found: dict[str, int] = {}
    for row in Reading.objects.as_known():
        found[f"{row.site}:{row.parameter}"] = found.get(f"{row.site}:{row.parameter}", 0) + 1
    return found
