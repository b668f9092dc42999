"""A stored bottle that loses weight is raised on its page, on the leak watch, at Office and Counter."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext

from bottles.models import Bottle, Movement, Scale
from bottles.selectors.leaks import leaking, overview, watch_of, watches_of
from bottles.services import conditions, moving, weighing
from shop.base import clock
from shop.base.models import Shop
from shop.cars.models import Car
from shop.people.models import Customer, User
from tests import factories
from tests.bottles import books as b
from tests.bottles.of_refill import Works

pytestmark = pytest.mark.django_db
WEEK = 7 * 24


@pytest.fixture(autouse=True)
def today(shop: Shop) -> Iterator[None]:
    with clock.pretend(b.after(10 * WEEK)):
        yield


@pytest.fixture
def desk(front_desk: User, client_of: Callable[[User], Client]) -> Client:
    return client_of(front_desk)


def leaky(code: str, on: Scale, *, weeks: int = 6, a_week: int = 20, start: int = 4_000) -> Bottle:
    """A bottle weighed once a week; by default it loses 20 g each, less than what sets the books anew."""
    made = b.bottle(code)
    for week in range(weeks):
        b.weigh(made, on, start - a_week * week, b.after(WEEK * week), reason="found lighter")
    return made


def test_a_slow_leak_adds_up_though_the_books_are_brought_to_the_scale_each_time() -> None:
    scale = b.scale()
    made = leaky("T-0001", scale)
    assert Movement.objects.filter(kind="adjust").count() >= 2  # 40 g each: beyond ±24 of two weighings
    watch = watch_of(made)
    assert watch is not None and watch.drift is not None
    assert watch.drift.verdict == "leaks"
    assert watch.drift.readings == 6
    assert watch.drift.rate_g == pytest.approx(-20)
    assert watch.net_g == 3_900


def test_two_weighings_suffice_and_one_does_not() -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=1)
    watch = watch_of(made)
    assert watch is not None and watch.drift is None
    b.weigh(made, scale, 3_900, b.after(WEEK), reason="found lighter")
    watch = watch_of(made)
    assert watch is not None and watch.drift is not None
    assert watch.drift.verdict == "leaks"


@pytest.mark.parametrize("what", ["vented", "used", "out and in"])
def test_what_went_out_begins_a_new_row(what: str) -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=2, a_week=0)
    at = b.after(2 * WEEK)
    if what == "vented":
        moving.vent(key=b.key(), person=None, bottle=made, reason="too full", amount=b.grams(500), happened_at=at)
    elif what == "used":
        car = Car.objects.create(number="27", car_class="Sprint", customer=Customer.objects.create(name="Ostrander"))
        moving.use(key=b.key(), person=None, bottle=made, car=car, amount=b.grams(500), happened_at=at)
    else:
        b.go_out(made, at)
        b.come_in(made, b.after(2 * WEEK + 5))
    assert watch_of(made) is None
    b.weigh(made, scale, 3_500, b.after(3 * WEEK))
    watch = watch_of(made)
    assert watch is not None
    assert [reading.net_g for reading in watch.readings] == [3_500]


def test_a_movement_that_was_reversed_breaks_nothing() -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=2, a_week=0)
    wrong = moving.vent(
        key=b.key(), person=None, bottle=made, reason="the wrong bottle", amount=b.grams(500), happened_at=b.after(2 * WEEK)
    )
    moving.reverse_movement(key=b.key(), person=None, movement=wrong, reason="it was another bottle")
    watch = watch_of(made)
    assert watch is not None
    assert len(watch.readings) == 2


def test_a_move_to_another_shelf_breaks_nothing() -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=2)
    factories.placed(made, "moved", happened_at=b.after(3 * WEEK))
    watch = watch_of(made)
    assert watch is not None
    assert len(watch.readings) == 2


def test_wet_and_struck_weighings_are_left_out_and_scales_are_never_mixed() -> None:
    one, other = b.scale("A"), b.scale("B")
    made = b.bottle()
    b.weigh(made, one, 4_000, b.after(0))
    b.weigh(made, one, 4_200, b.after(WEEK), wet=True, reason="frosted")
    wrong = b.weigh(made, one, 3_000, b.after(2 * WEEK), reason="found lighter")
    weighing.strike(key=b.key(), person=None, weighing=wrong, reason="the wrong bottle")  # type: ignore[arg-type]
    b.weigh(made, other, 3_970, b.after(3 * WEEK), reason="another scale")
    b.weigh(made, one, 4_000, b.after(4 * WEEK), reason="the first scale again")
    watch = watch_of(made)
    assert watch is not None
    assert watch.scale == "scale A"
    assert [reading.net_g for reading in watch.readings] == [4_000, 4_000]


def test_a_tare_of_its_own_begins_a_new_row() -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=2, a_week=0)
    factories.Tare.objects.create(
        act=b.act(), bottle=made, since=b.after(2 * WEEK), total_g=b.TARE_G + 150, error_g=10, basis="weighed"
    )
    b.weigh(made, scale, 4_150, b.after(3 * WEEK))  # the same nitrous under a heavier valve
    watch = watch_of(made)
    assert watch is not None and watch.drift is not None
    assert watch.drift.verdict == "steady"


def test_bottles_that_are_out_or_retired_are_not_watched() -> None:
    scale = b.scale()
    out, gone = leaky("T-0001", scale), leaky("T-0002", scale)
    b.go_out(out, b.after(9 * WEEK))
    conditions.retire(key=b.key(), person=None, bottle=gone, reason="scrapped")
    assert overview().raised == overview().others == []
    assert leaking() == ()


def test_a_refill_begins_a_new_row_and_an_open_one_isnt_storage(front_desk: User, shop: Shop) -> None:
    works = Works(shop, front_desk)
    works.weigh(works.bottle, 6_720, happened_at=clock.now())
    assert watch_of(works.bottle) is not None
    works.open()
    assert watch_of(works.bottle) is None
    assert watch_of(works.supply.bottle) is None


def test_the_mark_follows_what_is_recorded(desk: Client) -> None:
    scale = b.scale()
    made = leaky("T-0001", scale, weeks=1)
    assert leaking() == ()
    b.weigh(made, scale, 3_900, b.after(WEEK), reason="found lighter")
    assert leaking() == ("T-0001",)
    with CaptureQueriesContext(connection) as queries:
        assert leaking() == ("T-0001",)
    assert len(queries) == 1
    moving.vent(key=b.key(), person=None, bottle=made, reason="emptied outdoors", amount=b.grams(3_000), happened_at=clock.now())
    assert leaking() == ()


def test_a_bottle_that_leaks_is_told_where_people_look(desk: Client, manager: User, client_of: Callable[[User], Client]) -> None:
    scale = b.scale()
    made = leaky("T-0001", scale)
    page = desk.get(f"/b/{made.code}").content.decode()
    assert "Loses weight while stored" in page
    assert "loses 0.7 oz a week (between 0.6 oz and 0.8 oz)" in page
    assert "almost certain (99.9 % or more)" in page
    assert "at risk: empty in about" in page
    assert "tighten a valve" in page
    note = f"/b/{made.code}/condition?code=leak"
    assert note in page
    assert 'value="leak" selected' in desk.get(note).content.decode()
    watch = desk.get("/nitrous/leaks").content.decode()
    assert "Losing weight (1)" in watch
    assert note in watch
    assert "1 bottle loses weight" in desk.get("/counter").content.decode()
    assert "1 bottle loses weight" in client_of(manager).get("/office").content.decode()
    assert not made.conditions.exists()  # nothing is set by itself


def test_a_leak_that_was_noted_is_said_to_be(desk: Client) -> None:
    made = leaky("T-0001", b.scale())
    conditions.note_condition(key=b.key(), person=None, bottle=made, code="leak", note="at the valve", seen_on=b.after(WEEK).date())
    page = desk.get("/nitrous/leaks").content.decode()
    assert "leak noted" in page
    assert "condition?code=leak" not in page


def test_weight_that_grew_has_a_name_of_its_own(desk: Client) -> None:
    made = leaky("T-0001", b.scale(), a_week=-60, weeks=2)
    assert "Grew heavier while stored" in desk.get(f"/b/{made.code}").content.decode()
    page = desk.get("/nitrous/leaks").content.decode()
    assert "Grew heavier (1)" in page
    assert "Losing weight" not in page
    assert leaking() == ()


def test_several_bottles_that_drift_alike_point_at_the_scale(desk: Client) -> None:
    scale = b.scale()
    for number in range(3):
        leaky(f"T-000{number}", scale, weeks=3)
    assert "Check scale B first." in desk.get("/nitrous/leaks").content.decode()


def test_a_sound_bottle_says_how_soon_a_leak_would_show(desk: Client) -> None:
    made = leaky("T-0001", b.scale(), weeks=2, a_week=0)
    page = desk.get(f"/b/{made.code}").content.decode()
    assert "Keeps its weight" in page
    assert "shows on scale B from" in page or "shows if you weigh it on scale B now" in page
    large = desk.get("/nitrous/leaks?leak=100 g").content.decode()
    assert "A leak of 3.5 oz a week</th>" in large and "<td>would have shown by now</td>" in large


@pytest.mark.parametrize("typed", ["much", "0 g", "5 kg", "-3 g", "9" * 5_000])
def test_a_leak_that_cant_be_read_has_its_sentence_and_the_page_still_answers(desk: Client, typed: str) -> None:
    leaky("T-0001", b.scale(), weeks=2, a_week=0)
    response = desk.get("/nitrous/leaks", {"leak": typed})
    assert response.status_code == 200
    assert response.context["form"].errors["leak"]


def test_all_bottles_together_are_told_of_as_each_alone() -> None:
    one, other = b.scale("A"), b.scale("B")
    made = [leaky(f"T-00{number:02}", one, weeks=1 + number % 3, a_week=(0, 20, 60, -60)[number % 4]) for number in range(8)]
    made.append(leaky("T-0090", other))
    for bottle, net in ((made[0], 4_000), (made[3], 3_900), (made[5], 3_000)):  # some on a second scale as well
        for week in (4, 6):
            b.weigh(bottle, other, net - 15 * week, b.after(WEEK * week), reason="on the other scale")
    alone = [watch for bottle in made if (watch := watch_of(bottle))]
    told = overview()
    assert list(told.raised) == [watch for watch in alone if watch.raised]
    assert list(told.others) == [watch.bottle for watch in alone if not watch.raised]
    assert watches_of(told.others) == [watch for watch in alone if not watch.raised]
    assert told.looked == Counter(watch.scale for watch in alone if watch.drift)
    assert set(leaking()) == {watch.code for watch in alone if watch.drift and watch.drift.verdict == "leaks"} != set()
    assert {watch.scale for watch in alone if watch.raised} == {one.name, other.name}


def test_an_empty_shop_is_told_what_to_do_first(desk: Client) -> None:
    assert "No stored bottle has a weighing that counts." in desk.get("/nitrous/leaks").content.decode()


def test_the_leak_watch_asks_no_more_often_with_more_bottles(desk: Client) -> None:
    scale, counts = b.scale(), []
    for number in range(8):
        leaky(f"T-{number:04}", scale, weeks=2, a_week=60 if number % 2 else 0)
        if number in (1, 7):
            with CaptureQueriesContext(connection) as queries:
                desk.get("/nitrous/leaks")
            counts.append(len(queries))
    assert counts[0] == counts[1] <= 12
