"""Reading people: who may sign in, whose bottles and cars, what they said."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

from django.db import connection
from django.db.models import Q, QuerySet
from django.db.models.functions import Lower

from shop.people.models import Consent, Customer, User


def people() -> QuerySet[User]:
    """Everyone who signs in or did, active ones first."""
    return User.objects.order_by("-is_active", Lower("name"), "pk")


def customers(text: str = "") -> QuerySet[Customer]:
    """Customers in order of name; with a text those whose name, phone or e-mail holds it."""
    found = Customer.objects.filter(erased_at__isnull=True)
    if text:
        found = found.filter(Q(name__icontains=text) | Q(phone__icontains=text) | Q(email__icontains=text))
    return found.order_by(Lower("name"), "pk")


def customers_starting(text: str) -> QuerySet[Customer]:
    """Customers whose name begins so, found by the index of names."""
    found = Customer.objects.filter(erased_at__isnull=True).alias(low=Lower("name"))
    return found.filter(begins("low", folded(text))).order_by("low", "pk")


def folded(text: str) -> str:
    """Return the text as the database's LOWER would write it: SQLite's knows only A to Z."""
    if connection.vendor == "sqlite":
        return "".join(c.lower() if c.isascii() else c for c in text)
    return text.lower()


def begins(field: str, start: str) -> Q:
    """Return the condition that a field begins so, in a way that each database's index can serve.

    SQLite's LIKE passes its indexes by, a range doesn't; in PostgreSQL a range follows the
    collation, so there it's LIKE.
    """
    if connection.vendor == "sqlite":
        return Q(**{f"{field}__gte": start, f"{field}__lt": start + "\U0010ffff"})
    return Q(**{f"{field}__startswith": start})


@dataclass(frozen=True, slots=True)
class Word:
    """What holds for one purpose: None where the customer was never asked."""

    purpose: str
    words: str
    given: bool | None
    on: date | None = None
    how: str = ""


def consents(customer_id: int) -> list[Word]:
    """What the customer said last, for every purpose."""
    latest: dict[str, Consent] = {}
    for consent in Consent.objects.filter(customer_id=customer_id).order_by("on", "id"):
        latest[consent.purpose] = consent
    return [
        Word(purpose, words, latest[purpose].given, latest[purpose].on, latest[purpose].how)
        if purpose in latest
        else Word(purpose, words, None)
        for purpose, words in Consent.PURPOSES
    ]


def has_consent(customer_id: int, purpose: str) -> bool | None:
    """Whether the customer consents now: yes, no (withdrawn), or None where never asked."""
    return (
        Consent.objects.filter(customer_id=customer_id, purpose=purpose)
        .order_by("-on", "-id")
        .values_list("given", flat=True)
        .first()
    )
