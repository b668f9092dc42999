"""A reason on a bottle's page tells its figures in the person's units and leads to where it is answered."""

from __future__ import annotations

import re
from typing import Any

import pytest
from django.test import Client
from django.urls import get_resolver, reverse

from bottles.models import Refill
from bottles.rules.words import NOT_GIVEN, SENTENCES
from bottles.services.standing import restate
from bottles.views.reason_rows import CONSENT, IN_THE_SHOP, WHERE, in_own_units
from bottles.views.wording import Words
from shop.physics.formatting import unit_system
from tests import factories
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def client(works: Works, front_desk: Any, client_of: Any) -> Client:
    return client_of(front_desk)


def main_acts(client: Client, code: str) -> list[str]:
    page = client.get(reverse("bottles:bottle", args=[code])).content.decode()
    return re.findall(r'<a class="button main"\s+href="([^"]+)"', page)


@pytest.mark.parametrize(
    ("units", "told"),
    [
        ("us", "It holds 10.6 lb, more than its limit of 10.0 lb: overfull."),
        ("metric", "It holds 4.82 kg, more than its limit of 4.54 kg: overfull."),
    ],
)
def test_grams_of_a_sentence_are_told_in_the_persons_units(units: str, told: str) -> None:
    sentence = SENTENCES["over-its-limit"][0].format(net=4821, limit=4536)
    assert in_own_units(sentence, Words(unit_system(units))) == told


def test_plus_minus_in_grams_is_told_with_its_figure() -> None:
    sentence = SENTENCES["within-plus-minus"][0].format(net=4500, plus_minus=40, limit=4536)
    told = in_own_units(sentence, Words(unit_system("us")))
    assert "9.9 ±0.1 lb of 10.0 lb" in told and not re.search(r"\d g\b", told)


def test_every_code_that_leads_somewhere_is_one_that_the_rules_say() -> None:
    said = set(SENTENCES) | {f"{what.replace(' ', '-')}-not-given" for what in NOT_GIVEN}
    assert (set(WHERE) | set(IN_THE_SHOP) | CONSENT) <= said
    pages = {name for name in get_resolver().namespace_dict["bottles"][1].reverse_dict if isinstance(name, str)}
    assert set(WHERE.values()) | set(IN_THE_SHOP.values()) <= pages


def test_a_bottle_that_may_be_filled_offers_the_forecast_first(client: Client, works: Works) -> None:
    assert main_acts(client, works.bottle.code) == [reverse("bottles:fill", args=[works.bottle.code])]


def test_a_bottle_in_an_open_refill_leads_back_to_it(client: Client, works: Works) -> None:
    client.post(
        reverse("bottles:fill", args=[works.bottle.code]),
        {
            "form_key": str(key()), "supply": str(works.supply.pk), "bottle_weight": "6.72 kg", "gauge": "718",
            "supply_temperature": "68", "taken": "wall", "bottle_temperature": "10", "bottle_taken": "wall",
            "start": "weighed", "method": "chilled", "look_all": "on",
        },
    )  # fmt: skip
    refill = reverse("bottles:refill", args=[Refill.objects.get().pk])
    assert main_acts(client, works.bottle.code) == [refill]
    page = client.get(works.bottle.get_absolute_url()).content.decode()
    assert f'→ <a href="{refill}">' in page
    assert reverse("bottles:hand_over", args=[works.bottle.code]) not in page


def test_what_is_not_known_leads_to_its_page(client: Client, works: Works) -> None:
    bottle = factories.owned(factories.BottleFactory(code="T-0900"), factories.CustomerFactory())
    factories.placed(bottle, place=factories.PlaceFactory())
    restate(bottle)
    page = client.get(bottle.get_absolute_url()).content.decode()
    assert f'→ <a href="{reverse("bottles:weigh", args=["T-0900"])}">' in page
    assert "?purpose=fill" in page
    assert main_acts(client, "T-0900") == [reverse("bottles:weigh", args=["T-0900"])]


def test_a_full_bottle_is_called_full_and_handed_over(client: Client, works: Works) -> None:
    full = works.bottle_to_fill("T-0413", net_g=4_600)  # a limit of 4,614 g, weighed to some 20 g
    page = client.get(full.get_absolute_url()).content.decode()
    assert "Full: nothing more goes in" in page and "Must not be filled" not in page
    assert main_acts(client, "T-0413") == [reverse("bottles:hand_over", args=["T-0413"])]
    assert "Full: nothing more goes in" not in client.get(works.bottle.get_absolute_url()).content.decode()
