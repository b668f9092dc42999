"""The fields of a refill follow the station of the supply bottle that is chosen: its scales, its check."""

from __future__ import annotations

from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from bottles.models import Refill, ScaleCheck, Station, Supply
from tests import factories
from tests.bottles.of_refill import TARE_G, Works, key


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def client(works: Works, front_desk: Any, client_of: Any) -> Client:
    return client_of(front_desk)


@pytest.fixture
def other(works: Works) -> Supply:
    """A supply bottle on a second station, whose scale wasn't checked today."""
    supply = works.connected("S-08")
    supply.station = works.make_station(code="ST2", name="Station 2", scale=factories.ScaleFactory(name="scale C"))
    supply.save()
    return supply


def typed(works: Works, supply: Supply, drawn: Station | None, **changes: str) -> dict[str, str]:
    return {
        "form_key": str(key()), "supply": str(supply.pk), "bottle_weight": f"{TARE_G + 300} g", "gauge": "49.5 bar",
        "supply_temperature": "20 °C", "taken": "wall", "bottle_temperature": "15 °C", "bottle_taken": "wall",
        "start": "weighed", "method": "pressure", "look_all": "on", "drawn_at": str(drawn.pk) if drawn else "",
        "check_known": "10 kg", "check_read": "10 kg",
    } | changes  # fmt: skip


def live(client: Client, asked: dict[str, str]) -> str:
    return client.post(reverse("bottles:forecast_live", args=["T-0412"]), asked).content.decode()


def test_the_live_answer_brings_the_fields_of_another_station(client: Client, works: Works, other: Supply) -> None:
    same = live(client, typed(works, works.supply, works.station))
    assert "hx-swap-oob" not in same and "As scale C writes it" not in same
    brought = live(client, typed(works, other, works.station))
    assert '<div id="readings" hx-swap-oob="innerHTML">' in brought
    assert "As scale C writes it" in brought and "The day&#x27;s first fill on scale C" in brought
    assert f'name="drawn_at" value="{other.station.pk}"' in brought and f'value="{TARE_G + 300} g"' in brought
    assert 'value="10 kg"' not in brought  # the check of the one scale isn't the other's
    assert "hx-swap-oob" not in live(client, typed(works, other, other.station))


@pytest.mark.parametrize("drawn", ["", "much", "9" * 40, "-1", "٣"])
def test_a_page_that_does_not_say_for_which_station_it_was_drawn_is_answered(
    client: Client, works: Works, drawn: str
) -> None:
    assert "Goes over" in live(client, typed(works, works.supply, None, drawn_at=drawn))


def test_a_reading_of_one_scale_is_never_taken_for_that_of_another(client: Client, works: Works, other: Supply) -> None:
    address, before = reverse("bottles:fill", args=["T-0412"]), ScaleCheck.objects.count()
    answer = client.post(address, typed(works, other, works.station))
    assert answer.status_code == 409 and "S-08 hangs on Station 2: weigh on scale C" in answer.content.decode()
    assert not Refill.objects.exists() and ScaleCheck.objects.count() == before
    assert f'name="drawn_at" value="{other.station.pk}"' in answer.content.decode()
    assert client.post(address, typed(works, other, other.station)).status_code == 302
    assert ScaleCheck.objects.get(scale=other.station.scale).passed


def test_two_stations_with_one_scale_are_as_one(client: Client, works: Works, other: Supply) -> None:
    Station.objects.filter(pk=other.station.pk).update(scale=works.scale)
    assert client.post(reverse("bottles:fill", args=["T-0412"]), typed(works, other, works.station)).status_code == 302
