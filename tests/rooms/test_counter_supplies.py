"""The Counter's supply bottles say how many full fills are left, by a forecast that was kept."""

from __future__ import annotations

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext

from bottles.models import Account, Forecast
from bottles.services.refill_steps import weigh_refill
from shop.base import clock
from shop.base.models import Shop
from shop.people.models import User
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db


@pytest.fixture
def works(shop: Shop, front_desk: User) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def supplies(front_desk: User, client_of: Callable[[User], Client]) -> Callable[[], list[dict[str, Any]]]:
    client = client_of(front_desk)
    return lambda: client.get("/counter").context["supplies"]  # type: ignore[no-any-return]


def test_without_a_forecast_nothing_is_said(works: Works, supplies: Callable[[], list[dict[str, Any]]]) -> None:
    assert [row["fills"] for row in supplies()] == [""]


def test_a_kept_forecast_tells_the_fills_left_less_what_left_since(
    works: Works, supplies: Callable[[], list[dict[str, Any]]]
) -> None:
    works.open()
    fills = Forecast.objects.get().result["full_fills"]
    assert fills >= 2
    said = supplies()[0]["fills"]
    assert said.startswith(f"at best {fills} full fills of ")
    assert " left, by the forecast of " in said
    refill = works.bottle.refills.get()
    weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(4_600), ended_by="by hand")
    left = supplies()[0]["fills"]
    assert left.startswith(f"at best {fills - 1} full fill")


def test_an_old_forecast_is_not_told(works: Works, supplies: Callable[[], list[dict[str, Any]]]) -> None:
    works.open()
    with clock.pretend(clock.now() + timedelta(days=8)):
        assert supplies()[0]["fills"] == ""


def test_a_supply_bottle_that_was_filled_since_has_no_figure(works: Works, supplies: Callable[[], list[dict[str, Any]]]) -> None:
    works.open()
    Account.objects.filter(bottle=works.supply.bottle).update(balance_g=19_000)
    assert supplies()[0]["fills"] == ""


def test_it_costs_one_query_for_all_of_them(works: Works, front_desk: User, client_of: Callable[[User], Client]) -> None:
    client = client_of(front_desk)
    client.get("/counter")
    with CaptureQueriesContext(connection) as before:
        client.get("/counter")
    works.open()
    client.get("/counter")
    with CaptureQueriesContext(connection) as after:
        client.get("/counter")
    named = [query["sql"] for query in after if "full_fills" in query["sql"]]
    assert len(named) == 1
    assert len(before) <= 20
