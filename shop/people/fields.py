"""Form fields that name a person or a customer."""

from __future__ import annotations

import re
from typing import Any

from django import forms
from django.core.exceptions import ValidationError
from django.template.loader import render_to_string
from django.utils.html import format_html
from django.utils.safestring import SafeString

from shop.people.models import Customer
from shop.people.selectors import customers_starting, folded

OFFERED = 200  # names that a browser is given to choose from; the others are found by typing


class ChosenCustomer(forms.TextInput):
    """A text field with names to choose from."""

    def render(self, name: str, value: Any, attrs: dict[str, Any] | None = None, renderer: Any = None) -> SafeString:
        attrs = attrs or {}
        list_id = f"{attrs.get('id', name)}_names"
        latest = Customer.objects.filter(erased_at__isnull=True).order_by("-pk").values_list("name", "pk")[:OFFERED]
        offered = [written(name, pk) for name, pk in sorted(latest)]
        field = super().render(name, value, attrs | {"list": list_id}, renderer)
        names = render_to_string("people/_customer_names.html", {"list_id": list_id, "offered": offered})
        return format_html("{}{}", field, names)


class CustomerField(forms.CharField):
    """A customer, by name as one writes it; cleans to a Customer, or None.

    Two of one name are told apart by the number that the field offers behind the name.
    """

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("widget", ChosenCustomer(attrs={"autocomplete": "off"}))
        super().__init__(max_length=140, **kwargs)

    def prepare_value(self, value: Any) -> Any:
        return written(value.name, value.pk) if isinstance(value, Customer) else value

    def clean(self, value: Any) -> Any:
        text = super().clean(value)
        if not text:
            return None
        numbered = re.fullmatch(r"(.*\S)\s+#(\d{1,18})", text)
        if numbered:
            chosen = Customer.objects.filter(pk=int(numbered[2]), erased_at__isnull=True).first()
            if chosen is not None and chosen.name == numbered[1]:
                return chosen
            text = numbered[1]
        found = list(customers_starting(text)[:6])
        same = [one for one in found if folded(one.name) == folded(text)]
        if len(same) == 1:
            return same[0]
        if not same and len(found) == 1:
            return found[0]
        if found:
            names = "; ".join(written(one.name, one.pk) for one in (same or found)[:5])
            raise ValidationError(
                f"More than one customer could be meant. Write one of these: {names}.", code="several"
            )
        raise ValidationError(
            f"No customer is called “{text[:60]}”. Add the customer first, or write the name as it stands in the book.",
            code="unknown",
        )


def written(name: str, pk: int) -> str:
    """Return a customer's name as the field offers it."""
    return f"{name} #{pk}"
