"""Managers change the shop's settings, decide its policy, lay out its places."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.test import Client

from shop.base import clock
from shop.base.models import Act, Place, Policy, Shop
from shop.people.models import User
from tests.factories import PlaceFactory

pytestmark = pytest.mark.django_db

SHOP = {
    "name": "Ardenbeck Race Works", "units": "us", "time_zone": "America/Chicago", "height": "590 ft", "paper": "letter",
    "public_address": "", "local_notice": "",
}  # fmt: skip


@pytest.fixture
def post(manager: User, client_of: Callable[..., Client]) -> Callable[..., Any]:
    client = client_of(manager)

    def send(path: str, **typed: Any) -> Any:
        return client.post(path, {"form_key": str(uuid.uuid4())} | typed)

    return send


def test_a_height_in_feet_is_kept_in_whole_metres(post: Callable[..., Any]) -> None:
    # 590 ft × 0.3048 m = 179.832 m
    assert post("/settings/change", **SHOP, version=1).status_code == 302
    shop = Shop.objects.get()
    assert (shop.height_m, shop.version) == (180, 2)
    assert post("/settings/change", **SHOP | {"height": "-3 m"}, version=2).status_code == 302
    assert Shop.objects.get().height_m == -3


@pytest.mark.parametrize(
    ("field", "typed"),
    [
        ("height", "9000 m"),
        ("height", "high"),
        ("height", "-500 m"),
        ("time_zone", "Mars/Olympus"),
        ("public_address", "javascript:alert(1)"),
        ("name", ""),
        ("units", "stones"),
    ],
)
def test_a_setting_that_cannot_be_is_refused_beside_its_field(field: str, typed: str, post: Callable[..., Any]) -> None:
    answer = post("/settings/change", **SHOP | {field: typed}, version=1)
    assert answer.status_code == 422
    assert set(answer.context["form"].errors) == {field}
    assert Shop.objects.get().version == 1


def test_a_setting_changed_meanwhile_is_shown_beside_ones_own(post: Callable[..., Any]) -> None:
    post("/settings/change", **SHOP | {"paper": "a4"}, version=1)
    answer = post("/settings/change", **SHOP | {"name": "Ardenbeck"}, version=1)
    assert answer.status_code == 409
    assert answer.context["form"].has_error("paper", "stale")
    assert "A4" in str(answer.context["form"]["paper"].errors)


def test_a_policy_holds_from_its_day_and_the_older_one_stays(post: Callable[..., Any], manager: User) -> None:
    today = clock.today()
    first = Policy.objects.get()
    answer = post(
        "/policies/new", effective_from=str(today + timedelta(days=1)), month_rule="from first day", visual_interval_months="12",
        own_percent="97.5", reason="the insurer asks for it",
    )  # fmt: skip
    assert answer.status_code == 302
    second = Policy.objects.order_by("-pk").first()
    assert second is not None
    assert second.values == {
        "month_rule": "from first day", "visual_interval_months": 12, "disc_interval_months": None,
        "own_limit_per_mille": 975, "good_enough_per_mille": None, "overlays": [],
    }  # fmt: skip
    assert (second.act.person, second.act.reason) == (manager, "the insurer asks for it")
    first.refresh_from_db()
    assert first.values["month_rule"] is None


@pytest.mark.parametrize(
    ("typed", "field", "status"),
    [
        ({"own_percent": "101"}, "own_percent", 422),
        ({"own_percent": "0"}, "own_percent", 422),
        ({"own_percent": "NaN"}, "own_percent", 422),
        ({"visual_interval_months": "0"}, "visual_interval_months", 422),
        ({"disc_interval_months": "a year"}, "disc_interval_months", 422),
        ({"month_rule": "never"}, "month_rule", 422),
        ({"effective_from": "31/31/2026"}, "effective_from", 422),
        ({"effective_from": "2020-01-01"}, "effective_from", 409),
    ],
)
def test_a_policy_looser_than_the_rules_or_in_the_past_is_refused(
    typed: dict[str, str], field: str, status: int, post: Callable[..., Any]
) -> None:
    answer = post("/policies/new", **{"effective_from": str(clock.today()), "month_rule": "rules"} | typed)
    assert answer.status_code == status
    assert field in answer.context["form"].errors
    assert Policy.objects.count() == 1


def test_a_place_is_added_and_changed_and_its_limit_understood(post: Callable[..., Any]) -> None:
    post("/places/new", code="FRZ", name="chest freezer", kind="freezer", limit="50 kg")
    place = Place.objects.get()
    assert (place.kind, place.limit_g, place.outdoors) == ("freezer", 50_000, False)
    assert post("/places/new", code="frz", name="another", kind="shelf").status_code == 409
    post(f"/places/{place.pk}", version=1, name="freezer", kind="freezer", outdoors="on", limit="", active="")
    place.refresh_from_db()
    assert (place.name, place.outdoors, place.limit_g, place.active) == ("freezer", True, None, False)
    assert Act.objects.filter(subject="place:FRZ").count() == 2


def test_a_limit_shown_in_ones_own_unit_is_saved_again_to_the_gram(
    post: Callable[..., Any], manager: User, client_of: Callable[..., Client]
) -> None:
    place = PlaceFactory(limit_g=20_001)
    shown = client_of(manager).get(f"/places/{place.pk}").context["form"]["limit"].value()
    assert "lb" in shown  # the shop reads in pounds
    post(f"/places/{place.pk}", version=1, name=place.name, kind="shelf", limit=shown, active="on")
    place.refresh_from_db()
    assert place.limit_g == 20_001


FREEZER = {"code": "FRZ", "name": "chest freezer", "kind": "freezer", "coldest": "0 °F", "takes_at_once": "4"}


def test_how_cold_a_freezer_gets_is_kept_as_typed_and_shown(post: Callable[..., Any], manager: User, client_of: Any) -> None:
    # 0 °F = 255.372 K (NIST SP 811, appendix B.8)
    assert post("/places/new", **FREEZER).status_code == 302
    place = Place.objects.get(code="FRZ")
    assert (place.coldest_mk, place.coldest_typed, place.takes_at_once) == (255_372, "0 °F", 4)
    assert "to 0 °F, 4 at once (entered)" in client_of(manager).get("/places").content.decode().replace("\xa0", " ")
    shown = client_of(manager).get(f"/places/{place.pk}").context["form"]
    assert (shown["coldest"].value(), shown["takes_at_once"].value()) == ("0 °F", 4)


@pytest.mark.parametrize(
    ("changes", "field"),
    [
        ({"kind": "shelf"}, "coldest"), ({"kind": "shelf", "coldest": ""}, "takes_at_once"), ({"coldest": "-50 °C"}, "coldest"),
        ({"coldest": "-78 °C"}, "coldest"), ({"kind": "bath", "coldest": "41 °C"}, "coldest"),
        ({"coldest": "100 °F"}, "coldest"), ({"coldest": "very"}, "coldest"),
        ({"takes_at_once": "0"}, "takes_at_once"), ({"takes_at_once": "many"}, "takes_at_once"),
        ({"takes_at_once": "1000"}, "takes_at_once"),
    ],
)  # fmt: skip
def test_cold_that_no_bottle_is_made_for_is_refused(post: Callable[..., Any], changes: dict[str, str], field: str) -> None:
    answer = post("/places/new", **FREEZER | changes)
    assert answer.status_code in (409, 422)
    assert field in answer.context["form"].errors
    assert not Place.objects.filter(code="FRZ").exists()


def test_dry_ice_has_a_sentence_of_its_own(post: Callable[..., Any]) -> None:
    assert "dry ice" in post("/places/new", **FREEZER | {"coldest": "-78 °C"}).content.decode()
