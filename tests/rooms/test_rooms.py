"""The rooms, and the pages about one customer and one car."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from shop.people.models import User
from shop.rooms.office import BOOKS
from tests.bottles.of_refill import Works
from tests.factories import (
    BottleFactory,
    CarFactory,
    ConditionFactory,
    CustomerFactory,
    PlaceFactory,
    owned,
    placed,
    weighed,
)

pytestmark = pytest.mark.django_db


def test_the_counter_has_the_scan_field_first_with_the_focus(
    front_desk: User, client_of: Callable[..., Client]
) -> None:
    html = client_of(front_desk).get("/counter").content.decode().split("<main")[1]
    field = html[html.index('id="scan-main"') :]
    assert "autofocus" in field[: field.index(">")]


def test_the_bay_shows_each_car_with_its_owner_and_the_bottle_on_it(
    technician: User, client_of: Callable[..., Client]
) -> None:
    car = CarFactory(number="27", car_class="", customer=CustomerFactory(name="Ostrander"))
    CarFactory(number="31", car_class="", customer=None)
    CarFactory(number="40", active=False)
    bottle = placed(BottleFactory(code="T-0412"), "car", car=car)
    weighed(bottle, gross_g=10_940, tare_g=6_420, error_g=28)
    technician.units = "metric"
    technician.save()
    rows = client_of(technician).get("/bay").context["rows"]
    assert [(row["name"], row["owner"]) for row in rows] == [("car 27", "Ostrander"), ("car 31", "the shop")]
    # 10.940 − 6.420 = 4.520 kg, on a scale that reads to 10 g; ±28 g shown no finer, rounded up
    on = rows[0]["bottles"][0]
    assert (on.code, on.holds, on.origin) == ("T-0412", "4.52 ±0.03 kg", "weighed")
    assert rows[1]["bottles"] == []


def test_a_bottle_that_left_the_car_is_not_on_it_any_more(technician: User, client_of: Callable[..., Client]) -> None:
    car = CarFactory()
    bottle = placed(BottleFactory(), "car", car=car)
    placed(bottle, "in", happened_at=timezone.now())
    assert client_of(technician).get("/bay").context["rows"][0]["bottles"] == []


def test_the_bay_asks_as_little_of_the_database_for_many_cars_as_for_few(
    technician: User, client_of: Callable[..., Client], django_assert_num_queries: Any
) -> None:
    client = client_of(technician)
    for size in (2, 12):
        for _ in range(size):
            weighed(placed(BottleFactory(), "car", car=CarFactory()), gross_g=10_000, tare_g=6_000)
        with django_assert_num_queries(8):
            client.get("/bay")


def test_the_office_leads_to_every_book_that_there_is(manager: User, client_of: Callable[..., Client]) -> None:
    client = client_of(manager)
    groups = client.get("/office").context["groups"]
    links = [link["url"] for group in groups for link in group["links"]]
    assert {"/customers", "/cars", "/people", "/settings", "/policies", "/places"} <= set(links)
    assert len(links) <= sum(len(entries) for _, entries in BOOKS)
    for link in links:
        assert client.get(link).status_code == 200, link


def test_a_customers_page_shows_bottles_cars_and_words(front_desk: User, client_of: Callable[..., Client]) -> None:
    one = CustomerFactory(name="Ostrander")
    here = placed(owned(BottleFactory(code="T-0412"), one), "in", place=PlaceFactory(name="rack B"))
    sold = owned(BottleFactory(code="T-0499"), one)
    owned(sold, CustomerFactory(name="Verhoeven"))
    CarFactory(number="27", car_class="", customer=one)
    page = client_of(front_desk).get(f"/customers/{one.pk}")
    rows = page.context["bottles"]
    assert [(row.code, row.where) for row in rows] == [(here.code, "here: rack B")]
    assert rows[0].holds == "unknown: never weighed"  # never nought
    assert [str(car) for car in page.context["cars"]] == ["car 27"]
    assert {word["state"] for word in page.context["consents"]} == {"not asked yet"}


def test_an_erased_customers_page_has_no_name_and_nothing_to_change(
    front_desk: User, client_of: Callable[..., Client]
) -> None:
    one = CustomerFactory(name="", erased_at=timezone.now())
    page = client_of(front_desk).get(f"/customers/{one.pk}")
    assert page.status_code == 200 and b"erased customer" in page.content
    assert client_of(front_desk).get(f"/customers/{one.pk}/change").status_code == 404


def test_a_technician_reads_a_customer_but_changes_nothing(technician: User, client_of: Callable[..., Client]) -> None:
    one = CustomerFactory()
    page = client_of(technician).get(f"/customers/{one.pk}")
    assert page.status_code == 200 and b"/change" not in page.content
    assert client_of(technician).get(f"/customers/{one.pk}/change").status_code == 403


def test_a_cars_page_shows_what_is_on_it_and_its_owners_other_bottles(
    technician: User, client_of: Callable[..., Client]
) -> None:
    owner = CustomerFactory()
    car = CarFactory(customer=owner)
    on = placed(owned(BottleFactory(), owner), "car", car=car)
    other = placed(owned(BottleFactory(), owner), "car", car=CarFactory(number="31", car_class=""))
    page = client_of(technician).get(f"/cars/{car.pk}")
    assert [row.code for row in page.context["bottles"]] == [on.code]
    assert [(row.code, row.where) for row in page.context["others"]] == [(other.code, "on car 31")]
    assert client_of(technician).get("/cars/999999").status_code == 404


def test_a_bottle_that_was_filled_short_waits_to_be_handed_over(
    shop: Any, front_desk: User, client_of: Callable[..., Client]
) -> None:
    works = Works(shop, front_desk)
    placed(works.bottle, "moved", place=PlaceFactory(kind="counter"), wanted="refill", happened_at=timezone.now())
    refill = works.open()
    weigh = {"form_key": str(uuid.uuid4()), "gross": "10.2 kg", "line": "off", "ended_by": "flow ceased"}
    assert client_of(front_desk).post(reverse("bottles:refill", args=[refill.pk]), weigh).status_code == 302
    html = client_of(front_desk).get(reverse("rooms:counter")).content.decode()
    assert "Filled short, to hand over" in html


def test_a_supply_bottle_leads_with_whether_it_may_be_emptied(
    shop: Any, front_desk: User, client_of: Callable[..., Client]
) -> None:
    works = Works(shop, front_desk)
    html = client_of(front_desk).get(works.supply.bottle.get_absolute_url()).content.decode()
    assert "May be emptied into another bottle" in html


def test_a_bottle_that_must_not_be_filled_offers_no_filling(
    shop: Any, front_desk: User, client_of: Callable[..., Client]
) -> None:
    works = Works(shop, front_desk)
    address = reverse("bottles:fill", args=[works.bottle.code])
    before = client_of(front_desk).get(works.bottle.get_absolute_url()).content.decode()
    assert f'href="{address}"' in before
    ConditionFactory(bottle=works.bottle, code="dent")
    assert f'href="{address}"' not in client_of(front_desk).get(works.bottle.get_absolute_url()).content.decode()
