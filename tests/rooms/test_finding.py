"""One field finds anything: a label, a code, a serial, a car, a name."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from django.db import connection
from django.db.models.functions import Lower
from django.test import Client
from django.utils import timezone

from bottles.models import Bottle
from shop.people.models import Customer
from shop.people.selectors import begins
from shop.rooms import finding
from tests.factories import BottleFactory, CarFactory, CustomerFactory, owned

pytestmark = pytest.mark.django_db


@pytest.fixture
def book(shop: Any) -> dict[str, Any]:
    ostrander = CustomerFactory(name="Ostrander", phone="555 0100")
    return {
        "ostrander": ostrander,
        "car": CarFactory(number="27", customer=ostrander),
        "bottle": owned(BottleFactory(code="T-0412", serial="88213"), ostrander),
        "near": BottleFactory(code="T-0413", serial="88299"),
    }


@pytest.mark.parametrize(
    "typed",
    [
        "T-0412",
        "t-0412",
        "  T-0412\r",
        "88213",
        "https://bottles.example/b/T-0412",
        "http://192.168.1.4:8000/b/t-0412/?s=1",
        "/b/T%2D0412",
    ],
)
def test_a_scanned_or_whole_code_goes_straight_to_the_bottle(
    typed: str, book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    answer = client_of(front_desk).get("/find", {"q": typed})
    assert (answer.status_code, answer["Location"]) == (302, "/b/T-0412")


@pytest.mark.parametrize("typed", ["27", "car 27", "#27"])
def test_a_car_number_goes_straight_to_the_car(
    typed: str, book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    assert client_of(front_desk).get("/find", {"q": typed})["Location"] == f"/cars/{book['car'].pk}"


def test_a_whole_name_goes_straight_to_the_customer(
    book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    answer = client_of(front_desk).get("/find", {"q": "ostrander"})
    assert answer["Location"] == f"/customers/{book['ostrander'].pk}"


def test_half_typed_text_shows_what_may_be_meant(
    book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    answer = client_of(front_desk).get("/find", {"q": "T-04"})
    assert answer.status_code == 200
    assert [match.code for match in answer.context["matches"]] == ["T-0412", "T-0413"]
    assert answer.context["matches"][0].what == "DOT-3AL1800 · serial 88213 · Ostrander"


def test_two_exact_matches_are_for_the_person_to_choose(
    book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    BottleFactory(code="T-0500", serial="27")
    answer = client_of(front_desk).get("/find", {"q": "27"})
    assert answer.status_code == 200
    assert {match.code for match in answer.context["matches"]} == {"T-0500", str(book["car"])}


def test_nothing_found_says_so_and_keeps_what_was_typed(
    shop: Any, front_desk: Any, client_of: Callable[..., Client]
) -> None:
    answer = client_of(front_desk).get("/find", {"q": "<b>zz"})
    assert answer.status_code == 200
    assert b"&lt;b&gt;zz" in answer.content and b"<b>zz" not in answer.content
    assert client_of(front_desk).get("/find").status_code == 200


@pytest.mark.parametrize("typed", ["\0", "x" * 100_000, "%", "_", "'", '"', "\\", "/b/", "#", "car ", "😀"])
def test_nothing_that_is_typed_makes_it_fall_over(
    typed: str, book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    assert client_of(front_desk).get("/find", {"q": typed}).status_code == 200


def test_percent_and_underline_are_letters_like_others(book: dict[str, Any]) -> None:
    assert finding.find("T_04", limit=8) == [] and finding.find("%", limit=8) == []


def test_a_retired_bottle_is_found_and_said_to_be_retired(shop: Any) -> None:
    BottleFactory(code="T-0001", retired_at=timezone.now())
    assert [match.word for match in finding.find("T-0001", limit=8)] == ["retired"]


def test_an_erased_customer_and_a_car_that_no_longer_comes_are_not_offered(shop: Any) -> None:
    CustomerFactory(name="Gone Away", erased_at=timezone.now())
    CarFactory(number="99", active=False)
    assert finding.find("Gone", limit=8) == [] and finding.find("99", limit=8) == []


def test_a_last_name_is_found_too(shop: Any) -> None:
    CustomerFactory(name="Mara Ostrander")
    assert [match.code for match in finding.find("ostr", limit=8)] == ["Mara Ostrander"]


def test_offers_are_a_list_of_options_for_the_field_that_asks(
    book: dict[str, Any], front_desk: Any, client_of: Callable[..., Client]
) -> None:
    client = client_of(front_desk)
    answer = client.get("/find/matches", {"q": "T-04"}, headers={"HX-Request": "true", "HX-Target": "matches-main"})
    html = answer.content.decode()
    assert html.count('role="option"') == 2 and 'id="matches-main-list"' in html
    assert "<h1" not in html
    planted = client.get("/find/matches", {"q": "T-04"}, headers={"HX-Target": '"><script>'})
    assert b"<script" not in planted.content


def test_typing_asks_as_little_of_a_long_book_as_of_a_short_one(shop: Any, django_assert_max_num_queries: Any) -> None:
    for size in (3, 60):
        for _ in range(size):
            owned(BottleFactory(), CustomerFactory(name=f"T-person {size}"))
        with django_assert_max_num_queries(5):
            found = finding.find("T-", limit=finding.OFFERED)
        assert len(found) <= finding.OFFERED


def test_a_prefix_is_looked_up_by_an_index(shop: Any) -> None:
    people = Customer.objects.alias(low=Lower("name")).filter(begins("low", "ostr")).order_by("low")
    codes = Bottle.objects.filter(begins("code", "T-04")).order_by("code")
    serials = Bottle.objects.filter(begins("serial", "882")).order_by("serial")
    if connection.vendor == "sqlite":
        for found in (people, codes, serials):
            assert "USING INDEX" in found[:8].explain() and "SCAN" not in found[:8].explain()
    else:  # an empty table is scanned unless that's forbidden
        with connection.cursor() as cursor:
            cursor.execute("SET LOCAL enable_seqscan = off")
        assert "Index Cond" in codes[:8].explain()
