"""Two joined bottles: the page says which gives, how far the other fills, and warns; it saves nothing."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from bottles.models import Bottle
from bottles.services.joining import End, work_out_joined
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act, Shop
from shop.people.models import User
from tests import factories
from tests.bottles.of_refill import LIMIT_G, Works

pytestmark = pytest.mark.django_db


@pytest.fixture
def works(shop: Shop, front_desk: User) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def desk(front_desk: User, client_of: Callable[[User], Client]) -> Client:
    return client_of(front_desk)


def page(desk: Client, works: Works, **asked: str) -> Any:
    typed = {"other": "S-07", "own_temperature": "-12 °C", "other_temperature": "20 °C"} | asked
    return desk.get(reverse("bottles:joined", args=[works.bottle.code]), typed)


def test_the_colder_bottle_takes_and_passes_its_limit_if_left(works: Works) -> None:
    answer = work_out_joined(works.shop, (End(works.bottle, 261_150), End(works.supply.bottle, 293_150)))
    assert answer.giver == 1
    found = answer.found
    assert found.phase == "liquid"
    assert found.long is not None and found.long.over_limit_kg is not None
    assert found.long.over_limit_kg > 0
    assert found.long.outcome.receiver_final_kg * 1000 == pytest.approx(LIMIT_G + found.long.over_limit_kg * 1000)
    assert "passes_limit" in dict(found.warnings)


def test_which_bottle_is_named_first_changes_nothing(works: Works) -> None:
    ends = End(works.bottle, 261_150), End(works.supply.bottle, 293_150)
    one, other = work_out_joined(works.shop, ends), work_out_joined(works.shop, (ends[1], ends[0]))
    assert other.giver == 0
    assert one.found.quick is not None and other.found.quick is not None
    assert one.found.quick.outcome.moved_kg == pytest.approx(other.found.quick.outcome.moved_kg, rel=1e-9)


def test_a_supply_bottle_upside_down_gives_vapour(works: Works) -> None:
    answer = work_out_joined(works.shop, (End(works.bottle, 261_150), End(works.supply.bottle, 293_150, inverted=True)))
    assert answer.found.phase == "vapour"


def test_an_unknown_wall_is_tried_both_ways_and_the_fuller_is_told(works: Works) -> None:
    Bottle.objects.filter(pk=works.bottle.pk).update(wall="unknown", mark="")
    ends = End(Bottle.objects.get(pk=works.bottle.pk), 261_150), End(works.supply.bottle, 293_150)
    answer = work_out_joined(works.shop, ends)
    assert answer.walls_guessed == ("T-0412",)


def test_one_bottle_twice_an_unknown_capacity_and_unknown_contents_are_refused(works: Works) -> None:
    own = End(works.bottle, 261_150)
    with pytest.raises(Refusal) as twice:
        work_out_joined(works.shop, (own, own))
    assert twice.value.code == "same bottle"
    never = works.connected("S-08", net_g=None).bottle
    with pytest.raises(NotReady) as unknown:
        work_out_joined(works.shop, (own, End(never, 293_150)))
    assert unknown.value.code == "contents unknown"
    never.capacity_ml = None
    with pytest.raises(NotReady) as missing:
        work_out_joined(works.shop, (own, End(never, 293_150)))
    assert missing.value.code == "no capacity"


def test_the_page_tells_the_way_both_ends_and_the_warning_and_saves_nothing(desk: Client, works: Works) -> None:
    acts = Act.objects.count()
    text = page(desk, works).content.decode()
    assert "Liquid flows from S-07 to T-0412." in text
    assert "T-0412 passes its limit" in text and "Liquid goes over" not in text
    for word in ("quick", "if left joined", "past its limit by", "is full of liquid from", "Shut both valves"):
        assert word in text
    assert Act.objects.count() == acts


def test_alike_bottles_do_nothing(desk: Client, works: Works) -> None:
    works.connected("S-08")
    response = desk.get(
        reverse("bottles:joined", args=["S-07"]), {"other": "S-08", "own_temperature": "20 °C", "other_temperature": "20 °C"}
    )
    assert "Nothing flows now" in response.content.decode()


@pytest.mark.parametrize(
    ("field", "asked"),
    [
        ("other", {"other": ""}), ("other", {"other": "X-1"}), ("other", {"other": "T-0412"}), ("other", {"other": "9" * 90}),
        ("own_temperature", {"own_temperature": "cold"}), ("own_temperature", {"own_temperature": ""}),
        ("other_temperature", {"other_temperature": "49.5 bar"}),
        (None, {"other_temperature": "70 °C"}), (None, {"own_temperature": "-70 °C"}),
    ],
)  # fmt: skip
def test_what_cant_be_computed_has_its_sentence(desk: Client, works: Works, field: str | None, asked: dict[str, str]) -> None:
    response = page(desk, works, **asked)
    assert response.status_code == 200
    assert response.context["form"].errors[field or "__all__"]
    assert "Not saved" not in response.content.decode()  # the page saves nothing
    assert response.context["told"] is None


def test_a_station_with_two_supply_bottles_says_what_joined_ones_do(desk: Client, works: Works) -> None:
    stations = reverse("bottles:stations")
    assert "Several supply bottles on one line" not in desk.get(stations).content.decode()
    works.connected("S-08")
    text = desk.get(stations).content.decode()
    assert "Several supply bottles on one line" in text
    assert "/b/S-07/joined?other=S-08" in text
    assert 'value="S-08"' in desk.get("/b/S-07/joined?other=S-08").content.decode()


def test_a_bottle_that_nobody_registered_is_not_found(desk: Client, works: Works) -> None:
    assert desk.get("/b/NONE/joined").status_code == 404
    assert factories.BottleFactory(code="T-9").code in desk.get("/b/t-9/joined").content.decode()
