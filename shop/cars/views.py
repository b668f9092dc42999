"""The book of cars: the list, and what is recorded of one."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from shop.base.paging import page_of
from shop.base.permissions import EVERYONE, allow
from shop.cars import selectors, services
from shop.cars.forms import CarForm, ChangeCarForm
from shop.cars.models import Car
from shop.people.acting import ActView
from shop.people.models import Customer, User

LONGEST_SEARCH = 120


@allow(EVERYONE)
def cars(request: HttpRequest) -> HttpResponse:
    """Cars in order of number, or those that a text finds."""
    text = request.GET.get("q", "").replace("\0", "").strip()[:LONGEST_SEARCH]
    page = page_of(request, selectors.cars(text))
    rows = [
        {
            "url": reverse("rooms:car", args=[car.pk]),
            "number": car.number,
            "car_class": car.car_class,
            "description": car.description,
            "owner": str(car.customer) if car.customer else "the shop",
            "active": car.active,
        }
        for car in page
    ]
    return render(request, "cars/cars.html", {"page": page, "rows": rows, "query_text": text})


class CarNew(ActView):
    """Add a car."""

    roles = EVERYONE
    form_class = CarForm
    heading = "Add a car"
    submit = "Add"
    said = "Added."

    def initial(self) -> dict[str, Any]:
        asked = self.request.GET.get("customer", "")
        if not asked.isascii() or not asked.isdigit() or len(asked) > 18:
            return {}
        return {"customer": Customer.objects.filter(pk=int(asked), erased_at__isnull=True).first()}

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("cars:cars")}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        new = services.add_car(
            person=person, key=key, number=typed["number"], car_class=typed["car_class"],
            description=typed["description"], engine=typed["engine"], customer=typed["customer"],
        )  # fmt: skip
        return reverse("rooms:car", args=[new.pk])

    def first_page(self, act: Any) -> str:
        car = Car.objects.filter(number=act.changes.get("number", "")).order_by("-pk").first()
        return reverse("rooms:car", args=[car.pk]) if car else reverse("cars:cars")


class CarChange(ActView):
    """Change what is written of a car."""

    roles = EVERYONE
    form_class = ChangeCarForm
    car: Car

    def find(self, **kwargs: Any) -> None:
        found = Car.objects.select_related("customer").filter(pk=kwargs["pk"]).first()
        if found is None:
            raise Http404
        self.car = found

    def home(self) -> str:
        return reverse("rooms:car", args=[self.car.pk])

    def first_page(self, act: Any) -> str:
        return self.home()

    def context(self) -> dict[str, Any]:
        return {"back_url": self.home(), "heading": f"Change {self.car}"}

    def initial(self) -> dict[str, Any]:
        car = self.car
        return {
            "version": car.version,
            "number": car.number,
            "car_class": car.car_class,
            "description": car.description,
            "engine": car.engine,
            "customer": car.customer,
            "active": car.active,
        }

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        names = ("number", "car_class", "description", "engine", "customer", "active")
        services.change_car(
            person=person,
            key=key,
            car=self.car,
            version=typed["version"] or 0,
            values={name: typed[name] for name in names},
        )
        return self.home()
