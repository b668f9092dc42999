"""What is typed about customers."""

from __future__ import annotations

from datetime import date
from typing import Any

from django import forms

from shop.people.acting import ActForm
from shop.people.models import Consent


class CustomerForm(ActForm):
    """A customer's name and how to reach them."""

    name = forms.CharField(max_length=120, error_messages={"required": "Write the customer's name."})
    phone = forms.CharField(
        required=False, max_length=40, widget=forms.TextInput(attrs={"type": "tel", "autocomplete": "off"})
    )
    email = forms.EmailField(
        label="E-mail",
        required=False,
        max_length=254,
        error_messages={"invalid": "This isn't an e-mail address. Write it as name@example.org, or leave it empty."},
    )
    note = forms.CharField(required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3}))


class ConsentForm(ActForm):
    """What a customer said, and when."""

    purpose = forms.ChoiceField(
        label="The shop may",
        choices=Consent.PURPOSES,
        widget=forms.RadioSelect,
        error_messages={"required": "Choose what was asked."},
    )
    given = forms.TypedChoiceField(
        label="The customer",
        choices=[("yes", "gives consent"), ("no", "withdraws it")],
        coerce=lambda word: word == "yes",
        empty_value=None,
        widget=forms.RadioSelect,
        error_messages={"required": "Choose what the customer said."},
    )
    on = forms.DateField(
        label="On",
        widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d"),
        error_messages={
            "required": "Give the day on which it was said.",
            "invalid": "This isn't a day. Write it as 2026-03-31.",
        },
    )
    how = forms.CharField(
        label="How",
        required=False,
        max_length=120,
        help_text="For instance: signed at the counter, by phone.",
    )

    def clean_on(self) -> Any:
        on: date = self.cleaned_data["on"]
        if on.year < 1990:
            raise forms.ValidationError("This is too long ago for a record here. Check the year.", code="too long ago")
        return on
