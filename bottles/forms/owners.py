"""Whose a bottle is."""

from __future__ import annotations

from typing import Any

from django import forms
from django.urls import reverse
from django.utils.html import format_html

from bottles.forms.parts import RegisterForm, day, text
from bottles.models import Ownership
from bottles.services.owners import Owner
from shop.people.fields import CustomerField

KINDS = [("customer", "a customer's"), ("shop", "the shop's"), ("supplier", "the supplier's: swapped, never filled here")]


class OwnerFields(RegisterForm):
    """The shop, a customer by name, or the supplier by name."""

    owner = forms.ChoiceField(
        label="Whose it is",
        choices=KINDS,
        widget=forms.RadioSelect,
        error_messages={"required": "Say whose it is: only its owner's word lets it be filled."},
    )
    customer = CustomerField(label="Customer", required=False, help_text="If it's a customer's: a part of the name, or pick one.")
    supplier = text("Supplier", 120, help_text="If it's the supplier's: the name on its label.")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        customer: Any = self.fields["customer"]
        # In a tab of its own: what was typed here stays.
        customer.help_text = format_html(
            '{} <a href="{}" target="_blank" rel="noopener">Add a new customer</a> (opens beside this).',
            customer.help_text, reverse("people:customer_new"),
        )  # fmt: skip
        for name in ("customer", "supplier"):
            self.fields[name].depends = True  # type: ignore[attr-defined]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        kind = cleaned.get("owner")
        if kind == "customer" and not cleaned.get("customer") and "customer" not in self.errors:
            self.add_error("customer", forms.ValidationError("Say which customer's it is.", code="no customer"))
        if kind == "supplier" and not cleaned.get("supplier") and "supplier" not in self.errors:
            self.add_error("supplier", forms.ValidationError("Say which supplier's it is.", code="no supplier"))
        return cleaned

    def new_owner(self) -> Owner:
        """The owner that was chosen."""
        data = self.cleaned_data
        return Owner(kind=data["owner"], customer=data.get("customer"), supplier=data.get("supplier") or "")


class OwnerForm(OwnerFields):
    """A new owner, from a day on."""

    since = day("Theirs since")


def owner_typed(ownership: Ownership | None) -> dict[str, Any]:
    """What the fields hold for the owner in force."""
    if ownership is None:
        return {}
    return {"owner": ownership.kind, "customer": ownership.customer, "supplier": ownership.supplier}
