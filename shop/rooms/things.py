"""One customer, one car: each with what the other apps know of them."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import get_object_or_404, render

from shop.base.permissions import DESK, EVERYONE, allow
from shop.cars.models import Car
from shop.cars.selectors import cars_of
from shop.people import selectors as people
from shop.people.history import history_of
from shop.people.models import Customer
from shop.rooms.bay import system_of
from shop.rooms.selectors import bottles_of_customer, bottles_on_cars


@allow(EVERYONE)
def customer(request: HttpRequest, pk: int) -> HttpResponse:
    """A customer: how to reach them, what they said, their bottles and cars."""
    one = get_object_or_404(Customer, pk=pk)
    consents = [
        {
            "purpose": word.purpose,
            "words": word.words,
            "kind": {True: "yes", False: "no", None: "unknown"}[word.given],
            "state": {True: "given", False: "withdrawn", None: "not asked yet"}[word.given],
            "when": " · ".join(part for part in (word.on.isoformat() if word.on else "", word.how) if part),
        }
        for word in people.consents(one.pk)
    ]
    context = {
        "one": one,
        "consents": consents,
        "bottles": bottles_of_customer(one.pk, system=system_of(request)),
        "cars": list(cars_of(one.pk)),
        "acts": history_of(f"customer:{one.pk}"),
        "may_change": one.erased_at is None and bool(DESK & request.user.roles),  # type: ignore[union-attr]
    }
    return render(request, "rooms/customer.html", context)


@allow(EVERYONE)
def car(request: HttpRequest, pk: int) -> HttpResponse:
    """A car: its owner and engine, and the bottle that is on it now."""
    one = get_object_or_404(Car.objects.select_related("customer"), pk=pk)
    system = system_of(request)
    on = bottles_on_cars([one.pk], system=system).get(one.pk, [])
    owned = bottles_of_customer(one.customer_id, system=system) if one.customer_id else []
    context = {
        "one": one,
        "bottles": on,
        "others": [bottle for bottle in owned if bottle not in on],
        "acts": history_of(f"car:{one.pk}"),
    }
    return render(request, "rooms/car.html", context)
