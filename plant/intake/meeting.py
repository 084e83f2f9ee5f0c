"""Whether a product may come into a vessel beside what is there already: in the vessel itself, its containment, its fill line.

There is no way round what is refused here. A pair nobody has listed reads "not known": that stops nothing and promises nothing.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from chemistry import incompatible, sources
from plant.works import described
from plant.works.stated import Stated


@dataclass(frozen=True)
class Neighbour:
    """A vessel that shares something with another. ``verdict`` as chemistry.incompatible has it; ``words`` for a person."""

    vessel: str
    shares: str
    verdict: str
    words: str


def problems(stated: Stated, vessel: described.Vessel, product: str, at: dt.datetime, *, what: str) -> list[str]:
    """Why this product may not come into this vessel; empty where nothing that is known speaks against it. A ``transfer`` may
    bring the same chemical under another code, a ``load`` may not.
    """
    found = []
    other = vessel.product != product
    if other and not (what == "transfer" and _same_chemical(stated, vessel.product, product, at)):
        together = _together(stated, vessel.product, product, at)
        found.append(f"{vessel.name or vessel.code} holds {vessel.product}, the {what} is {product}. Do not connect.{together}")
    found += [
        f"{beside.words} Do not connect."
        for beside in neighbours(stated, vessel, product, at)
        if beside.verdict == incompatible.INCOMPATIBLE
    ]
    return found


def neighbours(stated: Stated, vessel: described.Vessel, product: str, at: dt.datetime) -> list[Neighbour]:
    """Vessels in the same containment or on the same fill line, and what is known of their products and this one meeting."""
    out = []
    for other in stated.vessels(at):
        shares = _shared(vessel, other)
        if other.code == vessel.code or not shares or _same_chemical(stated, other.product, product, at):
            continue
        met = incompatible.meeting(_chemical(stated, other.product, at), _chemical(stated, product, at))
        name = f"{other.name or other.code} ({_name(stated, other.product, at)})"
        words = f"{name} stands on the same {shares} as {vessel.name or vessel.code}."
        if met.verdict == incompatible.INCOMPATIBLE:
            words += f" With {_name(stated, product, at)} it gives {met.result} ({_source(met)})."
        elif met.verdict == incompatible.NOT_KNOWN:
            words += f" Whether it goes with {_name(stated, product, at)} is not known here: ask the supplier."
        out.append(Neighbour(other.code, shares, met.verdict, words))
    return out


def _shared(vessel: described.Vessel, other: described.Vessel) -> str:
    if vessel.fill_line and vessel.fill_line == other.fill_line:
        return f"fill line {vessel.fill_line}"
    return f"bund {vessel.containment}" if vessel.containment and vessel.containment == other.containment else ""


def _together(stated: Stated, one: str, other: str, at: dt.datetime) -> str:
    met = incompatible.meeting(_chemical(stated, one, at), _chemical(stated, other, at))
    return f" Together they give {met.result} ({_source(met)})." if met.verdict == incompatible.INCOMPATIBLE else ""


def _source(met: incompatible.Meeting) -> str:
    return sources.SOURCES[met.source].split(";")[0]


def _same_chemical(stated: Stated, one: str, other: str, at: dt.datetime) -> bool:
    """A day tank may hold a dilution of the bulk tank's product under a code of its own."""
    if one == other:
        return True
    chemicals = _chemical(stated, one, at), _chemical(stated, other, at)
    return bool(chemicals[0]) and incompatible.meeting(*chemicals).verdict == incompatible.SAME


def _chemical(stated: Stated, product: str, at: dt.datetime) -> str:
    return str((stated.value("product", product, at) or {}).get("chemical", ""))


def _name(stated: Stated, product: str, at: dt.datetime) -> str:
    return str((stated.value("product", product, at) or {}).get("name") or product)
