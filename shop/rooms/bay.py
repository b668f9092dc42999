"""The Bay: the cars that come in, each with its owner and the bottle on it."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from shop.base.models import Shop
from shop.base.paging import page_of
from shop.base.permissions import BENCH, allow
from shop.cars.selectors import cars_in_use
from shop.people.models import User
from shop.rooms.jobs import going_on
from shop.rooms.selectors import bottles_on_cars


@allow(BENCH, room="bay")
def bay(request: HttpRequest) -> HttpResponse:
    """Cars in use in order of number."""
    page = page_of(request, cars_in_use())
    on = bottles_on_cars([car.pk for car in page], system=system_of(request))
    rows = [
        {
            "url": reverse("rooms:car", args=[car.pk]),
            "name": str(car),
            "owner": str(car.customer) if car.customer else "the shop",
            "engine": car.engine,
            "bottles": on.get(car.pk, []),
        }
        for car in page
    ]
    return render(request, "rooms/bay.html", {"page": page, "rows": rows, "going_on": going_on(request)})


def system_of(request: HttpRequest) -> str:
    """Return the units in which the person's pages speak."""
    user: User = request.user  # type: ignore[assignment]
    return user.units or Shop.objects.values_list("units", flat=True).get()
