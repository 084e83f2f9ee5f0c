"""Rows of a table as JSON lines, and back. The same rows always give the same bytes, whatever the database."""

from __future__ import annotations

import base64
import datetime as dt
import decimal
import hashlib
import json
import uuid
from collections.abc import Iterable, Iterator
from typing import IO, Any

from django.db import models
from django.db.models.fields.json import JSONField

BATCH = 1000


def kept_models(apps: Any) -> list[type[models.Model]]:
    """The models whose tables belong into a back-up, in a fixed order.

    Left out: sessions (a restored site starts with everybody signed out), what migrate fills by itself, and what is
    derived from the rest.
    """
    left_out = {"sessions.session", "dosing.daystate"}
    return sorted(
        (
            model
            for model in apps.get_models(include_auto_created=True)
            if model._meta.managed and not model._meta.proxy and model._meta.label_lower not in left_out
        ),
        key=lambda model: model._meta.label_lower,
    )


def columns(model: type[models.Model]) -> list[str]:
    """The attributes of a row that are saved."""
    return [field.attname for field in model._meta.concrete_fields]


def write(model: type[models.Model], names: list[str], using: str, out: IO[bytes]) -> tuple[int, str]:
    """All rows of a table in the order of their keys. Returns how many, and the SHA-256 of what was written."""
    digest, count = hashlib.sha256(), 0
    found = model._base_manager.using(using).order_by("pk").values_list(*names)
    for values in found.iterator(chunk_size=BATCH):
        line = json.dumps([_plain(value) for value in values], sort_keys=True, ensure_ascii=False, separators=(",", ":"))
        data = line.encode() + b"\n"
        digest.update(data)
        out.write(data)
        count += 1
    return count, digest.hexdigest()


def load(model: type[models.Model], names: list[str], lines: Iterable[bytes], using: str) -> int:
    """Adds rows written by `write`, a thousand at a time, into a model of the migrations' own. Returns how many."""
    fields = [model._meta.get_field(name) for name in _field_names(model, names)]
    for field in fields:
        # Libraries' tables have fields that fill themselves from the clock; here what was saved counts.
        for automatic in ("auto_now", "auto_now_add"):
            if getattr(field, automatic, False):
                setattr(field, automatic, False)
    count = 0
    for batch in _batches(lines):
        made = [
            model(**{name: _value(field, item) for name, field, item in zip(names, fields, json.loads(line), strict=True)})
            for line in batch
        ]
        model._base_manager.using(using).bulk_create(made, batch_size=BATCH)
        count += len(made)
    return count


def _field_names(model: type[models.Model], attributes: list[str]) -> list[str]:
    by_attribute = {field.attname: field.name for field in model._meta.concrete_fields}
    return [by_attribute[name] for name in attributes]


def _batches(lines: Iterable[bytes]) -> Iterator[list[bytes]]:
    batch: list[bytes] = []
    for line in lines:
        batch.append(line)
        if len(batch) == BATCH:
            yield batch
            batch = []
    if batch:
        yield batch


def _plain(value: Any) -> Any:
    if isinstance(value, dt.datetime):
        return value.astimezone(dt.UTC).isoformat(timespec="microseconds")
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, decimal.Decimal | uuid.UUID | dt.timedelta):
        return str(value)
    if isinstance(value, bytes | bytearray | memoryview):
        return base64.b64encode(bytes(value)).decode()
    return value


def _value(field: Any, item: Any) -> Any:
    if item is None or isinstance(field, JSONField):
        return item
    if isinstance(field, models.BinaryField):
        return base64.b64decode(item)
    return field.to_python(item)
