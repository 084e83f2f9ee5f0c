"""A form made from a sheet's fields."""

from __future__ import annotations

from typing import Any

from django import forms

from plant.scene import numbers
from plant.sheets.sheet import Sheet


class Number(forms.FloatField):
    """A number with a decimal point or comma."""

    def to_python(self, value: Any) -> float | None:  # type: ignore[override]  # a float field is no integer field
        return super().to_python(value.replace(",", ".") if isinstance(value, str) else value)


def form_for(sheet: Sheet, data: Any, found: dict[str, str]) -> forms.Form:
    """The sheet's form; ``found`` says under a field which reading it was filled from."""
    fields: dict[str, forms.Field] = {}
    for field in sheet.fields:
        label = numbers.formula(f"{field.label}, {field.unit}" if field.unit else field.label)
        if field.choices:
            fields[field.name] = forms.ChoiceField(label=label, choices=field.choices)
        else:
            fields[field.name] = Number(
                label=label,
                required=not field.optional,
                help_text=found.get(field.name, field.hint),
                widget=forms.TextInput(attrs={"inputmode": "decimal"}),
            )
    return type("SheetForm", (forms.Form,), fields)(data)
