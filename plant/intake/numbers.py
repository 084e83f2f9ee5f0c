"""What somebody typed for a number: a number, a number with `<` or `>`, words, a lone dash, or nothing.

A dash is neither a number nor a reason for not having one: some laboratories print it for "not analysed", some for
"nothing found". It is kept as words, and counted by itself, so that nobody takes it for a zero.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal, InvalidOperation

POINT, COMMA, EITHER = "point", "comma", "either"

DASHES = frozenset("-–—−") | {"--", "---"}
LONGEST = 40
_MOST_DIGITS = 30

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,2})?")
_GROUPS = re.compile(r"[+-]?[1-9]\d{0,2}([.,])\d{3}(\1\d{3})*")
_LETTER = re.compile(r"[^\W\d_]", re.UNICODE)


class NotANumber(ValueError):
    """What was typed can't be taken for a number, and not for words either; ``expected`` says what would do."""

    def __init__(self, expected: str) -> None:
        super().__init__(expected)
        self.expected = expected


@dataclass(frozen=True)
class Number:
    """A decimal number as plain text ("7.30"), its qualifier ("", "<" or ">"), and whether a decimal sign was typed."""

    text: str
    qualifier: str = ""
    pointed: bool = False

    @property
    def decimal(self) -> Decimal:
        return Decimal(self.text)


@dataclass(frozen=True)
class Words:
    """A result in words."""

    text: str

    @property
    def is_dash(self) -> bool:
        return self.text in DASHES


def read(typed: str, *, decimal: str = POINT) -> Number | Words | None:
    """What was typed; None for nothing. ``decimal`` is point, comma, or either (one sign only, no groups of thousands).

    Raises NotANumber for digits that can't be read without guessing.
    """
    text = " ".join(typed.split())
    if not text:
        return None
    if text in DASHES:
        return Words(text)
    qualifier = text[0] if text[0] in "<>" else ""
    digits = _tidy(text[1:] if qualifier else text)
    plain = _with_point(digits, decimal)
    if plain is not None and _NUMBER.fullmatch(plain):
        return Number(_plain(plain), qualifier, "." in plain)
    if _LETTER.search(text) and not qualifier:
        return Words(text)
    raise NotANumber(_expected(digits, decimal))


def _tidy(digits: str) -> str:
    return digits.strip().replace("−", "-")


def _with_point(digits: str, decimal: str) -> str | None:
    """The digits with a decimal point, or None when the sign used is not the one expected here."""
    if decimal == POINT or "," not in digits:
        return None if decimal == COMMA and _GROUPS.fullmatch(digits) and "." in digits else digits
    return digits.replace(",", ".") if digits.count(",") == 1 and "." not in digits else None


def _plain(text: str) -> str:
    try:
        number = Decimal(text)
    except InvalidOperation:
        raise NotANumber("a number") from None
    plain = format(number, "f")
    if abs(number.adjusted()) > _MOST_DIGITS or len(plain) > LONGEST:
        raise NotANumber(f"a number of at most {_MOST_DIGITS} digits")
    return plain


def _expected(digits: str, decimal: str) -> str:
    if decimal == POINT and re.fullmatch(r"[+-]?\d*,\d+", digits):
        return "a decimal point (7.32), or the option for decimal commas"
    if decimal == COMMA and "." in digits:
        return "a decimal comma (7,32) and no groups of thousands"
    return "a number such as 7.32, <0.05 or >200, without groups of thousands; or words; or nothing"
