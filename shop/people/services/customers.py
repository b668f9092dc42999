"""Keep the book of customers, and their word on what may be done."""

from __future__ import annotations

import uuid
from datetime import date

from shop.base import acts
from shop.base.errors import NotReady, Refusal
from shop.people.models import Consent, Customer, User

SECRET = frozenset({"name", "phone", "email", "note"})


def add_customer(
    *, person: User, key: uuid.UUID, name: str, phone: str = "", email: str = "", note: str = ""
) -> Customer:
    """Write a customer into the book."""
    new = Customer(name=name, phone=phone, email=email, note=note)
    new.clean_fields(exclude={"erased_at"})
    with acts.begin(key=key, person=person, code="customer.added", subject="customer"):
        new.save(force_insert=True)
    return new


def change_customer(
    *, person: User, key: uuid.UUID, customer: Customer, version: int, name: str, phone: str, email: str, note: str
) -> None:
    """Change what is written of a customer; raises Stale where someone else did meanwhile."""
    values = {"name": name, "phone": phone, "email": email, "note": note}
    with acts.begin(
        key=key,
        person=person,
        code="customer.changed",
        subject=f"customer:{customer.pk}",
        changes=acts.changed(customer, values, secret=SECRET),
    ):
        _refuse_erased(customer)
        acts.update_master(customer, version=version, values=values)


def record_consent(
    *, person: User, key: uuid.UUID, customer: Customer, purpose: str, given: bool, on: date, today: date, how: str = ""
) -> Consent:
    """Write down a customer's word, given or withdrawn; the latest for a purpose holds."""
    if on > today:
        raise Refusal("This day is still to come. Give the day on which it was said.", code="in the future", field="on")
    with acts.begin(
        key=key, person=person, code=f"consent.{'given' if given else 'withdrawn'}", subject=f"customer:{customer.pk}"
    ) as act:
        _refuse_erased(customer)
        return Consent.objects.create(act=act, customer=customer, purpose=purpose, given=given, on=on, how=how)


def _refuse_erased(customer: Customer) -> None:
    if Customer.objects.filter(pk=customer.pk, erased_at__isnull=False).exists():
        raise NotReady("This customer was erased from the book: nothing more is written of them.", code="erased")
