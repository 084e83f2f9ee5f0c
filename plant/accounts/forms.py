"""Forms about the person: signing in, a new password."""

from __future__ import annotations

from typing import Any

from django.contrib.auth import forms as auth_forms


class SignInForm(auth_forms.AuthenticationForm):
    """Name and password. The answer to a wrong pair never says which of the two was wrong."""

    error_messages = {
        "invalid_login": "This name and password do not go together. Nothing is signed in; type both again.",
        "inactive": "This account is closed. Ask the administrator of your works.",
    }

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["username"].label = "Name"
        self.fields["username"].widget.attrs |= {"autocapitalize": "none", "spellcheck": "false"}


class PasswordForm(auth_forms.PasswordChangeForm):
    """The old password, and the new one twice."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["old_password"].label = "Password now"
        self.fields["new_password1"].label = "New password"
        self.fields["new_password2"].label = "New password again"
        self.fields["new_password1"].help_text = "At least ten characters, not all figures, and not a common word."
        self.fields["new_password2"].help_text = ""
