"""Forms of the month's page: explaining and preparing, certifying, checking a file."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from django import forms

from plant.reports.checklist import Hindrance

LARGEST_PDF = 20 * 1024 * 1024


def _password() -> forms.CharField:
    return forms.CharField(
        label="Your password, as your signature",
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "current-password"}),
    )


class PrepareForm(forms.Form):
    """One explanation for each thing that is neither mended nor explained yet, then the password."""

    def __init__(self, open_items: Iterable[Hindrance], *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.keys: dict[str, str] = {}
        for number, item in enumerate(open_items):
            name = f"explain_{number}"
            self.keys[name] = item.key
            self.fields[name] = forms.CharField(
                label=item.words, max_length=500, required=False, widget=forms.Textarea(attrs={"rows": 2})
            )
        self.fields["password"] = _password()

    @property
    def explanations(self) -> dict[str, str]:
        """By the key of what hinders."""
        return {key: self.cleaned_data.get(name, "") for name, key in self.keys.items()}


class CertifyForm(forms.Form):
    """The password; for a revision the reason as well."""

    def __init__(self, *args: Any, revision: bool, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        if revision:
            self.fields["reason"] = forms.CharField(
                label="Why this revision is made",
                max_length=500,
                help_text="It is printed in the revision.",
                widget=forms.Textarea(attrs={"rows": 2}),
            )
        self.fields["password"] = _password()


class CheckForm(forms.Form):
    """A PDF to be checked."""

    file = forms.FileField(
        label="The PDF",
        help_text="It is read and forgotten, not kept.",
        widget=forms.ClearableFileInput(attrs={"accept": "application/pdf"}),
    )

    def clean_file(self) -> Any:
        """Refuses what cannot be a report by its size."""
        file = self.cleaned_data["file"]
        if file.size > LARGEST_PDF:
            raise forms.ValidationError("This file is larger than any report here. Nothing was read.")
        return file
