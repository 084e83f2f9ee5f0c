"""The forms for one delivery and one transfer. What they hold is read like a line of a file."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from typing import Any

from django import forms

from plant.intake import deliveries
from plant.works import kinds
from plant.works.stated import Stated

_BASES = {
    "": "as the product is stated",
    "g_per_L_available_chlorine": "g/L available chlorine",
    "trade_pct": "trade %",
    "weight_pct_available_chlorine": "weight % available chlorine",
    "weight_pct": "weight %",
}


def _moment() -> forms.CharField:
    return forms.CharField(label="When", widget=forms.TextInput(attrs={"type": "datetime-local"}), max_length=40)


def _number(label: str, *, required: bool = False, hint: str = "") -> forms.CharField:
    widget = forms.TextInput(attrs={"inputmode": "decimal", "autocomplete": "off"})
    return forms.CharField(label=label, required=required, widget=widget, max_length=40, help_text=hint)


def _vessels(stated: Stated, at: dt.datetime) -> list[tuple[str, str]]:
    return [("", "choose"), *((item.code, f"{item.name} ({item.code}), holds {item.product}") for item in stated.vessels(at))]


def _products(stated: Stated, at: dt.datetime) -> list[tuple[str, str]]:
    return [("", "choose"), *((item.code, f"{item.name} ({item.code})") for item in stated.products(at))]


class _Movement(forms.Form):
    """What both have in common: cells by the names of the file's columns."""

    columns: tuple[str, ...] = ()
    chosen: dict[str, Callable[[Stated, dt.datetime], list[tuple[str, str]]]] = {}

    def __init__(self, *args: Any, stated: Stated, at: dt.datetime, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        for name, choices in self.chosen.items():
            self.fields[name].choices = choices(stated, at)  # type: ignore[attr-defined]  # a ChoiceField

    def cells(self) -> dict[str, str]:
        """The line a file would have. Only for a valid form."""
        out = {name: str(self.cleaned_data.get(name) or "") for name in self.columns}
        return out | {"timestamp": self.cleaned_data["timestamp"]}

    def typed(self) -> dict[str, str]:
        """The same line from what was typed, valid or not."""
        return {name: str(self.data.get(name) or "").strip() for name in self.columns}

    def refuse(self, column: str, said: str) -> None:
        """Puts a refusal under the field it belongs to."""
        self.add_error(column if column in self.fields else None, said)


class DeliveryForm(_Movement):
    """A load into one vessel."""

    columns = (*deliveries.REQUIRED, *deliveries.OPTIONAL)
    chosen = {"vessel": _vessels, "product": _products}

    timestamp = _moment()
    vessel = forms.ChoiceField(label="Into")
    product = forms.ChoiceField(label="Product, as the papers and the label say")
    quantity = _number("Quantity", required=True)
    unit = forms.ChoiceField(label="Unit", choices=[(name, name) for name in deliveries.UNITS])
    lot = forms.CharField(label="Lot", required=False, max_length=60)
    strength = _number("Strength on the certificate")
    strength_basis = forms.ChoiceField(
        label="Basis of the strength", required=False, choices=[(name, _BASES[name]) for name in ("", *kinds.STRENGTH_BASES)]
    )
    density_kg_per_L = _number("Density, kg/L")
    manufactured_on = forms.DateField(
        label="Made on", required=False, widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d")
    )
    supplier = forms.CharField(label="Supplier", required=False, max_length=80)
    document = forms.CharField(label="Delivery note", required=False, max_length=120)
    cost = _number("Cost")
    currency = forms.CharField(label="Currency", required=False, max_length=8)
    order = forms.ChoiceField(label="Of which order", required=False)
    level_before = _number("Level before, m (weight, kg)", hint="With the level after: held against the papers.")
    level_after = _number("Level after, m (weight, kg)")
    certificate = forms.FileField(label="Certificate (PDF or photo)", required=False)
    second_person = forms.CharField(label="Second person at the fill point", required=False, max_length=80)
    quarantine = forms.BooleanField(label="Quarantine: the vessel stays out of service until it is accepted", required=False)
    accepted_because = forms.CharField(label="Accepted outside its terms, because", required=False, max_length=400)
    others_locked = forms.BooleanField(
        label="The fill point of this vessel is unlocked, and the caps of all others are locked",
        required=False,
        error_messages={"required": "Look at every other fill point: each must be locked."},
    )
    checked = forms.BooleanField(
        label="We have done these checks, two of us",
        required=False,
        error_messages={"required": "Do the checks before connecting, then tick this."},
    )

    def __init__(self, *args: Any, orders: Sequence[tuple[str, str]] = (), may_accept: bool = False, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["order"].choices = [("", "none"), *orders]  # type: ignore[attr-defined]  # a ChoiceField
        if not orders:
            del self.fields["order"]
        if not may_accept:
            del self.fields["accepted_because"]

    def clean(self) -> dict[str, Any]:
        """One level alone says nothing."""
        given = super().clean() or self.cleaned_data
        if bool(given.get("level_before")) != bool(given.get("level_after")):
            self.add_error("level_after", "Give the level before and the level after, or neither.")
        return given


class TransferForm(_Movement):
    """Product from one vessel into another."""

    columns = ("from_vessel", "to_vessel", "quantity", "unit", "carrier_water_L", "note")
    chosen = {"from_vessel": _vessels, "to_vessel": _vessels}

    timestamp = _moment()
    from_vessel = forms.ChoiceField(label="From")
    to_vessel = forms.ChoiceField(label="Into")
    quantity = _number("Quantity of product", required=True)
    unit = forms.ChoiceField(label="Unit", choices=[(name, name) for name in deliveries.UNITS], initial="L")
    carrier_water_L = _number("Dilution water added, L", hint="Counted apart: 200 L of a 1:4 make-up are 40 L of product.")
    note = forms.CharField(label="Note", required=False, widget=forms.Textarea(attrs={"rows": 2}), max_length=1000)


class OrderForm(forms.Form):
    """A load that has been ordered."""

    product = forms.ChoiceField(label="Product")
    quantity_kg = forms.FloatField(label="Quantity, kg", min_value=0.001, max_value=1e7)
    ordered_on = forms.DateField(label="Ordered on", widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d"))
    expected_on = forms.DateField(label="Expected on", widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d"))
    supplier = forms.CharField(label="Supplier", required=False, max_length=80)
    reference = forms.CharField(label="Order number", required=False, max_length=80)

    def __init__(self, *args: Any, stated: Stated, at: dt.datetime, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["product"].choices = _products(stated, at)  # type: ignore[attr-defined]  # a ChoiceField

    def clean(self) -> dict[str, Any]:
        """Nothing comes before it is ordered."""
        given = super().clean() or self.cleaned_data
        if given.get("ordered_on") and given.get("expected_on") and given["expected_on"] < given["ordered_on"]:
            self.add_error("expected_on", "Not before the day it was ordered.")
        return given
