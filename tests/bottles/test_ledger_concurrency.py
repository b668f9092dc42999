"""Two desks at once, by a fixed schedule: the second begins while the first is inside its act.

On a real SQLite file the second waits for the write lock, on PostgreSQL for the bottle's row or
the form's key. Once each, a sentence for the second, no lost update.
"""

from __future__ import annotations

import threading
import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django.db import connection

from bottles.models import Line, Movement, Weighing
from bottles.services import moving, refusals, weighing
from bottles.services.locking import lock
from shop.base import clock
from shop.base.errors import AlreadyDone, Refusal
from shop.base.models import Act
from shop.cars.models import Car
from tests.bottles import books as b

pytestmark = pytest.mark.django_db(transaction=True)

LONGEST_S = 15


@pytest.fixture
def one_inside_the_other(monkeypatch, shop) -> Callable[..., list[Any]]:
    """Run two acts: the second is begun once the first holds its locks; returns what each came to."""
    inside, go = threading.Event(), threading.Event()
    first: list[int] = []

    def slow(bottles: Any) -> Any:
        found = lock(bottles)
        if threading.get_ident() in first:
            inside.set()
            assert go.wait(LONGEST_S)
        return found

    for module in (refusals, weighing, moving):
        monkeypatch.setattr(module, "lock", slow)

    def run(one: Callable[[], Any], other: Callable[[], Any]) -> list[Any]:
        came: list[Any] = [None, None]

        def do(place: int, does: Callable[[], Any]) -> None:
            if place == 0:
                first.append(threading.get_ident())
            try:
                with clock.pretend(b.after(24)):
                    came[place] = does()
            except Exception as error:  # what each came to is asserted by the test
                came[place] = error
            finally:
                connection.close()

        threads = [threading.Thread(target=do, args=args) for args in ((0, one), (1, other))]
        threads[0].start()
        assert inside.wait(LONGEST_S)
        threads[1].start()
        threads[1].join(0.4)  # it stands at the lock; were it not, it would be through by now
        waited = threads[1].is_alive()
        go.set()
        for thread in threads:
            thread.join(LONGEST_S)
        assert waited, "the second didn't wait for the first"
        assert not any(thread.is_alive() for thread in threads)
        return came

    return run


def test_two_desks_weigh_one_new_bottle_and_its_books_open_once(one_inside_the_other):
    bottle, scale = b.bottle(), b.scale()
    came = one_inside_the_other(
        lambda: b.weigh(bottle, scale, 4_000, b.after(1)), lambda: b.weigh(bottle, scale, 4_010, b.after(1.5))
    )
    assert [isinstance(one, Weighing) for one in came] == [True, True]
    assert [movement.kind for movement in Movement.objects.all()] == ["opening"]
    assert b.holds(bottle) == 4_000
    b.check_books()


def test_a_double_click_weighs_once_and_the_second_is_told(one_inside_the_other):
    bottle, scale, key = b.bottle(), b.scale(), uuid.uuid4()

    def click() -> Any:
        gross = b.grams(b.TARE_G + 4_000)
        return weighing.weigh(key=key, person=None, bottle=bottle, scale=scale, gross=gross)

    came = one_inside_the_other(click, click)
    assert isinstance(came[0], Weighing)
    assert isinstance(came[1], AlreadyDone)
    assert came[1].act == came[0].act
    assert (Weighing.objects.count(), Movement.objects.count(), Act.objects.filter(key=key).count()) == (1, 1, 1)


def test_a_retry_after_the_answer_was_lost_is_answered_with_the_first(shop):
    bottle, scale, key = b.bottle(), b.scale(), uuid.uuid4()
    form = {"key": key, "person": None, "bottle": bottle, "scale": scale, "gross": b.grams(b.TARE_G + 4_000)}
    first = weighing.weigh(**form)
    for _ in range(3):
        with pytest.raises(AlreadyDone) as again:
            weighing.weigh(**form)
        assert again.value.act == first.act
    assert (Weighing.objects.count(), b.holds(bottle)) == (1, 4_000)


def test_two_cars_draw_on_one_bottle_and_no_update_is_lost(one_inside_the_other):
    bottle, scale = b.bottle(owner="shop"), b.scale()
    with clock.pretend(b.after(20)):
        b.weigh(bottle, scale, 1_000, b.after(0))
    cars = [Car.objects.create(number=number) for number in ("27", "31")]

    def use(car: Car) -> Callable[[], Any]:
        return lambda: moving.use(key=uuid.uuid4(), person=None, bottle=bottle, car=car, amount=b.grams(700))

    came = one_inside_the_other(use(cars[0]), use(cars[1]))
    assert [isinstance(one, Movement) for one in came] == [True, True]
    # 1,000 held, 1,400 used: 400 must have been in it beyond the books
    assert (b.holds(bottle), b.balance("car"), b.balance("unaccounted")) == (0, 1_400, -400)
    assert Line.objects.filter(source__kind="unaccounted").count() == 1
    b.check_books()


def test_two_desks_strike_one_weighing_and_one_is_told(one_inside_the_other):
    bottle, scale = b.bottle(), b.scale()
    with clock.pretend(b.after(20)):
        row = b.weigh(bottle, scale, 4_000, b.after(0))

    def strike() -> Any:
        return weighing.strike(key=uuid.uuid4(), person=None, weighing=row, reason="mistyped")

    came = one_inside_the_other(strike, strike)
    assert came[0] is None
    assert isinstance(came[1], Refusal)
    assert came[1].code == "struck already"
    assert Movement.objects.filter(kind="reversal").count() == 1
    b.check_books()


def test_two_managers_reverse_one_movement_and_one_is_told(one_inside_the_other):
    bottle, scale = b.bottle(), b.scale()
    with clock.pretend(b.after(20)):
        b.weigh(bottle, scale, 4_000, b.after(0))
        made = moving.vent(
            key=uuid.uuid4(), person=None, bottle=bottle, amount=b.grams(500), reason="yard", happened_at=b.after(2)
        )

    def reverse() -> Any:
        return moving.reverse_movement(key=uuid.uuid4(), person=None, movement=made, reason="wrong bottle")

    came = one_inside_the_other(reverse, reverse)
    assert isinstance(came[0], Movement)
    assert isinstance(came[1], Refusal)
    assert came[1].code == "already reversed"
    assert (b.holds(bottle), b.balance("vented")) == (4_000, 0)


def test_a_weighing_waits_for_a_vent_and_sees_it(one_inside_the_other):
    bottle, scale = b.bottle(), b.scale()
    with clock.pretend(b.after(20)):
        b.weigh(bottle, scale, 4_000, b.after(0))

    def vent() -> Any:
        return moving.vent(key=uuid.uuid4(), person=None, bottle=bottle, amount=b.grams(500), reason="yard", happened_at=b.after(2))

    came = one_inside_the_other(vent, lambda: b.weigh(bottle, scale, 3_500, b.after(3)))
    assert isinstance(came[1], Weighing)  # without the vent it would have asked for a reason
    assert (b.holds(bottle), b.balance("unaccounted")) == (3_500, 0)
