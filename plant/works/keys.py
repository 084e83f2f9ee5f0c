"""Reads the keys of a block: each value as its row in kinds.py says, or a sentence of what is wrong."""

from __future__ import annotations

import datetime as dt
import itertools
import math
import re
from collections.abc import Callable
from decimal import Decimal
from typing import Any
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from chemistry import constants
from plant.works import kinds

CODE = re.compile(r"[^\W_][\w .()+-]{0,39}")
_LONGEST_TEXT = 400
_MOST_ITEMS = 500


class BlockError(ValueError):
    """A block that can't be stated; ``messages`` has one sentence for each thing that is wrong."""

    def __init__(self, messages: list[str]) -> None:
        self.messages = messages
        super().__init__("; ".join(messages))


def read_keys(keys: list[kinds.Key], value: dict[str, Any], problems: list[str]) -> dict[str, Any]:
    """What the keys hold, cleaned; what is wrong is added to ``problems``."""
    clean = {}
    for key in keys:
        if key.name not in value:
            if key.required and all(key.name not in problem for problem in problems):
                problems.append(f"key {key.name} is missing: expected {expected_of(key)}")
            continue
        try:
            clean[key.name] = _READ[key.holds](key, value[key.name])
        except BlockError as problem:
            problems.extend(problem.messages)
        except ValueError:
            problems.append(f"{key.name}: read {_shown(value[key.name])}, expected {expected_of(key)}")
    return clean


def refuse_unknown(value: dict[str, Any], keys: list[kinds.Key], problems: list[str], where: str) -> None:
    """Adds a sentence for each key that the table doesn't have."""
    known = [key.name for key in keys]
    for name in value:
        if name not in known:
            of = f" for {where}" if where else ""
            problems.append(f"unknown key {name}{of}; known: {', '.join(dict.fromkeys(known))}")


def expected_of(key: kinds.Key) -> str:
    """What a key takes, in words."""
    if key.holds in _WORDS:
        return _WORDS[key.holds]
    if key.holds == "choice":
        return "one of " + ", ".join(key.choices)
    words = "a whole number" if key.holds == "whole" else "a number"
    if key.above is not None:
        words += f" greater than {key.above:g}"
    if key.low is not None:
        words += f" not below {key.low:g}"
    if key.high is not None:
        words += f" not above {key.high:g}"
    return words


_WORDS = {
    "text": "text in quotes",
    "code": "a code in quotes",
    "flag": "true or false",
    "flag_or_number": "true, false or mg per mg",
    "time": "a local time such as 07:00",
    "date": "a date such as 2026-01-31",
    "moment": "a time such as 2026-01-01T07:00:00",
    "formula": "a chemical formula such as CaO",
    "dose_basis": "product, active, Cl2 or a chemical formula",
    "timezone": "the IANA name of a time zone, such as Europe/Berlin",
    "refs": "a list of codes in quotes",
    "words": "a list of words in quotes",
    "weekdays": f"a list of days from {', '.join(kinds.WEEKDAYS)}",
    "due": 'shift, day, week, month or a list of days such as ["Mon", "Thu"]',
    "points": "two or more pairs of numbers, rising in the first",
    "tell": 'a list such as [{ who = "…", within_hours = 24 }]',
    "need": 'a table such as { model = "none" }',
}


def _shown(value: Any) -> str:
    text = repr(str(value)) if isinstance(value, dt.date | dt.time) else repr(value)
    return text if len(text) < 80 else text[:77] + "..."


def _read_text(key: kinds.Key, value: Any) -> str:
    if not isinstance(value, str) or len(value) > _LONGEST_TEXT or any(ord(char) < 32 for char in value):
        raise ValueError
    return value.strip()


def _read_code(key: kinds.Key, value: Any) -> str:
    if not isinstance(value, str) or not CODE.fullmatch(value.strip()):
        raise ValueError
    return value.strip()


def _read_number(key: kinds.Key, value: Any) -> float | int:
    if isinstance(value, Decimal):
        value = float(value)
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise ValueError
    if (key.above is not None and value <= key.above) or (key.low is not None and value < key.low):
        raise ValueError
    if key.high is not None and value > key.high:
        raise ValueError
    return value


def _read_whole(key: kinds.Key, value: Any) -> int:
    number = _read_number(key, value)
    if number != int(number):
        raise ValueError
    return int(number)


def _read_flag(key: kinds.Key, value: Any) -> bool:
    if not isinstance(value, bool):
        raise ValueError
    return value


def _read_flag_or_number(key: kinds.Key, value: Any) -> bool | float | int:
    return value if isinstance(value, bool) else _read_number(key, value)


def _read_choice(key: kinds.Key, value: Any) -> str:
    if value not in key.choices:
        raise ValueError
    return str(value)


def _read_time(key: kinds.Key, value: Any) -> str:
    found = value if isinstance(value, dt.time) else dt.time.fromisoformat(_read_text(key, value))
    if found.tzinfo is not None or found.second or found.microsecond:
        raise ValueError
    return found.strftime("%H:%M")


def _read_date(key: kinds.Key, value: Any) -> str:
    if isinstance(value, dt.datetime):
        raise ValueError
    found = value if isinstance(value, dt.date) else dt.date.fromisoformat(_read_text(key, value))
    return found.isoformat()


def _read_moment(key: kinds.Key, value: Any) -> str:
    found = value if isinstance(value, dt.datetime) else dt.datetime.fromisoformat(_read_text(key, value))
    if found.tzinfo is None:
        raise ValueError
    return found.astimezone(dt.UTC).isoformat().replace("+00:00", "Z")


def _read_timezone(key: kinds.Key, value: Any) -> str:
    try:
        return str(ZoneInfo(_read_text(key, value)))
    except (ZoneInfoNotFoundError, OSError):
        raise ValueError from None


def _read_formula(key: kinds.Key, value: Any) -> str:
    if not constants.is_formula(_read_text(key, value)):
        raise ValueError
    return str(value).strip()


def _read_dose_basis(key: kinds.Key, value: Any) -> str:
    return str(value) if value in ("product", "active") else _read_formula(key, value)


def _items(value: Any, most: int = _MOST_ITEMS) -> list[Any]:
    if not isinstance(value, list | tuple) or len(value) > most:
        raise ValueError
    return list(value)


def _read_refs(key: kinds.Key, value: Any) -> list[str]:
    found = [_read_code(key, item) for item in _items(value)]
    if not found or len(set(found)) != len(found):
        raise ValueError
    return found


def _read_words(key: kinds.Key, value: Any) -> list[str]:
    return [_read_text(key, item) for item in _items(value)]


def _read_weekdays(key: kinds.Key, value: Any) -> list[str]:
    found = _items(value)
    if any(item not in kinds.WEEKDAYS for item in found):
        raise ValueError
    return [day for day in kinds.WEEKDAYS if day in found]


def _read_due(key: kinds.Key, value: Any) -> str | list[str]:
    if isinstance(value, str):
        if value not in ("shift", "day", "week", "month"):
            raise ValueError
        return value
    return _read_weekdays(key, value) or _fail()


def _fail() -> Any:
    raise ValueError


def _read_points(key: kinds.Key, value: Any) -> list[list[float | int]]:
    plain = kinds.Key(key.name, "number")
    found = [[_read_number(plain, number) for number in _items(pair, 2)] for pair in _items(value)]
    rising = all(len(pair) == 2 for pair in found) and all(later[0] > former[0] for former, later in itertools.pairwise(found))
    if len(found) < 2 or not rising:
        raise ValueError
    return found


_TELL = (
    kinds.Key("who", required=True),
    kinds.Key("within_hours", "number", required=True, above=0.0, high=10000.0),
    kinds.Key("how"),
    kinds.Key("telephone"),
)


def _read_tell(key: kinds.Key, value: Any) -> list[dict[str, Any]]:
    out = []
    for item in _items(value, 20):
        if not isinstance(item, dict):
            raise ValueError
        problems: list[str] = []
        out.append(read_keys(list(_TELL), item, problems))
        refuse_unknown(item, list(_TELL), problems, "tell")
        if problems:
            raise BlockError([f"tell: {problem}" for problem in problems])
    return out


def _read_need(key: kinds.Key, value: Any) -> dict[str, Any]:
    if not isinstance(value, dict) or not isinstance(value.get("model"), str):
        raise ValueError
    model = value["model"]
    if model not in kinds.NEED_MODELS:
        raise BlockError([f"need: unknown model {model!r}; known: {', '.join(kinds.NEED_MODELS)}"])
    keys = [kinds.Key("model"), kinds.Key("max_age_hours", "number", above=0.0), *kinds.NEED_MODELS[model]]
    problems: list[str] = []
    clean = read_keys(keys, value, problems)
    refuse_unknown(value, keys, problems, f"model {model}")
    if model == "oxidant_demand" and ("demand_mg_per_L" in value) == ("demand_from" in value):
        problems.append("expected either demand_mg_per_L or demand_from")
    if model == "sequestrant" and not set(value) & {item.name for item in kinds.NEED_MODELS[model]}:
        problems.append(f"expected at least one of {', '.join(item.name for item in kinds.NEED_MODELS[model])}")
    if problems:
        raise BlockError([f"need: {problem}" for problem in problems])
    return clean


_READ: dict[str, Callable[[kinds.Key, Any], Any]] = {
    "text": _read_text,
    "code": _read_code,
    "number": _read_number,
    "whole": _read_whole,
    "flag": _read_flag,
    "flag_or_number": _read_flag_or_number,
    "choice": _read_choice,
    "time": _read_time,
    "date": _read_date,
    "moment": _read_moment,
    "timezone": _read_timezone,
    "formula": _read_formula,
    "dose_basis": _read_dose_basis,
    "refs": _read_refs,
    "words": _read_words,
    "weekdays": _read_weekdays,
    "due": _read_due,
    "points": _read_points,
    "tell": _read_tell,
    "need": _read_need,
}
