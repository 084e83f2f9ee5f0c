"""Tables of the board's pages. What is sorted is the number; what is shown are words in the works' units."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import django_tables2 as tables
from django.utils.html import format_html

NUM = {"td": {"class": "num"}, "th": {"class": "num"}}
WORDS = {"td": {"class": "words"}}
TEMPLATE = "components/datatable.html"


@dataclass(frozen=True)
class Cell:
    """What a column holds: the number to sort by (None: not known, below every number), the words to show, where they open."""

    key: Any
    words: str
    path: str = ""

    def __lt__(self, other: Cell) -> bool:
        if self.key is None or other.key is None:
            return self.key is None and other.key is not None
        return bool(self.key < other.key)


class Shown(tables.Column):
    """A column of cells."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        kwargs.setdefault("attrs", NUM)
        super().__init__(*args, **kwargs)

    def render(self, value: Cell) -> str:
        if not value.path:
            return value.words
        return format_html('<a class="trail" href="{}">{}</a>', value.path, value.words)


class StockTable(tables.Table):
    """One row a vessel."""

    vessel = tables.Column()
    book = Shown(verbose_name="Book")
    dip = Shown(verbose_name="Dip")
    difference = Shown(verbose_name="Difference")
    active = Shown(verbose_name="Active")
    usable = Shown(verbose_name="Usable active")
    strength = Shown(verbose_name="Strength now")
    remarks = tables.Column(orderable=False, attrs=WORDS, default="")

    class Meta:
        template_name = TEMPLATE
        attrs = {"class": "tight"}


class DoseTable(tables.Table):
    """One row an operating day."""

    day = Shown(verbose_name="Operating day", attrs={})
    volume = Shown(verbose_name="Water")
    product = Shown(verbose_name="Product")
    active = Shown(verbose_name="Active")
    used = Shown(verbose_name="Used")
    design = Shown(verbose_name="Design")
    need = Shown(verbose_name="Need")
    ratio = Shown(verbose_name="Used ÷ design")
    remarks = tables.Column(orderable=False, attrs=WORDS, default="")

    class Meta:
        template_name = TEMPLATE
        attrs = {"class": "tight"}
        row_attrs = {"class": lambda record: "corrected" if record["corrected"] else ""}


class ReadingTable(tables.Table):
    """One row a reading, corrections in the place of what they correct. On a phone each row folds into two lines."""

    at = Shown(verbose_name="Taken", attrs={"td": {"class": "nowrap fold-when"}})
    site = tables.Column(attrs={"td": {"class": "fold-where"}})
    parameter = tables.Column(attrs={"td": {"class": "fold-what"}})
    value = Shown(verbose_name="Value", attrs={"td": {"class": "num fold-value"}, "th": {"class": "num"}})
    remarks = tables.Column(orderable=False, attrs=WORDS, default="")

    class Meta:
        template_name = TEMPLATE
        attrs = {"class": "tight folds"}
        row_attrs = {"class": lambda record: "corrected" if record["corrected"] else ""}
