"""A refill is opened in one submission, or refused with one sentence and nothing half-written."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from bottles.models import Condition, Decision, Draw, Forecast, Refill, RefillCheck, ScaleCheck, Supply, Weighing
from bottles.services import conditions
from bottles.services.refilling import open_refill
from shop.base import clock
from shop.base.errors import AlreadyDone, Refusal
from shop.base.models import Act
from tests import factories
from tests.bottles.of_refill import LIMIT_G, TARE_G, Works, degrees, gauge, grams, holds, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def refused(works: Works, **changes: Any) -> str:
    """Open a refill that must be refused; return the code."""
    before = [model.objects.count() for model in (Refill, Weighing, Forecast, Draw)]
    answers = Decision.objects.count()
    with pytest.raises(Refusal) as caught:
        open_refill(key=key(), person=works.person, opening=works.opening(**changes))
    assert [model.objects.count() for model in (Refill, Weighing, Forecast, Draw)] == before
    assert Decision.objects.count() == answers + (caught.value.code == "must not be filled")  # that answer is kept
    return caught.value.code


def test_one_submission_keeps_everything_that_was_decided_and_read(works: Works) -> None:
    refill = works.open()
    assert (refill.limit_g, refill.target_g, refill.method) == (LIMIT_G, LIMIT_G, "chilled")
    assert refill.person == works.person
    assert refill.decision.may_fill == "yes" and refill.decision.limit_g == LIMIT_G
    assert refill.decision.inputs["look"]["outside"] is True
    assert refill.checks.filter(passed=True).count() == RefillCheck.objects.count() >= 8
    draw = refill.draws.get()
    assert draw.source.code == "S-07"
    assert draw.forecast is not None and draw.forecast.readings["gauge"]["typed"] == "49.5 bar"
    assert draw.forecast.low_g <= draw.forecast.likely_g <= draw.forecast.high_g
    before = Weighing.objects.get(act=refill.act, bottle=works.bottle)
    assert (before.step, before.net_g) == ("before", 300)
    assert Act.objects.filter(pk=refill.act_id, code="refill.opened", subject="bottle:T-0412").exists()


def test_it_says_where_to_stop_less_the_scales_uncertainty_and_with_the_hoses_pull(works: Works) -> None:
    # √(20² + 5²) = 20.6, so ±21 g; 6420 + 4614 − 21 = 11 013 g; a scale in tens of grams shows 11.01 kg.
    assert works.open().stop_at_g == 11_010
    works.station.hose_pull_g = 60
    works.station.save()
    other = works.bottle_to_fill("T-0413")
    # 11 013 + 60 = 11 073 g, shown as 11.07 kg.
    assert works.open(other).stop_at_g == 11_070


def test_a_second_arrival_of_the_form_opens_nothing_more(works: Works) -> None:
    opening, once = works.opening(), key()
    open_refill(key=once, person=works.person, opening=opening)
    with pytest.raises(AlreadyDone):
        open_refill(key=once, person=works.person, opening=opening)
    assert Refill.objects.count() == 1


def test_a_bottle_is_in_one_open_refill_at_most(works: Works) -> None:
    works.open()
    assert refused(works) == "open refill"


def test_the_look_must_be_finished(works: Works) -> None:
    look = dict(works.opening().look)
    look["valve"] = None
    assert refused(works, look=look) == "look not done"
    look["valve"], look["hose"] = True, False  # put right on the spot: nothing to note, but not done either
    assert refused(works, look=look) == "look not done"


def test_a_failed_item_is_noted_on_the_bottle_and_refuses_the_fill(works: Works) -> None:
    look = works.opening().look | {"valve": False}
    found = open_refill(key=key(), person=works.person, opening=works.opening(look=look))
    assert (found.refill, found.noted) == (None, ("valve damaged",))
    assert Refill.objects.count() == 0
    assert Condition.objects.get(bottle=works.bottle).code == "valve damaged"
    kept = Decision.objects.get(bottle=works.bottle)
    assert kept.may_fill == "no" and kept.inputs["look"]["valve"] is False
    assert refused(works) == "must not be filled"


def test_the_scale_is_checked_before_the_days_first_fill(works: Works) -> None:
    scale = factories.ScaleFactory(name="scale C")
    works.station.scale = scale
    works.station.save()
    assert refused(works) == "scale check due"
    works.check(scale)
    assert works.open().station.scale == scale


def test_a_check_that_failed_stops_the_scale(works: Works) -> None:
    ScaleCheck.objects.create(
        act=factories.ActFactory(), scale=works.scale, known_g=10_000, known_typed="10 kg", read_g=10_200, read_typed="10.2 kg",
        passed=False, happened_at=clock.now(),
    )  # fmt: skip
    assert refused(works) == "scale check due"


def test_what_the_scale_says_now_decides_not_what_the_books_say(works: Works) -> None:
    full = grams(TARE_G + LIMIT_G)
    assert refused(works, bottle_weight=full, reason="filled this morning") == "must not be filled"


def test_a_gap_of_a_bottle_that_never_left_asks_for_a_reason(works: Works) -> None:
    lighter = grams(TARE_G + 100)
    assert refused(works, bottle_weight=lighter) == "needs a reason"
    works.open(bottle_weight=lighter, reason="vented on the bench")
    assert holds(works.bottle) == 100


def test_a_bottle_condemned_or_retired_meanwhile_is_refused(works: Works) -> None:
    first, second = works.opening(), works.opening(works.bottle_to_fill("T-0413"))
    conditions.note_condition(
        key=key(), person=works.person, bottle=works.bottle, code="condemned", seen_on=clock.today(works.shop)
    )
    conditions.retire(key=key(), person=works.person, bottle=second.asked.bottle, reason="sold for scrap")
    codes = []
    for opening in (first, second):
        with pytest.raises(Refusal) as caught:
            open_refill(key=key(), person=works.person, opening=opening)
        codes.append(caught.value.code)
    assert codes == ["must not be filled", "retired"]
    assert Refill.objects.count() == 0


def test_a_supply_bottle_that_was_taken_off_or_stopped_meanwhile_is_refused(works: Works) -> None:
    opening = works.opening()
    conditions.note_condition(
        key=key(), person=works.person, bottle=works.supply.bottle, code="leak", seen_on=clock.today(works.shop)
    )
    with pytest.raises(Refusal) as caught:
        open_refill(key=key(), person=works.person, opening=opening)
    assert caught.value.code == "may not be emptied"
    Supply.objects.all().delete()
    with pytest.raises(Refusal) as caught:
        open_refill(key=key(), person=works.person, opening=opening)
    assert caught.value.code == "taken off"


def test_an_overdue_supply_bottle_may_still_be_emptied(works: Works) -> None:
    """49 CFR 180.205(c): what was filled before it fell due may be emptied."""
    overdue = works.connected("S-09")
    overdue.bottle.stamps.all()  # its last test was 06/2025; a second one reads much older
    factories.StampFactory(bottle=works.supply.bottle, kind="test", year=2011, month=1, typed="01/2011")
    assert works.open(supply=works.supply).draws.get().source == works.supply.bottle


def test_a_bottle_that_hangs_on_a_station_or_is_out_is_not_filled(works: Works) -> None:
    opening = works.opening()
    factories.placed(works.bottle, "out", happened_at=clock.now())
    with pytest.raises(Refusal) as caught:
        open_refill(key=key(), person=works.person, opening=opening)
    assert caught.value.code == "not in"
    other = works.bottle_to_fill("T-0413")
    opening = works.opening(other)
    Supply.objects.create(station=works.station, bottle=other)
    with pytest.raises(Refusal) as caught:
        open_refill(key=key(), person=works.person, opening=opening)
    assert caught.value.code == "on a station"


def test_a_bottle_found_without_pressure_goes_through_drying_and_purging(works: Works) -> None:
    empty = works.bottle_to_fill("T-0414", net_g=0)
    weight = {"bottle_weight": grams(TARE_G), "start": "vented"}
    assert refused(works, bottle=empty, **weight) == "must not be filled"
    assert refused(works, bottle=empty, pressure_kept=False, **weight) == "must not be filled"
    assert works.open(empty, pressure_kept=False, dried_and_purged=True, **weight).decision.may_fill == "yes"


def test_a_danger_sign_keeps_a_refill_shut_until_the_supply_is_weighed(works: Works) -> None:
    # 75 bar at 20 °C: nitrous oxide shows 49.5 bar there (NIST WebBook, saturation at 293.15 K: 50.53 bar absolute).
    assert refused(works, gauge=gauge("75 bar")) == "danger sign"
    works.station.supply_scale = factories.ScaleFactory(capacity_g=100_000)
    works.station.save()
    # Weighed, and still above what so much can show: air or push gas, or a wrong reading.
    assert refused(works, gauge=gauge("75 bar"), supply_weight=grams(33_500 + 15_000)) == "danger sign"
    # Full of liquid by its weight too: 23.96 kg in 29 L show 75 bar at 20 °C by the equation of state. Emptying it is what helps.
    answer = works.forecast(gauge=gauge("75 bar"), supply_weight=grams(33_500 + 23_950))
    assert answer.danger and not answer.blocked


def test_a_target_below_the_limit_is_where_it_stops(works: Works) -> None:
    refill = works.open(target=grams(4_000))
    assert (refill.target_g, refill.limit_g) == (4_000, LIMIT_G)
    assert refill.stop_at_g == 10_390  # 6420 + 4000 − 21 = 10 399


def test_a_target_above_the_limit_is_the_limit(works: Works) -> None:
    assert works.open(target=grams(9_000)).target_g == LIMIT_G


def test_without_a_scale_at_the_station_nothing_is_filled(works: Works) -> None:
    works.station.scale = None
    works.station.save()
    assert refused(works) == "no scale"


def test_temperatures_that_no_bottle_has_are_refused_with_a_sentence(works: Works) -> None:
    from shop.physics.errors import OutOfRange

    with pytest.raises(OutOfRange):
        works.opening(bottle_temperature=degrees("70 °C"))


def test_a_steel_star_asks_for_its_own_items(works: Works) -> None:
    """49 CFR 180.209(b): out of rack or vehicle, hammer test."""
    steel = works.bottle_to_fill("T-0415", mark="DOT-3AA2015", wall="steel")
    factories.StampFactory(bottle=steel, kind="test", year=2025, month=7, star=True, typed="07/2025 *")
    codes = set(works.opening(steel).look)
    assert {"star apart", "star hammer"} <= codes
    look = works.opening(steel).look | {"star hammer": False}
    found = open_refill(key=key(), person=works.person, opening=replace(works.opening(steel), look=look))
    assert found.noted == ("rings dull",)
