"""Reading cars."""

from __future__ import annotations

from django.db.models import Q, QuerySet
from django.db.models.functions import Length, Lower

from shop.cars.models import Car
from shop.people.selectors import begins, folded

# 9, 27, 108: shorter numbers come first, so that they stand as numbers do.
NUMBERED = (Length("number"), Lower("number"), Lower("car_class"), "pk")


def cars(text: str = "") -> QuerySet[Car]:
    """Cars in order of number, those in use first; with a text those that hold it."""
    found = Car.objects.select_related("customer")
    if text:
        found = found.filter(
            Q(number__icontains=text)
            | Q(car_class__icontains=text)
            | Q(description__icontains=text)
            | Q(customer__name__icontains=text)
        )
    return found.order_by("-active", *NUMBERED)


def cars_in_use() -> QuerySet[Car]:
    """Cars that come into the shop, in order of number."""
    return Car.objects.select_related("customer").filter(active=True).order_by(*NUMBERED)


def cars_starting(text: str) -> QuerySet[Car]:
    """Cars in use whose number begins so, found by the index of numbers."""
    found = Car.objects.select_related("customer").filter(active=True).alias(low=Lower("number"))
    return found.filter(begins("low", folded(text))).order_by("low", "pk")


def cars_of(customer_id: int) -> QuerySet[Car]:
    """The cars of a customer, those in use first."""
    return Car.objects.filter(customer_id=customer_id).order_by("-active", *NUMBERED)
