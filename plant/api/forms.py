"""The form for a new token."""

from django import forms

from plant.api.scopes import SCOPES


class TokenForm(forms.Form):
    """Which device, and what it may do."""

    name = forms.CharField(
        label="Name of the device",
        max_length=40,
        help_text="Such as the control system or the laboratory. It stands beside what it sends.",
    )
    scopes = forms.MultipleChoiceField(
        label="What it may do", choices=list(SCOPES.items()), widget=forms.CheckboxSelectMultiple
    )
