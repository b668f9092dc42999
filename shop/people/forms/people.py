"""What a manager types about a person, and everyone about themselves."""

from __future__ import annotations

from typing import Any

from django import forms

from shop.base.models import Shop
from shop.base.permissions import ROLE_WORDS, Role
from shop.people.acting import ActForm

CODE_HINT = "4 to 8 digits. Only its digest is kept: nobody can look it up, also not a manager."


def _new_password(label: str, hint: str = "") -> forms.CharField:
    return forms.CharField(
        label=label,
        max_length=200,
        strip=False,
        help_text=hint,
        widget=forms.PasswordInput(attrs={"autocomplete": "new-password"}),
        error_messages={"required": "Type a password."},
    )


def _own_password() -> forms.CharField:
    return forms.CharField(
        label="Your password now",
        max_length=200,
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "current-password"}),
        error_messages={"required": "Type your password, so that nobody else changes this for you."},
    )


def _code(label: str) -> forms.CharField:
    return forms.CharField(
        label=label,
        required=False,
        max_length=8,
        help_text=f"{CODE_HINT} Leave it empty to take the code away.",
        widget=forms.PasswordInput(attrs={"autocomplete": "off", "inputmode": "numeric"}),
    )


class PersonForm(ActForm):
    """Who someone is and what they may do."""

    name = forms.CharField(max_length=120, error_messages={"required": "Write the person's name."})
    sign_in = forms.CharField(
        label="Signs in as",
        max_length=60,
        help_text="Spaces become full stops, capitals don't count.",
        widget=forms.TextInput(attrs={"autocomplete": "off", "autocapitalize": "off", "spellcheck": "false"}),
        error_messages={"required": "Write a name to sign in with."},
    )
    roles = forms.TypedMultipleChoiceField(
        choices=[(role.value, word[0].upper() + word[1:]) for role, word in ROLE_WORDS.items()],
        coerce=Role,
        widget=forms.CheckboxSelectMultiple,
        help_text="One person may hold several.",
        error_messages={"required": "Give at least one role: without one, no page opens."},
    )


class NewPersonForm(PersonForm):
    """A person who is added."""

    password = _new_password("Password", "At least 8 characters. Tell it to the person; they can change it.")


class ChangePersonForm(PersonForm):
    """A person who is here already."""

    active = forms.BooleanField(label="May sign in", required=False)


class PasswordForm(ActForm):
    """A password that a manager gives."""

    new_password = _new_password(
        "New password", "At least 8 characters. Wherever the person is signed in, they are out."
    )


class BadgeForm(ActForm):
    """A badge that is scanned once to be known."""

    new_badge = forms.CharField(
        label="Badge",
        required=False,
        max_length=200,
        help_text="Scan it into this field. Leave it empty to take the badge away.",
        widget=forms.PasswordInput(attrs={"autocomplete": "off"}),
    )


class CodeForm(ActForm):
    """A short code that a manager gives."""

    new_code = _code("Short code")


class UnitsForm(ActForm):
    """The units of one's own pages."""

    SHOPS = "shop"

    units = forms.ChoiceField(widget=forms.RadioSelect, error_messages={"required": "Choose the units, or the shop's."})

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        shops = dict(Shop.UNITS)[self.shop.units]
        self.fields["units"].choices = [(self.SHOPS, f"the shop's ({shops})"), *Shop.UNITS]  # type: ignore[attr-defined]


class OwnPasswordForm(ActForm):
    """One's own password."""

    old_password = _own_password()
    new_password = _new_password("New password", "At least 8 characters.")
    again = _new_password("The new password again")

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        new, again = cleaned.get("new_password"), cleaned.get("again")
        if new and again and new != again:
            self.add_error(
                "again", forms.ValidationError("The two aren't alike. Type the new password again.", code="not alike")
            )
        return cleaned


class OwnCodeForm(ActForm):
    """One's own short code."""

    old_password = _own_password()
    new_code = _code("Short code")
