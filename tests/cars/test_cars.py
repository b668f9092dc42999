"""The book of cars: a number in a class once, an owner by name."""

from __future__ import annotations

import uuid
from collections.abc import Callable

import pytest
from django.test import Client

from shop.base.errors import Refusal, Stale
from shop.cars import selectors, services
from shop.cars.models import Car
from shop.people.models import User
from tests.factories import CarFactory, CustomerFactory

pytestmark = pytest.mark.django_db


def test_a_number_is_taken_once_in_its_class_among_cars_in_use(front_desk: User) -> None:
    first = services.add_car(person=front_desk, key=uuid.uuid4(), number="27a", car_class="Sprint")
    with pytest.raises(Refusal) as refused:
        services.add_car(person=front_desk, key=uuid.uuid4(), number="27A", car_class="sprint")
    assert refused.value.code == "car taken"
    services.add_car(person=front_desk, key=uuid.uuid4(), number="27A", car_class="Hill")
    services.change_car(person=front_desk, key=uuid.uuid4(), car=first, version=1, values={"active": False})
    second = services.add_car(person=front_desk, key=uuid.uuid4(), number="27A", car_class="Sprint")
    with pytest.raises(Refusal):
        services.change_car(person=front_desk, key=uuid.uuid4(), car=first, version=2, values={"active": True})
    assert second.active and not Car.objects.get(pk=first.pk).active


def test_a_car_changed_meanwhile_is_not_overwritten(front_desk: User) -> None:
    car = CarFactory(engine="2.0 L")
    services.change_car(person=front_desk, key=uuid.uuid4(), car=car, version=1, values={"engine": "2.2 L"})
    with pytest.raises(Stale) as stale:
        services.change_car(person=front_desk, key=uuid.uuid4(), car=car, version=1, values={"engine": "2.4 L"})
    assert stale.value.theirs == {"engine": "2.2 L"}


def test_a_car_is_added_from_its_owners_page_and_a_reload_adds_none(
    technician: User, client_of: Callable[..., Client]
) -> None:
    owner = CustomerFactory(name="Ostrander")
    client = client_of(technician)
    form = client.get(f"/cars/new?customer={owner.pk}").context["form"]
    assert form["customer"].value() == f"Ostrander #{owner.pk}"
    typed = {"form_key": str(uuid.uuid4()), "number": "27", "customer": form["customer"].value()}
    first = client.post("/cars/new", typed)
    car = Car.objects.get()
    assert first["Location"] == f"/cars/{car.pk}"
    assert car.customer == owner
    assert client.post("/cars/new", typed)["Location"] == f"/cars/{car.pk}"
    assert Car.objects.count() == 1


@pytest.mark.parametrize("asked", ["x", "99999999999999999999", "-1", "٢"])
def test_an_owner_that_is_not_there_leaves_the_field_empty(
    asked: str, technician: User, client_of: Callable[..., Client]
) -> None:
    page = client_of(technician).get("/cars/new", {"customer": asked})
    assert not page.context["form"]["customer"].value()


def test_a_taken_number_is_said_beside_the_number(technician: User, client_of: Callable[..., Client]) -> None:
    CarFactory(number="27", car_class="")
    answer = client_of(technician).post("/cars/new", {"form_key": str(uuid.uuid4()), "number": "27"})
    assert answer.status_code == 409
    assert answer.context["form"].has_error("number", "car taken")


def test_cars_stand_in_the_order_of_their_numbers(shop: object) -> None:
    for number in ("108", "9", "27a", "31"):
        CarFactory(number=number)
    assert [car.number for car in selectors.cars_in_use()] == ["9", "31", "108", "27a"]


def test_cars_are_found_by_number_class_description_and_owner(shop: object) -> None:
    car = CarFactory(
        number="27", car_class="Sprint", description="red coupe", customer=CustomerFactory(name="Ostrander")
    )
    CarFactory(number="31", car_class="Hill", description="blue")
    for text in ("27", "spri", "coupe", "ostr"):
        assert list(selectors.cars(text)) == [car]
    assert list(selectors.cars_starting("2")) == [car]
