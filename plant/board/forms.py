"""What a list of readings is asked by."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django import forms

from plant.works import parameters
from plant.works.stated import Stated

LONGEST_DAYS = 400


class DayInput(forms.DateInput):
    input_type = "date"

    def __init__(self) -> None:
        super().__init__(format="%Y-%m-%d")


class ReadingsFilter(forms.Form):
    """Site, parameter, and the operating days from … to, both included."""

    site = forms.ChoiceField(required=False)
    parameter = forms.ChoiceField(required=False)
    first = forms.DateField(label="From day", widget=DayInput)
    last = forms.DateField(label="To day", widget=DayInput)

    def __init__(self, *args: Any, stated: Stated, now: dt.datetime, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        sites = [
            (item.code, item.name)
            for found in (stated.sample_points(now), stated.meters(now), stated.vessels(now), stated.dosing_points(now))
            for item in found
        ]
        self.fields["site"].choices = [("", "All"), *sites]  # type: ignore[attr-defined]
        known = parameters.known(stated, now).values()
        self.fields["parameter"].choices = [("", "All"), *((one.name, one.label) for one in known)]  # type: ignore[attr-defined]

    def clean(self) -> dict[str, Any]:
        clean = super().clean() or {}
        first, last = clean.get("first"), clean.get("last")
        if first and last and last < first:
            self.add_error("last", f"The last day lies before the first, {first}: nothing is shown. Give a later one.")
        elif first and last and (last - first).days > LONGEST_DAYS:
            self.add_error("last", f"At most {LONGEST_DAYS} days at once: nothing is shown. Give a shorter span.")
        return clean
