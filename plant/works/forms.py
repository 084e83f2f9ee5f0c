"""Forms of the settings pages, made from the tables of kinds.py."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django import forms

from plant import clock
from plant.works import access, blocks, kinds, load, words
from plant.works.stated import Stated

_LISTS = ("refs", "weekdays")
_AREAS = ("points", "tell", "need")


class ChangeForm(forms.Form):
    """One statement: its keys, from when, and why.

    ``value`` after a valid form is what is to be stated; ``effective_from`` an instant.
    """

    effective_from = forms.DateTimeField(
        label="In force from",
        help_text="The works’ own time. A time in the past changes the figures of the days since.",
        widget=forms.DateTimeInput(attrs={"type": "datetime-local"}, format="%Y-%m-%dT%H:%M"),
        input_formats=["%Y-%m-%dT%H:%M", "%Y-%m-%dT%H:%M:%S", "%Y-%m-%d %H:%M"],
    )
    reason = forms.CharField(label="Why", max_length=400, help_text="It stands beside the setting for good.")
    seen = forms.CharField(required=False, widget=forms.HiddenInput)

    def __init__(
        self,
        *args: Any,
        kind: str,
        stated: Stated,
        now: dt.datetime,
        new: bool = False,
        value: dict[str, Any] | None = None,
        **kwargs: Any,
    ) -> None:
        self.kind, self.stated, self.now, self.new = kinds.KINDS[kind], stated, now, new
        self.calendar: clock.Calendar = stated.calendar(now)
        self.value: dict[str, Any] = {}
        self.subject = ""
        initial = {"effective_from": self.calendar.local(now).strftime("%Y-%m-%dT%H:%M")}
        initial |= {key.name: words.typed(key, (value or {}).get(key.name)) for key in self._keys()}
        kwargs["initial"] = initial | kwargs.get("initial", {})
        super().__init__(*args, **kwargs)
        fields = {}
        if new and not self.kind.kept:
            fields = {f"named_{name}": self._naming(name) for name in self._names()}
        fields |= {key.name: self._field(key) for key in self._keys()}
        self.fields = fields | self.fields
        if "effective_from" in self.fields:
            self.fields["effective_from"].widget.attrs["step"] = "60"

    def _names(self) -> tuple[str, ...]:
        return self.kind.names

    def _keys(self) -> list[kinds.Key]:
        keys = list(self.kind.keys)
        for extra in self.kind.extra.values():
            keys += [key for key in extra if key.name not in {item.name for item in keys}]
        if self.kind.kept and not self.new:
            keys = [key for key in keys if key.name not in self.kind.names]
        return keys

    def _naming(self, name: str) -> forms.Field:
        if self.kind.name in ("design_dose", "opening_stock"):
            return forms.ChoiceField(label=words.label(name), choices=self._codes(name, empty=False))
        if self.kind.name == "state":
            required = False
            choices = [("", "–"), (self._works_code(), "the works itself")] if name == "works" else self._codes(name)
            return forms.ChoiceField(label=words.label(name), choices=choices, required=required)
        return forms.CharField(label=words.label(name), max_length=40, help_text="It can’t be changed later.")

    def _works_code(self) -> str:
        return self.stated.works(self.now).code

    def _codes(self, kind: str, empty: bool = True) -> list[tuple[str, str]]:
        found = [(code, f"{code}, {value['name']}" if value.get("name") else code) for code, value in self._in_force(kind)]
        return [("", "–"), *found] if empty else found

    def _in_force(self, kind: str) -> list[tuple[str, dict[str, Any]]]:
        if kind == "site":
            return [item for site in kinds.SITES for item in self.stated.in_force(site, self.now)]
        return list(self.stated.in_force(kind, self.now))

    def _field(self, key: kinds.Key) -> forms.Field:
        # A key that only one shape or kind needs is asked for by the block's own check.
        always = {item.name for item in self.kind.keys}
        common: dict[str, Any] = {
            "label": words.label(key.name),
            "help_text": key.help,
            "required": key.required and key.name in always,
        }
        if key.holds in _LISTS:
            choices = (
                [(day, day) for day in kinds.WEEKDAYS] if key.holds == "weekdays" else self._codes(key.refers, empty=False)
            )
            return forms.MultipleChoiceField(widget=forms.CheckboxSelectMultiple, choices=choices, **common)
        if key.holds == "choice":
            return forms.ChoiceField(
                choices=[("", "–"), *((item, words.shown(item, "kind")) for item in key.choices)], **common
            )
        if key.holds == "flag":
            return forms.ChoiceField(choices=[("", "–"), ("yes", "yes"), ("no", "no")], **common)
        if key.holds == "code" and key.refers:
            return forms.ChoiceField(choices=self._codes(key.refers), **common)
        if key.holds in _AREAS:
            example = {
                "points": "a pair a line, e.g. 0.5 120",
                "tell": "one a line, e.g. Regulator, drinking water desk; 24",
                "need": 'lines such as model = "target_ph" and target_ph = 8.2',
            }[key.holds]
            common["help_text"] = f"{key.help}; {example}" if key.help else example
            return forms.CharField(widget=forms.Textarea(attrs={"rows": 4}), **common)
        attrs = {"inputmode": "decimal"} if key.holds in ("number", "whole") else {}
        return forms.CharField(widget=forms.TextInput(attrs=attrs), max_length=400, **common)

    def clean_effective_from(self) -> dt.datetime:
        """The instant the typed local time names."""
        typed: dt.datetime = self.cleaned_data["effective_from"].replace(tzinfo=None)
        try:
            return self.calendar.instant(typed)
        except clock.LocalTimeError as problem:
            raise forms.ValidationError(str(problem)) from None

    def clean(self) -> dict[str, Any]:
        data: dict[str, Any] = super().clean() or {}
        value = {}
        for key in self._keys():
            if key.name not in data:
                continue
            try:
                found = words.read(key, data[key.name])
            except words.NotReadable as problem:
                self.add_error(key.name, str(problem))
            else:
                if found is not None:
                    value[key.name] = found
        if self.errors:
            return data
        if self.kind.name == "limit":
            load.own_digits(value)
        for key in self._keys():
            if key.holds == "moment" and isinstance(value.get(key.name), str):
                self._moment(key.name, value)
        if self.kind.kept and not self.new:
            value |= dict(zip(self.kind.names, self.subject.split(":"), strict=True))
        self.value = value
        if self.new:
            self._name_it(data)
        return data

    def _moment(self, name: str, value: dict[str, Any]) -> None:
        try:
            found = dt.datetime.fromisoformat(value[name])
            value[name] = self.calendar.instant(found) if found.tzinfo is None else found
        except ValueError as problem:
            self.add_error(name, str(problem))

    def _name_it(self, data: dict[str, Any]) -> None:
        if self.kind.kept:
            self.subject = ":".join(str(self.value[name]) for name in self.kind.names)
            return
        named = {name: data[f"named_{name}"] for name in self.kind.names if data.get(f"named_{name}")}
        try:
            self.subject, _ = blocks.subject_of(self.kind.name, named)
        except blocks.BlockError as problem:
            self.add_error(None, str(problem))
            return
        if self.stated.value(self.kind.name, self.subject, self.now) is not None:
            self.add_error(None, f"{self.subject} is stated already: change it instead")

    def refuse(self, messages: list[str]) -> None:
        """Puts what the whole picture says beside the field it is about."""
        for message in messages:
            name = message.partition(":")[0].removeprefix("key ").split(" ")[0]
            self.add_error(name if name in self.fields else None, message)


class WithdrawForm(ChangeForm):
    """Withdraws a setting: only from when, and why."""

    def _keys(self) -> list[kinds.Key]:
        return []


class FileForm(forms.Form):
    """A works file, and from when its undated blocks hold."""

    file = forms.FileField(label="Works file (TOML)")
    effective_from = forms.DateTimeField(
        label="Blocks without a date hold from",
        required=False,
        help_text="The works’ own time; left empty: now, and at the first load from the beginning.",
        widget=forms.DateTimeInput(attrs={"type": "datetime-local"}, format="%Y-%m-%dT%H:%M"),
        input_formats=["%Y-%m-%dT%H:%M", "%Y-%m-%dT%H:%M:%S"],
    )
    reason = forms.CharField(label="Why", max_length=400, required=False, help_text="For blocks that don’t say it themselves.")

    def clean_file(self) -> Any:
        file = self.cleaned_data["file"]
        if file.size > load.MOST_BYTES:
            raise forms.ValidationError(f"The file is larger than {load.MOST_BYTES // 1024**2} MB: it is no works file.")
        return file


class MemberForm(forms.Form):
    """A person's role at a works."""

    role = forms.ChoiceField(choices=[(role, role) for role in access.ROLES])
    may_prepare = forms.BooleanField(label="May sign reports as prepared", required=False)
    may_certify = forms.BooleanField(label="May certify reports", required=False)
    licence_number = forms.CharField(max_length=40, required=False)
    licence_class = forms.CharField(max_length=40, required=False)
    reason = forms.CharField(label="Why", max_length=400)


class NewPersonForm(MemberForm):
    """A person who is new here, or new altogether."""

    username = forms.RegexField(
        regex=r"^[\w.@+-]{1,150}$",
        label="Sign-in name",
        help_text="Somebody who has one already keeps name and password; for a new name a password is made.",
        widget=forms.TextInput(attrs={"autocapitalize": "none", "autocomplete": "off"}),
    )
    full_name = forms.CharField(
        label="Full name", max_length=150, required=False, help_text="As it is printed; for a new person."
    )
    field_order = ("username", "full_name")
