"""What is typed about cars."""

from __future__ import annotations

from django import forms

from shop.people.acting import ActForm
from shop.people.fields import CustomerField


class CarForm(ActForm):
    """A car's number, class, owner and engine."""

    number = forms.CharField(
        max_length=12,
        help_text="As it stands on the car.",
        widget=forms.TextInput(attrs={"autocomplete": "off", "data-short": True}),
        error_messages={"required": "Write the number that the car carries."},
    )
    car_class = forms.CharField(label="Class", required=False, max_length=60)
    description = forms.CharField(required=False, max_length=120, help_text="What one sees: body, colour.")
    engine = forms.CharField(
        required=False, max_length=200, help_text="For instance: 2.0 L four, port injection, mapped ignition."
    )
    customer = CustomerField(label="Owner", required=False, help_text="A customer's name. Empty: the shop's own car.")


class ChangeCarForm(CarForm):
    """A car that is in the book already."""

    active = forms.BooleanField(label="Comes into the shop", required=False)
