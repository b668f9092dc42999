"""The books follow the scale while a refill is open: posted at each weighing, the sums always nothing."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

import pytest

from bottles.models import Movement, Refill, Weighing
from bottles.selectors.refills import courses_of
from bottles.services import refill_steps as steps
from bottles.services.weighing import strike
from shop.base import clock
from shop.base.errors import Refusal
from tests import factories
from tests.bottles.books import check_books
from tests.bottles.of_refill import LIMIT_G, SUPPLY_NET_G, SUPPLY_TARE_G, TARE_G, Works, balance, grams, holds, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def weighed(works: Works, refill: Refill, net_g: int, ended_by: str = "", **more: Any) -> steps.Weighed:
    return steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(net_g, **more), ended_by=ended_by
    )


def go_on(works: Works, refill: Refill, supply: Any, net_g: int, **more: Any) -> Any:
    return steps.add_draw(
        key=key(), person=works.person, refill=refill, version=Refill.objects.get(pk=refill.pk).version,
        asked=works.asked(supply=supply), answer=works.forecast(supply=supply), weight=works.weight(net_g, line_off=False, **more),
    )


def line_of(refill: Refill, number: int = 0) -> int:
    return int(refill.draws.order_by("id")[number].forecast.result["line_g"])


def test_opening_moves_nothing(works: Works) -> None:
    works.open()
    assert Movement.objects.filter(refill__isnull=False).count() == 0
    assert holds(works.bottle) == 300 and holds(works.supply.bottle) == SUPPLY_NET_G


def test_each_weighing_posts_what_came_in_since_the_last(works: Works) -> None:
    refill = works.open()
    weighed(works, refill, 2_000, line_off=False)
    assert holds(works.bottle) == 2_000 and holds(works.supply.bottle) == SUPPLY_NET_G - 1_700
    assert balance("line") == 0  # the line is still full, nothing is lost yet
    weighed(works, refill, 4_500)
    line = line_of(refill)
    # 1.5 m of 4.8 mm bore: 27.1 mL, full of liquid at 20 °C (785 kg/m³): 21 g.
    assert line == pytest.approx(21, abs=1)
    assert holds(works.bottle) == 4_500 and holds(works.supply.bottle) == SUPPLY_NET_G - 4_200 - line
    assert balance("line") == line
    check_books()


def test_closing_posts_nothing(works: Works) -> None:
    refill = works.open()
    weighed(works, refill, 4_500)
    before = Movement.objects.count()
    steps.close_refill(key=key(), person=works.person, refill=refill, version=1, ended_by="limit")
    assert Movement.objects.count() == before
    assert Refill.objects.get().ended_by == "limit"


def test_the_line_entered_from_experience_counts_before_the_one_computed(works: Works) -> None:
    works.station.line_loss_g = 60
    works.station.save()
    weighed(works, works.open(), 4_000)
    assert balance("line") == 60
    line = Movement.objects.get(kind="refill").lines.get(target__kind="line")
    assert (line.error_g, line.origin) == (30, "computed")


def test_where_nothing_came_the_line_isnt_claimed_to_have_lost_anything(works: Works) -> None:
    refill = works.open()
    found = weighed(works, refill, 310, "abandoned")
    assert found.closed and balance("line") == 0
    # What the reading gained lies within its ±, and is posted as what it is.
    assert holds(works.bottle) == 310 and holds(works.supply.bottle) == SUPPLY_NET_G - 10
    check_books()


def test_a_supply_on_a_scale_loses_by_its_own_scale(works: Works) -> None:
    works.station.supply_scale = factories.ScaleFactory(name="scale S", capacity_g=100_000, resolution_g=20, error_g=40)
    works.station.save()
    refill = works.open(supply_weight=grams(SUPPLY_TARE_G + SUPPLY_NET_G))
    weighed(works, refill, 4_300, supply_gross=grams(SUPPLY_TARE_G + 10_960))
    # 4 040 g left, 4 000 g arrived: 40 g stayed in the line.
    assert holds(works.supply.bottle) == 10_960
    assert (holds(works.bottle), balance("line"), balance("unaccounted")) == (4_300, 40, 0)
    check_books()


def test_more_arrived_than_left_by_the_scales_own_uncertainty(works: Works) -> None:
    works.station.supply_scale = factories.ScaleFactory(name="scale S", capacity_g=100_000, resolution_g=20, error_g=40)
    works.station.save()
    refill = works.open(supply_weight=grams(SUPPLY_TARE_G + SUPPLY_NET_G))
    weighed(works, refill, 4_300, supply_gross=grams(SUPPLY_TARE_G + 11_020))
    # 3 980 g left, 4 000 g arrived: 20 g are the scales' own, within their ±.
    assert (holds(works.supply.bottle), holds(works.bottle), balance("scale"), balance("line")) == (11_020, 4_300, -20, 0)
    check_books()


def test_what_left_and_is_nowhere_isnt_put_down_to_the_line(works: Works) -> None:
    works.station.supply_scale = factories.ScaleFactory(name="scale S", capacity_g=100_000, resolution_g=20, error_g=40)
    works.station.save()
    refill = works.open(supply_weight=grams(SUPPLY_TARE_G + SUPPLY_NET_G))
    weighed(works, refill, 4_300, supply_gross=grams(SUPPLY_TARE_G + 10_000))
    assert balance("line") + balance("unaccounted") == 1_000
    assert 0 < balance("line") < 250 and holds(works.supply.bottle) == 10_000
    check_books()


def test_several_supplies_in_turn_each_give_what_arrived_while_in_force(works: Works) -> None:
    weak = works.connected("S-09", net_g=6_000)
    refill = works.open(supply=weak)
    go_on(works, refill, works.supply, 1_500)
    first_line = line_of(refill, 0)
    assert holds(weak.bottle) == 6_000 - 1_200 - first_line
    assert balance("line") == first_line  # the hose was taken over
    weighed(works, refill, 4_500)
    assert holds(works.supply.bottle) == SUPPLY_NET_G - 3_000 - line_of(refill, 1)
    assert holds(weak.bottle) == 6_000 - 1_200 - first_line
    assert [draw.source.code for draw in refill.draws.order_by("id")] == ["S-09", "S-07"]
    check_books()


def test_what_is_let_out_while_filling_is_vented_and_not_given_back(works: Works) -> None:
    refill = works.open(method="vented")
    weighed(works, refill, 2_000, line_off=False)
    weighed(works, refill, 1_800, line_off=False)
    assert (balance("vented"), holds(works.bottle), holds(works.supply.bottle)) == (200, 1_800, SUPPLY_NET_G - 1_700)
    weighed(works, refill, 4_400)
    assert (balance("vented"), holds(works.bottle)) == (200, 4_400)
    check_books()


def test_the_hoses_pull_is_no_nitrous(works: Works) -> None:
    works.station.hose_pull_g = 120
    works.station.save()
    refill = works.open()
    weighed(works, refill, 2_120, line_off=False)  # 2 000 g and the hose bearing down
    assert holds(works.bottle) == 2_000
    weighed(works, refill, 2_000)
    assert holds(works.bottle) == 2_000 and balance("vented") == 0


def test_books_that_held_less_than_came_out_are_booked_as_found(works: Works) -> None:
    small = works.connected("S-09", net_g=500)
    refill = works.open(supply=small, gauge=None)
    weighed(works, refill, 2_300, line_off=False)
    assert (holds(small.bottle), holds(works.bottle), balance("unaccounted")) == (0, 2_300, -1_500)
    weighed(works, refill, 2_300, line_off=False)
    assert (holds(small.bottle), holds(works.bottle), balance("unaccounted")) == (0, 2_300, -1_500)
    check_books()


def test_a_mistyped_weighing_is_struck_and_the_next_one_puts_the_books_right(works: Works) -> None:
    refill = works.open()
    wrong = weighed(works, refill, 3_900, line_off=False).weighing
    strike(key=key(), person=works.person, weighing=wrong, reason="read the other scale")
    weighed(works, refill, 2_000, line_off=False)
    assert (holds(works.bottle), holds(works.supply.bottle), balance("unaccounted")) == (2_000, SUPPLY_NET_G - 1_700, 0)
    check_books()


def test_a_weighing_struck_with_the_right_figure_keeps_its_place_in_the_refill(works: Works) -> None:
    refill = works.open()
    wrong = weighed(works, refill, 3_400).weighing
    strike(key=key(), person=works.person, weighing=wrong, reason="mistyped", right=works.weight(4_300).gross)
    line = line_of(refill)
    assert (holds(works.bottle), holds(works.supply.bottle)) == (4_300, SUPPLY_NET_G - 4_000 - line)
    assert balance("unaccounted") == 0
    steps.close_refill(key=key(), person=works.person, refill=refill, version=1, ended_by="by hand")
    check_books()


def test_the_first_weighing_struck_with_the_right_figure_changes_what_arrived(works: Works) -> None:
    refill = works.open()
    weighed(works, refill, 4_300)
    first = Weighing.objects.get(act=refill.act, bottle=works.bottle)
    strike(key=key(), person=works.person, weighing=first, reason="mistyped", right=works.weight(500).gross)
    assert holds(works.supply.bottle) == SUPPLY_NET_G - 3_800 - line_of(refill)
    # What it held more than the books before is nobody's arrival.
    assert (holds(works.bottle), balance("unaccounted")) == (4_300, -200)
    check_books()


def test_a_weighing_entered_late_stands_where_it_happened(works: Works) -> None:
    refill = works.open(happened_at=clock.now() - timedelta(minutes=40))
    weighed(works, refill, 4_300)
    weighed(works, refill, 2_000, line_off=False, happened_at=clock.now() - timedelta(minutes=20))
    assert holds(works.bottle) == 4_300
    assert [row.net_g for row in Weighing.objects.filter(refill=refill).order_by("happened_at")] == [2_000, 4_300]
    check_books()


def test_weighings_that_cant_be_right_post_nothing(works: Works) -> None:
    refill = works.open()
    before = Movement.objects.count(), Weighing.objects.count()
    for gross, code in ((grams(5_000), "tare_above_gross"), (grams(90_000), "beyond the scale")):
        with pytest.raises(Refusal) as caught:
            steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=steps.Weight(gross=gross, line_off=False))
        assert caught.value.code == code
    assert (Movement.objects.count(), Weighing.objects.count()) == before


def test_the_last_gram_fits(works: Works) -> None:
    refill = works.open()
    assert weighed(works, refill, LIMIT_G, "limit").closed


def test_each_refill_of_a_bottle_has_its_own_weighings_and_draws(works: Works, django_assert_num_queries: Any) -> None:
    other = works.connected("S-08")
    first = works.open()
    go_on(works, first, other, 1_500)
    weighed(works, first, 2_000, ended_by="by hand")
    second = works.open(bottle_weight=grams(TARE_G + 2_000))
    weighed(works, second, 2_600, line_off=False)
    weighed(works, second, 3_000, ended_by="by hand")
    third = works.open(bottle_weight=grams(TARE_G + 3_000))
    refills = list(Refill.objects.filter(pk__in=(first.pk, second.pk, third.pk)).order_by("id"))
    with django_assert_num_queries(4):
        courses = courses_of(refills)
    assert [course.before.net_g for course in courses if course.before] == [300, 2_000, 3_000]
    assert [[read.net_g for read in course.reads] for course in courses] == [[1_500, 2_000], [2_600, 3_000], []]
    assert [[draw.source.code for draw in course.draws] for course in courses] == [["S-07", "S-08"], ["S-07"], ["S-07"]]
