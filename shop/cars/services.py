"""Writing cars."""

from __future__ import annotations

import uuid
from typing import Any

from django.db.models.functions import Lower

from shop.base import acts
from shop.base.errors import Refusal
from shop.cars.models import Car
from shop.people.models import Customer, User
from shop.people.selectors import folded


def add_car(
    *, person: User, key: uuid.UUID, number: str, car_class: str = "", description: str = "", engine: str = "",
    customer: Customer | None = None,
) -> Car:  # fmt: skip
    """Write a car into the book; raises Refusal where its number is taken in its class."""
    new = Car(number=number, car_class=car_class, description=description, engine=engine, customer=customer)
    new.clean_fields()
    with acts.begin(key=key, person=person, code="car.added", subject="car", changes={"number": number}):
        _refuse_taken(number, car_class, None)
        new.save(force_insert=True)
    return new


def change_car(*, person: User, key: uuid.UUID, car: Car, version: int, values: dict[str, Any]) -> None:
    """Change what is written of a car.

    `values` names columns of Car. Raises Stale where someone else changed it meanwhile, Refusal
    where the number is taken.
    """
    with acts.begin(
        key=key, person=person, code="car.changed", subject=f"car:{car.pk}", changes=acts.changed(car, values)
    ):
        if values.get("active", car.active):
            _refuse_taken(values.get("number", car.number), values.get("car_class", car.car_class), car.pk)
        acts.update_master(car, version=version, values=values)


def _refuse_taken(number: str, car_class: str, own: int | None) -> None:
    others = Car.objects.filter(active=True)
    if own is not None:
        others = others.exclude(pk=own)
    taken = others.alias(low=Lower("number"), low_class=Lower("car_class")).filter(
        low=folded(number), low_class=folded(car_class)
    )
    if taken.exists():
        name = str(Car(number=number, car_class=car_class)).capitalize()
        raise Refusal(
            f"{name} is in the book already. Write its class too, or change that one.",
            code="car taken",
            field="number",
        )
