"""An overfull bottle is a timer, and stays open until it is weighed at or below its limit."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

import pytest

from bottles.models import Refill
from bottles.physics.contents import one_phase_temperature
from bottles.selectors.refills import course_of
from bottles.services import refill_steps as steps
from bottles.services.custody import hand_over
from bottles.services.overfull import how_to_let_out, timer_of
from shop.base.errors import Refusal
from tests.bottles.books import check_books
from tests.bottles.of_refill import LIMIT_G, Works, balance, degrees, holds, key

pytestmark = pytest.mark.django_db(transaction=True)

OVER_G = 5_300


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def refill(works: Works) -> Refill:
    found = works.open(bottle_temperature=degrees("-12 °C"))
    steps.weigh_refill(key=key(), person=works.person, refill=found, weight=works.weight(OVER_G))
    return found


def test_it_says_when_it_is_full_of_liquid_and_how_long_that_takes(refill: Refill) -> None:
    course = course_of(refill)
    assert course.overfull is not None
    timer = timer_of(course, course.overfull)
    assert timer.over_g == timer.out_g == OVER_G - LIMIT_G
    # An independent route: the temperature at which saturated liquid has the density of this fill.
    full_at, word = one_phase_temperature((OVER_G + course.overfull.error_g) / 1000, 0.0068)
    assert word == "liquid-full" and timer.full_at_mk == pytest.approx(full_at * 1000, abs=20)
    # Saturated liquid of 0.785 kg/L at 20 °C (NIST WebBook); 5.3 kg in 6.8 L are 0.779.
    assert timer.full_at_mk == pytest.approx(293_150, abs=1_000)
    assert timer.room_read and timer.room_mk == 293_150 + 3_000  # as read, and what a room may warm


def test_a_warm_room_leaves_less_time_and_what_is_gone_is_gone(works: Works) -> None:
    found = works.open(supply_temperature=degrees("27 °C"), gauge=None)
    steps.weigh_refill(key=key(), person=works.person, refill=found, weight=works.weight(OVER_G))
    course = course_of(found)
    now = timer_of(course, course.overfull)
    assert now.left is not None and timedelta(0) < now.left < timedelta(hours=12)
    over = course.overfull
    over.happened_at -= timedelta(minutes=10)
    later = timer_of(course, over)
    assert now.left - later.left == pytest.approx(timedelta(minutes=10), abs=timedelta(seconds=5))
    over.happened_at -= timedelta(days=2)
    assert timer_of(course, over).full_now


def test_a_cold_room_doesnt_warm_it_so_far(works: Works) -> None:
    found = works.open(supply_temperature=degrees("5 °C"), bottle_temperature=degrees("-20 °C"), gauge=None)
    steps.weigh_refill(key=key(), person=works.person, refill=found, weight=works.weight(OVER_G))
    course = course_of(found)
    timer = timer_of(course, course.overfull)
    assert timer.left is None and not timer.full_now


def test_it_cant_be_closed_nor_handed_over(works: Works, refill: Refill) -> None:
    for ended_by, _ in Refill.ENDS:
        with pytest.raises(Refusal) as caught:
            steps.close_refill(key=key(), person=works.person, refill=refill, version=1, ended_by=ended_by)
        assert caught.value.code == "overfull"
    with pytest.raises(Refusal) as caught:
        hand_over(key=key(), person=works.person, bottle=works.bottle, kind="out", to_whom="its owner", limit_g=LIMIT_G)
    assert caught.value.code == "open refill"


def test_the_weight_that_shows_it_is_kept_though_closing_was_asked_for(works: Works, refill: Refill) -> None:
    found = steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(OVER_G - 100), ended_by="by hand"
    )
    assert not found.closed and found.why_not and found.weighing.pk
    assert Refill.objects.get().closed_at is None


def test_let_out_and_weighed_again_it_closes_and_the_books_know_what_was_vented(works: Works, refill: Refill) -> None:
    found = steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(LIMIT_G - 14), ended_by="limit"
    )
    assert found.closed
    assert balance("vented") == OVER_G - (LIMIT_G - 14) and holds(works.bottle) == LIMIT_G - 14
    check_books()


def test_one_gram_above_is_above(works: Works, refill: Refill) -> None:
    found = steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(LIMIT_G + 1), ended_by="limit"
    )
    assert not found.closed
    assert steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(LIMIT_G), ended_by="limit"
    ).closed


def test_the_line_must_be_off(works: Works, refill: Refill) -> None:
    steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(4_600, line_off=False))
    with pytest.raises(Refusal) as caught:
        steps.close_refill(key=key(), person=works.person, refill=refill, version=1, ended_by="limit")
    assert caught.value.code == "not disconnected"


def test_wet_it_may_close_but_not_as_full(works: Works) -> None:
    found = works.open()
    weight = works.weight(4_600, wet=True)
    wet = steps.weigh_refill(key=key(), person=works.person, refill=found, weight=weight, ended_by="limit")
    assert not wet.closed
    with pytest.raises(Refusal) as caught:
        steps.close_refill(key=key(), person=works.person, refill=found, version=1, ended_by="limit")
    assert caught.value.code == "wet"
    steps.close_refill(key=key(), person=works.person, refill=found, version=1, ended_by="by hand")


def test_another_supply_isnt_put_on_an_overfull_bottle(works: Works, refill: Refill) -> None:
    other = works.connected("S-09")
    with pytest.raises(Refusal) as caught:
        steps.add_draw(
            key=key(), person=works.person, refill=refill, version=1, asked=works.asked(supply=other),
            answer=works.forecast(supply=other), weight=works.weight(OVER_G, line_off=False),
        )
    assert caught.value.code == "overfull"
    assert refill.draws.count() == 1


def test_how_it_is_let_out_follows_the_dip_tube(works: Works) -> None:
    words = {}
    for tube in ("dip", "none", "unknown"):
        works.bottle.dip_tube = tube
        words[tube] = how_to_let_out(works.bottle)
    assert "Upright, its dip (siphon) tube lets liquid out" in words["dip"][1]
    assert "Upright it lets vapour out" in words["none"][1]
    assert all("Outdoors" in told[0] for told in words.values())
