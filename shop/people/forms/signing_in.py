"""The form at the door."""

from __future__ import annotations

from django import forms


class SignInForm(forms.Form):
    """Name and password, and whether several people work at this machine."""

    name = forms.CharField(
        label="Name",
        max_length=120,
        widget=forms.TextInput(attrs={"autocomplete": "username", "autocapitalize": "off", "spellcheck": "false"}),
        error_messages={"required": "Type the name you sign in with."},
    )
    password = forms.CharField(
        max_length=200,
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "current-password"}),
        error_messages={"required": "Type your password."},
    )
    shared_counter = forms.BooleanField(
        label="This machine stays open at the counter",
        required=False,
        help_text="Whoever saves something here then gives their badge or short code, so that it's known who did it.",
    )
    next = forms.CharField(required=False, max_length=2000, widget=forms.HiddenInput)
    kept = forms.CharField(required=False, max_length=100_000, widget=forms.HiddenInput)

    use_required_attribute = False
