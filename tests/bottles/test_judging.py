"""What the register knows becomes the facts that the rules judge; what nobody recorded is asked for."""

from __future__ import annotations

from datetime import date, timedelta
from typing import Any

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from bottles.models import Condition, Stamp
from bottles.selectors.facts import facts_of
from bottles.selectors.judging import judge_bottle, judge_many, rulebook
from bottles.services.standing import restate
from shop.base import clock
from tests.factories import (
    THEN,
    ActFactory,
    BottleFactory,
    ConsentFactory,
    CustomerFactory,
    PolicyFactory,
    owned,
    placed,
    weighed,
)

pytestmark = pytest.mark.django_db

ON = date(2026, 6, 15)


def stamped(bottle: Any, kind: str, year: int, month: int | None, **more: Any) -> Stamp:
    return Stamp.objects.create(
        act=ActFactory(), bottle=bottle, kind=kind, year=year, month=month, typed=f"{month}/{year}", **more
    )


def whole(**more: Any) -> Any:
    """A bottle of the shop of which everything is known, tested a year before."""
    bottle = owned(BottleFactory(last_held="nitrous", **more))
    stamped(bottle, "made", 2015, 6)
    stamped(bottle, "test", 2025, 6)
    placed(bottle)
    weighed(bottle, gross_g=7420, tare_g=6420)
    return bottle


def codes(judgement: Any) -> set[str]:
    return {reason.code for reason in judgement.reasons}


def test_of_a_bottle_known_whole_only_the_look_is_left(shop: Any) -> None:
    judgement = judge_bottle(whole(), shop=shop, on=ON)
    assert judgement.only_the_look_is_left
    assert judgement.limit.grams == 4614  # 6800 mL / 454.53 mL a pound (27.737 in³, 49 CFR 173.304a) × 0.68 × 453.59 g
    assert judge_bottle(whole(), shop=shop, on=ON, given={"look_done": True}).may_be_filled == "yes"


def test_a_bottle_registered_and_nothing_more_may_not_be_filled(shop: Any) -> None:
    judgement = judge_bottle(BottleFactory(capacity_ml=None), shop=shop, on=ON)
    assert judgement.may_be_filled in ("no", "unknown")
    assert {"no-tare"} <= codes(judgement)
    assert {"net", "owner", "capacity"} <= set(judgement.not_judged)


def test_a_weight_from_before_it_was_out_no_longer_holds(shop: Any) -> None:
    bottle = whole()
    placed(bottle, "out", happened_at=THEN + timedelta(days=1))
    placed(bottle, "in", happened_at=THEN + timedelta(days=2))
    assert facts_of([bottle])[bottle.pk].net_g is None
    assert "net" in judge_bottle(bottle, shop=shop, on=ON).not_judged


def test_the_weight_of_a_bottle_first_brought_in_after_it_was_weighed_holds(shop: Any) -> None:
    bottle = owned(BottleFactory())
    weighed(bottle, gross_g=7420, tare_g=6420)
    placed(bottle, "in", happened_at=THEN + timedelta(hours=1))
    assert facts_of([bottle])[bottle.pk].net_g == 1000


def test_an_owner_who_withdrew_his_word_stops_the_fill_but_not_the_emptying(shop: Any) -> None:
    customer = CustomerFactory()
    bottle = whole()
    ConsentFactory(customer=customer, given=True, on=date(2026, 1, 1))
    ConsentFactory(customer=customer, given=False, on=date(2026, 2, 1))
    owned(bottle, customer)
    restate(bottle)
    judgement = judge_bottle(bottle, shop=shop, on=ON)
    assert judgement.may_be_filled == "no" and "no-consent" in codes(judgement)
    assert judgement.may_be_emptied in ("yes", "only after")


def test_a_struck_stamp_counts_no_more(shop: Any) -> None:
    from bottles.models import StampStrike

    bottle = whole()
    wrong = stamped(bottle, "test", 2026, 5)
    before = judge_bottle(bottle, shop=shop, on=ON).due
    StampStrike.objects.create(act=ActFactory(), stamp=wrong)
    assert judge_bottle(bottle, shop=shop, on=ON).due == before - 11  # type: ignore[operator]


def test_damage_noted_stops_both(shop: Any) -> None:
    bottle = whole()
    Condition.objects.create(act=ActFactory(), bottle=bottle, code="dent", seen_on=date(2026, 6, 1))
    judgement = judge_bottle(bottle, shop=shop, on=ON)
    assert (judgement.may_be_filled, judgement.may_be_emptied) == ("no", "no")


def test_a_bottle_without_pressure_is_dried_and_purged_first(shop: Any) -> None:
    bottle = whole()
    Condition.objects.create(act=ActFactory(), bottle=bottle, code="without pressure", seen_on=date(2026, 6, 1))
    assert "dry-and-purge" in codes(judge_bottle(bottle, shop=shop, on=ON))
    seen_to = judge_bottle(bottle, shop=shop, on=ON, given={"dried_and_purged": True, "look_done": True})
    assert seen_to.may_be_filled == "yes"


def test_an_empty_bottle_is_asked_whether_it_kept_pressure(shop: Any) -> None:
    bottle = owned(BottleFactory(last_held="nitrous"))
    stamped(bottle, "test", 2025, 6)
    placed(bottle)
    weighed(bottle, gross_g=6430, tare_g=6420)
    assert "pressure kept" in judge_bottle(bottle, shop=shop, on=ON).not_judged


def test_the_policy_of_the_day_holds(shop: Any) -> None:
    bottle = whole()
    PolicyFactory(effective_from=date(2026, 6, 1), values={"own_limit_per_mille": 950})
    assert rulebook(shop, date(2026, 5, 31)).policy.own_limit_per_mille is None
    assert judge_bottle(bottle, shop=shop, on=ON).limit.grams == 4614 * 950 // 1000
    assert judge_bottle(bottle, shop=shop, on=ON).limit.binds == "shop"


def test_a_country_without_a_file_judges_nothing_until_its_rules_are_entered(shop: Any) -> None:
    shop.country, shop.authority = "NZ", "Invented Authority"
    bottle = whole(mark="DOT-3AL1800")
    assert judge_bottle(bottle, shop=shop, on=ON).may_be_filled in ("no", "unknown")
    by_hand = {"intervals": {"DOT-3AL": 5}, "per_mille": 670, "water": "p200", "stamp_order": "month first"}
    PolicyFactory(effective_from=date(2026, 6, 1), values={"by_hand": by_hand})
    judgement = judge_bottle(bottle, shop=shop, on=ON)
    assert judgement.limit.grams == 4551  # 0.67 × 6.8 L × 0.9991 kg/L (water at 15 °C, P200) = 4551.9 g, floored
    assert judgement.due is not None


def test_many_bottles_take_as_many_queries_as_one(shop: Any) -> None:
    bottles = [whole() for _ in range(12)]
    with CaptureQueriesContext(connection) as one:
        judge_many(bottles[:1], shop=shop, on=ON)
    with CaptureQueriesContext(connection) as many:
        judge_many(bottles, shop=shop, on=ON)
    assert len(many) == len(one)


def test_today_is_the_shops_day(shop: Any) -> None:
    assert rulebook(shop).on == clock.today(shop)
