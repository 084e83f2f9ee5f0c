"""Which PINs will do. Pure."""

from __future__ import annotations

import secrets

SHORTEST, LONGEST = 5, 8
TRIES = 5
LOCKED_MINUTES = 15
"""Lengths, tries and the pause are common practice, no source: a PIN only says who of the crew holds the tablet."""

_RUN = "01234567890"


class Unfit(ValueError):
    """A PIN that is too easily guessed; the message says why."""


def check(pin: str) -> str:
    """The PIN, if it will do. Raises Unfit."""
    if not (pin.isascii() and pin.isdigit() and SHORTEST <= len(pin) <= LONGEST):
        raise Unfit(f"A PIN has {SHORTEST} to {LONGEST} digits and nothing else.")
    if len(set(pin)) == 1 or pin in _RUN or pin in _RUN[::-1]:
        raise Unfit("Not one digit over and over, and not digits in a row.")
    return pin


def new() -> str:
    """A PIN to hand over."""
    while True:
        made = "".join(secrets.choice("0123456789") for _ in range(6))
        try:
            return check(made)
        except Unfit:
            continue
