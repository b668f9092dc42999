"""A bottle is in or out, and its place is always known."""

from __future__ import annotations

import uuid
from datetime import timedelta
from typing import Any

import pytest

from bottles.models import Custody, Standing
from bottles.services import custody
from shop.base import clock
from shop.base.errors import AlreadyDone, NotReady
from tests.factories import (
    BottleFactory,
    CarFactory,
    CustomerFactory,
    DecisionFactory,
    PlaceFactory,
    RefillFactory,
    StationFactory,
    SupplyFactory,
    owned,
    placed,
    weighed,
)

pytestmark = pytest.mark.django_db


def took_in(bottle: Any, place: Any, **more: Any) -> Custody:
    return custody.check_in(
        key=more.pop("key", uuid.uuid4()), person=None, bottle=bottle, place=place, brought_by="R. Quill", **more
    )


def gave(bottle: Any, **more: Any) -> Custody:
    values = {"key": uuid.uuid4(), "person": None, "kind": "out", "to_whom": "R. Quill", "limit_g": None} | more
    return custody.hand_over(bottle=bottle, **values)


def test_a_bottle_checked_in_stands_where_it_was_put(shop: Any) -> None:
    bottle, place = BottleFactory(), PlaceFactory(name="rack B")
    took_in(bottle, place, wanted="refill", promised_at=clock.now() + timedelta(hours=2))
    standing = Standing.objects.get(bottle=bottle)
    assert standing.is_in and standing.waits
    assert standing.custody is not None and standing.custody.place == place


def test_a_bottle_that_is_in_is_not_checked_in_again(shop: Any) -> None:
    bottle, place = BottleFactory(), PlaceFactory()
    took_in(bottle, place)
    with pytest.raises(NotReady) as refusal:
        took_in(bottle, place)
    assert refusal.value.code == "in already"


def test_the_same_form_twice_checks_in_once(shop: Any) -> None:
    bottle, place, key = BottleFactory(), PlaceFactory(), uuid.uuid4()
    took_in(bottle, place, key=key)
    with pytest.raises(AlreadyDone):
        took_in(bottle, place, key=key)
    assert Custody.objects.filter(bottle=bottle).count() == 1


def test_moving_keeps_what_it_waits_for(shop: Any) -> None:
    bottle, freezer = BottleFactory(), PlaceFactory(kind="freezer")
    took_in(bottle, PlaceFactory(), wanted="refill")
    custody.move(key=uuid.uuid4(), person=None, bottle=bottle, place=freezer)
    standing = Standing.objects.get(bottle=bottle)
    assert standing.custody is not None and standing.custody.place == freezer
    assert standing.custody.wanted == "refill" and standing.waits


def test_a_bottle_that_is_out_is_not_moved(shop: Any) -> None:
    bottle = BottleFactory()
    with pytest.raises(NotReady) as refusal:
        custody.move(key=uuid.uuid4(), person=None, bottle=bottle, place=PlaceFactory())
    assert refusal.value.code == "not in"


def test_handing_over_says_to_whom_and_clears_what_it_waited_for(shop: Any) -> None:
    bottle = BottleFactory()
    took_in(bottle, PlaceFactory(), wanted="refill")
    gave(bottle, to_whom="Ines Quill")
    standing = Standing.objects.get(bottle=bottle)
    assert not standing.is_in and not standing.waits
    assert standing.custody is not None and standing.custody.with_whom == "Ines Quill"


def test_a_bottle_leaves_quarantine_only_with_a_reason(shop: Any) -> None:
    bottle = BottleFactory()
    took_in(bottle, PlaceFactory(kind="quarantine"))
    with pytest.raises(NotReady) as refusal:
        gave(bottle)
    assert refusal.value.code == "quarantine" and refusal.value.field == "reason"
    gave(bottle, reason="condemned, marked so, back to its owner")


def test_a_retired_bottle_is_not_checked_in(shop: Any) -> None:
    bottle = BottleFactory(retired_at=clock.now())
    with pytest.raises(NotReady) as refusal:
        took_in(bottle, PlaceFactory())
    assert refusal.value.code == "retired"


def test_what_happened_earlier_is_entered_with_its_own_time(shop: Any) -> None:
    bottle = BottleFactory()
    saturday = clock.now() - timedelta(days=2)
    took_in(bottle, PlaceFactory(), happened_at=saturday)
    gave(bottle)
    late = PlaceFactory(name="cage")
    # Entered last, but of before the hand-over: the bottle is still out.
    with pytest.raises(NotReady):
        custody.move(key=uuid.uuid4(), person=None, bottle=bottle, place=late, happened_at=saturday + timedelta(hours=1))
    assert not Standing.objects.get(bottle=bottle).is_in


def test_the_page_keeps_what_was_typed_when_it_refuses(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle = BottleFactory()
    answer = client_of(front_desk).post(
        f"/b/{bottle.code}/check-in",
        {"form_key": str(uuid.uuid4()), "brought_by": "R. Quill", "wanted": "refill", "place": "", "promised_at": "soon"},
    )
    assert answer.status_code == 422
    assert b"R. Quill" in answer.content and b"soon" in answer.content
    assert not Custody.objects.exists()


def test_a_promise_in_the_wrong_year_is_refused(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle, place = BottleFactory(), PlaceFactory()
    answer = client_of(front_desk).post(
        f"/b/{bottle.code}/check-in",
        {"form_key": str(uuid.uuid4()), "brought_by": "R. Quill", "place": place.pk, "promised_at": "1999-01-01T10:00"},
    )
    assert answer.status_code == 422
    assert answer.context["form"].errors.as_data()["promised_at"][0].code == "not a promise"


def test_a_double_click_on_the_page_is_answered_with_the_bottle(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle, place = BottleFactory(), PlaceFactory()
    client, form = client_of(front_desk), {"form_key": str(uuid.uuid4()), "brought_by": "R. Quill", "place": place.pk}
    first = client.post(f"/b/{bottle.code}/check-in", form)
    second = client.post(f"/b/{bottle.code}/check-in", form)
    assert first.status_code == second.status_code == 302
    assert first.url == second.url == f"/b/{bottle.code}"
    assert Custody.objects.filter(bottle=bottle).count() == 1


# --- out of the shop ------------------------------------------------------------------------------


def handed(client: Any, bottle: Any, **typed: Any) -> Any:
    data = {"form_key": str(uuid.uuid4()), "kind": "out", "to_whom": "R. Quill", "told": "on"} | typed
    return client.post(f"/b/{bottle.code}/hand-over", data)


@pytest.fixture
def known(shop: Any) -> Any:
    """A customer's bottle that is in and holds 1,000 g by the scale."""
    bottle = BottleFactory(code="T-0412", last_held="nitrous")
    placed(owned(bottle, CustomerFactory()))
    weighed(bottle, gross_g=7_420, tare_g=6_420)
    return bottle


@pytest.mark.parametrize(
    ("kind", "state"), [("out", "handed over"), ("loan", "lent"), ("test", "at the test house"), ("car", "on car 27")]
)
def test_from_its_page_a_bottle_goes_out_in_each_way_and_its_place_is_known(
    known: Any, front_desk: Any, client_of: Any, kind: str, state: str
) -> None:
    desk = client_of(front_desk)
    page = desk.get("/b/T-0412/hand-over").content.decode()
    assert "it holds 2.2 ±0.1 lb of nitrous (weighed)" in page  # 1000 g = 2.205 lb, ±28 g = 0.06 lb, up
    car = CarFactory(number="27").pk if kind == "car" else ""
    answer = handed(desk, known, kind=kind, car=car)
    assert answer.status_code == 302, answer.context["form"].errors
    last = Custody.objects.latest("id")
    assert (last.kind, last.is_in, last.with_whom) == (kind, False, "R. Quill")
    assert "it holds 2.2 ±0.1 lb of nitrous" in desk.get("/b/T-0412").content.decode()
    rows = {row["code"]: row["where"] for row in desk.get("/bottles/").context["rows"]}
    assert rows["T-0412"] == state


def test_the_word_for_the_test_house_is_the_rule_sets(known: Any, shop: Any, front_desk: Any, client_of: Any) -> None:
    assert "to the retester" in client_of(front_desk).get("/b/T-0412/hand-over").content.decode()
    shop.country = "ADR"
    shop.save()
    assert "to the test house" in client_of(front_desk).get("/b/T-0412/hand-over").content.decode()


def test_to_the_test_house_its_contents_are_stated(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle = placed(owned(BottleFactory()))
    answer = handed(client_of(front_desk), bottle, kind="test")
    assert answer.status_code == 409 and answer.context["form"].has_error("reason", "contents not stated")
    answer = handed(client_of(front_desk), bottle, kind="test", reason="valve seized; tag says contents unknown")
    assert answer.status_code == 302 and Custody.objects.latest("id").kind == "test"


def test_the_suppliers_bottle_is_swapped_and_never_sent_to_a_test(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle = placed(owned(BottleFactory(use="supply"), supplier="Harrow Trade Supply"))
    weighed(bottle, gross_g=48_500, tare_g=33_500)
    answer = handed(client_of(front_desk), bottle, kind="test")
    assert answer.status_code == 409 and answer.context["form"].has_error("kind", "suppliers bottle")
    typed = {"form_key": str(uuid.uuid4()), "supplier": "Harrow Trade Supply"}
    assert client_of(front_desk).post(f"/b/{bottle.code}/return", typed).status_code == 302
    assert Custody.objects.latest("id").kind == "supplier"


def test_a_supply_bottle_on_a_station_goes_nowhere(shop: Any) -> None:
    supply = SupplyFactory(station=StationFactory())
    elsewhere = PlaceFactory()
    for going in (
        lambda: gave(supply.bottle),
        lambda: custody.move(key=uuid.uuid4(), person=None, bottle=supply.bottle, place=elsewhere),
    ):
        with pytest.raises(NotReady) as refusal:
            going()
        assert refusal.value.code == "on a station"
    assert Standing.objects.get(bottle=supply.bottle).is_in


def test_a_supply_bottle_that_feeds_an_open_refill_stays(shop: Any) -> None:
    source = placed(owned(BottleFactory(use="supply")))
    RefillFactory(decision=DecisionFactory(bottle=placed(owned(BottleFactory()))), source=source)
    with pytest.raises(NotReady) as refusal:
        gave(source)
    assert refusal.value.code == "open refill"
    assert Standing.objects.get(bottle=source).is_in


def test_a_hand_over_entered_late_is_said_to_change_nothing_of_today(shop: Any, front_desk: Any, client_of: Any) -> None:
    bottle, place = BottleFactory(), PlaceFactory()
    took_in(bottle, place, happened_at=clock.now() - timedelta(days=2))
    custody.move(key=uuid.uuid4(), person=None, bottle=bottle, place=place)
    earlier = (clock.now() - timedelta(days=1)).astimezone(clock.zone(shop))
    form = {"form_key": str(uuid.uuid4()), "place": place.pk, "happened_at": f"{earlier:%Y-%m-%dT%H:%M}"}
    answer = client_of(front_desk).post(f"/b/{bottle.code}/move", form, follow=True)
    assert "Something later says where the bottle is now" in answer.content.decode()
    assert Custody.objects.filter(bottle=bottle).count() == 3
