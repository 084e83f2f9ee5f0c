"""Forms of a deviation's life, of the list's filters, and of a draft limit."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django import forms

from plant import clock
from plant.deviations import actions, words
from plant.works import blocks, kinds
from plant.works.stated import Stated

TRIAL_SPANS = [(31, "month"), (62, "2 months"), (92, "3 months"), (183, "6 months"), (366, "year"), (396, "13 months")]
"""How far back a draft limit may be tried: (days, the last ...)."""


class StepForm(forms.Form):
    """A step; its id makes a form that is sent twice one step."""

    client_id = forms.CharField(widget=forms.HiddenInput, max_length=64)


class NoteForm(StepForm):
    """A step with a remark, if anybody wants to make one."""

    note = forms.CharField(label="Remark", required=False, max_length=1000)


class CommentForm(StepForm):
    words = forms.CharField(label="Comment", max_length=2000, widget=forms.Textarea(attrs={"rows": 3}))


class TimedForm(StepForm):
    """A step that was taken at a time; an empty time is now."""

    at = forms.CharField(
        label="When", required=False, max_length=16, help_text="Local time, such as 2026-03-01 14:30; empty means now."
    )

    def __init__(self, *args: Any, calendar: clock.Calendar, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.calendar = calendar

    def clean_at(self) -> dt.datetime | None:
        text = self.cleaned_data["at"].strip()
        if not text:
            return None
        try:
            return self.calendar.instant(dt.datetime.fromisoformat(text), ambiguous="first")
        except ValueError as problem:
            raise forms.ValidationError(f"“{text}” is no time of the works: {problem}") from None


class TellForm(TimedForm):
    who = forms.CharField(label="Who was told", max_length=200)
    how = forms.ChoiceField(label="How", choices=[(how, how) for how in actions.HOW])
    reference = forms.CharField(label="Reference", required=False, max_length=200, help_text="Case number, name, e-mail.")
    field_order = ["who", "how", "at", "reference", "client_id"]


class ActForm(TimedForm):
    cause = forms.ChoiceField(label="Cause", required=False, choices=[("", "not known yet"), *words.CAUSES.items()])
    cause_words = forms.CharField(label="Cause in words", required=False, max_length=1000)
    action = forms.CharField(label="What was done", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3}))
    field_order = ["cause", "cause_words", "action", "at", "client_id"]


class FilterForm(forms.Form):
    """What the list shows."""

    which = forms.ChoiceField(
        label="Show", required=False, choices=[("open", "open"), ("approval", "awaiting approval"), ("days", "raised for days")]
    )
    level = forms.ChoiceField(
        label="Level",
        required=False,
        choices=[("", "any"), *((level, level) for level in ("regulatory", "action", "alert", "target"))],
    )
    kind = forms.ChoiceField(label="Kind", required=False, choices=[("", "any"), *words.KINDS.items()])
    first = forms.DateField(label="From", required=False, widget=forms.DateInput(attrs={"type": "date"}))
    last = forms.DateField(label="To", required=False, widget=forms.DateInput(attrs={"type": "date"}))


class DraftForm(forms.Form):
    """A limit to be tried on past days before it is stated."""

    kind = forms.ChoiceField(label="Kind", choices=[(kind, words.KINDS.get(kind, kind)) for kind in kinds.LIMIT_KINDS])
    subject = forms.ChoiceField(label="At")
    parameter = forms.CharField(label="Parameter", required=False, max_length=40)
    unit = forms.CharField(label="Unit", required=False, max_length=24)
    days = forms.TypedChoiceField(label="Over the last", coerce=int, choices=TRIAL_SPANS, initial=31)
    low = forms.FloatField(required=False)
    high = forms.FloatField(required=False)
    limit = forms.FloatField(required=False)
    hours = forms.FloatField(required=False)
    at_least_pct = forms.FloatField(label="At least %", required=False)
    months = forms.IntegerField(required=False)
    per_hour = forms.FloatField(label="Per hour", required=False)
    readings = forms.IntegerField(label="Readings in a row", required=False)
    pct = forms.FloatField(label="%", required=False)
    mean_days_between_false_alarms = forms.FloatField(label="Days between false alarms", required=False)
    sigmas = forms.FloatField(required=False)
    pct_below_certificate = forms.FloatField(label="% below certificate", required=False)

    HEAD = ("kind", "subject", "parameter", "unit", "days")

    def __init__(self, *args: Any, stated: Stated, now: dt.datetime, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["subject"].choices = [  # type: ignore[attr-defined]
            (f"{kind}:{code}", f"{value.get('name', code)}")
            for kind in ("sample_point", "dosing_point", "vessel", "meter")
            for code, value in stated.in_force(kind, now)
        ]

    def clean(self) -> dict[str, Any]:
        """Checked by the same schema as a stated limit; keys that the kind does not have are left out."""
        data = super().clean() or {}
        if self.errors:
            return data
        kind, _, code = data["subject"].partition(":")
        value: dict[str, Any] = {kind: code, "kind": data["kind"], "level": "alert"}
        value |= {name: data[name] for name in ("parameter", "unit") if data[name]}
        known = {key.name for key in kinds.LIMIT_KINDS[data["kind"]]}
        value |= {name: data[name] for name in known if data.get(name) is not None}
        try:
            data["value"] = blocks.check("limit", "draft", value)
        except blocks.BlockError as problem:
            for message in problem.messages:
                self.add_error(None, message)
        return data
