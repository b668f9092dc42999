"""The day's fill plan: asked for at the desk, and what it says of bottles and supply bottles."""

from __future__ import annotations

import re
import uuid
from collections.abc import Iterator
from datetime import timedelta
from typing import Any

import pytest
from django.urls import reverse

from bottles.models import DayPlan, DayPlanResult, Standing, Supply
from bottles.services import refill_steps
from bottles.services.plan_again import KIND
from bottles.services.plan_day import gather
from bottles.services.plan_waiting import wants_filling
from shop.base import clock
from shop.base.models import Job, Place
from tests import factories
from tests.bottles.of_plan import INPUTS, NOW, a_morning, many, plan, told, used, wants
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Iterator[Works]:
    yield from a_morning(shop, front_desk)


def typed(**changes: str) -> dict[str, str]:
    return {
        "form_key": str(uuid.uuid4()), "people": "1", "fill_minutes": "15", "change_minutes": "5", "opens": "08:00",
        "closes": "18:00", "room": "68 F", "supply": "68 F", "lead_days": "2",
    } | changes  # fmt: skip


def test_a_small_day_is_planned_at_once(works: Works, client_of: Any) -> None:
    client = client_of(works.person)
    answer = client.post(reverse("bottles:plan_new"), typed())
    assert answer.status_code == 302, answer.content.decode()
    html = client.get(answer.url).content.decode()
    assert "T-0412" in html and "S-07" in html and "Made at 09:00" in html
    assert "1 of 1 good enough" in html
    assert not Job.objects.filter(kind=KIND).exists()


def test_the_form_arriving_twice_makes_one_plan(works: Works, client_of: Any) -> None:
    client, form = client_of(works.person), typed()
    client.post(reverse("bottles:plan_new"), form)
    client.post(reverse("bottles:plan_new"), form)
    assert DayPlan.objects.count() == 1


@pytest.mark.parametrize(
    ("field", "value", "said"),
    [("people", "0", "whole number, 1 to 20"), ("closes", "07:00", "Filling ends after it begins"),
     ("room", "90 C", "between -40 °C and 52 °C"), ("opens", "soon", "time of day")],
)  # fmt: skip
def test_a_day_that_cannot_be_is_refused_with_a_sentence(works: Works, client_of: Any, field: str, value: str, said: str) -> None:
    answer = client_of(works.person).post(reverse("bottles:plan_new"), typed(**{field: value}))
    assert answer.status_code == 422 and said in answer.content.decode()
    assert not DayPlan.objects.exists()


def test_a_promise_that_breaks_says_by_how_much(works: Works, client_of: Any) -> None:
    wants(works.bottle, NOW + timedelta(minutes=5))
    result = told(plan(works))
    assert result["broken"] == result["least_broken"] == 1
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Will break" in html and re.search(r"\d+ min late", html)


def test_a_promise_for_tomorrow_presses_nobody_today(works: Works) -> None:
    wants(works.bottle, NOW + timedelta(days=1))
    assert all(fill["promised_s"] is None for fill in told(plan(works))["fills"])


def test_what_must_not_be_filled_is_named_with_its_reason(works: Works, client_of: Any) -> None:
    dented = works.bottle_to_fill("T-0500")
    factories.ConditionFactory(bottle=dented, code="dent")
    wants(dented)
    result = told(plan(works))
    assert [one["bottle"] for one in result["left_out"]] == ["T-0500"]
    assert "T-0500" not in [fill["bottle"] for fill in result["fills"]]
    assert "Must not be filled" in client_of(works.person).get(reverse("bottles:plan")).content.decode()


def test_a_supply_bottle_that_nobody_weighed_is_not_counted_on(works: Works) -> None:
    works.connected("S-09", net_g=None, last_held="nitrous")
    result = told(plan(works))
    assert [one["code"] for one in result["not_counted"]] == ["S-09"]
    assert "Weigh it" in result["not_counted"][0]["why"]


def test_a_supply_bottle_known_by_gauge_alone_says_what_it_holds_at_least_and_how_to_count_on_it(
    works: Works, client_of: Any
) -> None:  # fmt: skip
    """Vapour alone may show 49.5 bar at 20 °C; what was drawn since is taken off."""
    supply = works.connected("S-09", net_g=None, last_held="nitrous")
    refill = works.open(supply=supply)
    first = told(plan(works))["not_counted"]
    vapour_g = 0.029 * 158.1e3  # 158.1 kg/m3 of saturated vapour at 20 °C, from memory
    assert [one["code"] for one in first] == ["S-09"] and 0.85 * vapour_g < first[0]["least_g"] < vapour_g
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Known by its gauge alone, read Tue 3 Mar 09:00: it holds at least" in html and "Weigh it, then it" in html
    refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(1_300, line_off=False))
    second = told(plan(works))["not_counted"]
    assert second[0]["least_g"] == first[0]["least_g"] - 1_000
    refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(1_300), ended_by="by hand")
    works.weigh(supply.bottle, 33_500 + 12_000, happened_at=NOW, reason="first weighing")
    assert not told(plan(works))["not_counted"]


def test_rows_name_the_owner_and_lead_to_the_supply_bottles(works: Works, client_of: Any) -> None:
    customer = factories.CustomerFactory(name="Ostrander")
    factories.ConsentFactory(customer=customer)
    wants(factories.owned(works.bottle, customer), NOW + timedelta(hours=4))
    wants(works.bottle_to_fill("T-0413"))
    wants(factories.owned(works.bottle_to_fill("T-0414"), factories.CustomerFactory(name="Farrow")))  # never asked
    result = told(plan(works))
    assert len(result["fills"]) == 2 and len(result["left_out"]) == 1
    html = " ".join(client_of(works.person).get(reverse("bottles:plan")).content.decode().split())
    assert "Ostrander, promised for 13:00" in html and html.count("Ostrander") == 2
    assert "the shop <br> from" in html and "Farrow <br> Not known: whether its owner agrees." in html
    assert f'<a href="{reverse("bottles:bottle", args=["S-07"])}">S-07</a>' in html


@pytest.mark.parametrize(
    ("grams_a_day", "by", "if_less"), [(1_800, "2026-03-09", "2026-03-09"), (2_083, "2026-03-09", "2026-03-06")]
)
def test_the_order_day_tells_what_the_stock_may_be_off_by_where_that_moves_it(
    works: Works, client_of: Any, grams_a_day: int, by: str, if_less: str
) -> None:  # fmt: skip
    """10.418 kg can be drawn, known to ± 24 g; five days at 2.083 kg take 10.415 kg."""
    used(works, grams_a_day)
    order = told(plan(works, lead_days=1))["order"]
    assert (order["order_by"], order["order_by_if_less"], order["error_g"]) == (by, if_less, 24)
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Order by Monday 9 Mar" in html and "±" in html
    assert ("the last day to order would be Friday 6 Mar" in html) == (by != if_less)


def test_a_bottle_that_waits_for_a_test_is_not_planned(works: Works) -> None:
    wants(works.bottle, wanted="hydrostatic test")
    assert told(plan(works))["count"] == 0
    assert wants_filling("fill to its limit; the customer waits") and not wants_filling("weigh")


def test_a_freezer_entered_for_the_plan_is_used_where_none_is_written_down(works: Works) -> None:
    Place.objects.all().filter(kind="freezer").update(active=False)
    assert told(plan(works))["colds"] == []
    assert told(plan(works, freezer_mk=258_150, freezer_takes=2))["colds"][0]["takes"] == 2


def test_grams_are_neither_made_nor_lost(works: Works) -> None:
    wants(works.bottle_to_fill("T-0413", net_g=900))
    result = told(plan(works))
    came = sum(draw["moved_g"] + draw["line_g"] for fill in result["fills"] for draw in fill["draws"])
    went = sum(source["net_g"] - source["end_g"] for source in result["sources"])
    assert abs(came - went) <= 2 * len(result["fills"])


def test_an_open_refill_holds_its_hose(works: Works) -> None:
    works.open()
    day = gather(works.shop, INPUTS).day
    assert day.stations_free_s[0] > 0 and not day.bottles


def test_a_refill_that_waits_to_be_chilled_is_planned_where_it_is_open(works: Works, client_of: Any) -> None:
    refill = works.open()
    wants(works.bottle, NOW + timedelta(hours=3))
    until = NOW + timedelta(hours=1)
    refill_steps.wait(key=key(), person=works.person, refill=refill, version=refill.version, until=until, note="chill")
    result = told(plan(works))
    assert [(fill["bottle"], fill["goes_on"]) for fill in result["fills"]] == [("T-0412", True)]
    assert result["being_filled"] == [] and gather(works.shop, INPUTS).day.stations_free_s[0] == 0
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Its refill is open and goes on." in html and "Every promise is kept." in html


def test_a_refill_that_goes_on_now_is_named_beside_the_plan(works: Works, client_of: Any) -> None:
    works.open()
    assert [one["bottle"] for one in told(plan(works))["being_filled"]] == ["T-0412"]
    assert "Being filled now" in client_of(works.person).get(reverse("bottles:plan")).content.decode()


def test_bottles_that_stand_in_the_freezer_take_its_room(works: Works) -> None:
    freezer = Place.objects.get(code="FREEZER")
    inside = works.bottle_to_fill("T-0413")
    factories.placed(inside, "moved", wanted="refill", place=freezer, happened_at=NOW - timedelta(hours=9))
    other = works.bottle_to_fill("T-0414")
    factories.placed(other, "moved", place=freezer, happened_at=NOW - timedelta(hours=9))
    Standing.objects.filter(bottle=inside).update(waits=True)
    gathered = gather(works.shop, INPUTS)
    assert gathered.rooms_taken == (1,) and gathered.day.slots == (2,)
    cold = next(one for one in gathered.day.bottles if one.code == "T-0413")
    assert cold.stands_in == 0 and cold.starts[0].temperature_k < 260


def test_a_fill_tells_its_span_and_why_so_much(works: Works, client_of: Any) -> None:
    Place.objects.filter(kind="freezer").update(active=False)
    fill = told(plan(works))["fills"][0]
    assert fill["low_g"] <= fill["final_g"] <= fill["high_g"]
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Why so much" in html and "slow to condense" in html and "condensation figure" in html


def test_a_day_without_a_supply_bottle_says_so_and_to_order(works: Works, client_of: Any) -> None:
    Supply.objects.all().delete()
    Standing.objects.filter(bottle__use="supply").update(is_in=False)
    plan(works)
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "There is no supply bottle that can be counted on." in html and "Order today" in html
    assert "time constant" not in html and "condensation figure" not in html


def test_a_promise_that_was_late_before_the_plan_is_told_apart(works: Works, client_of: Any) -> None:
    wants(works.bottle, NOW - timedelta(minutes=10))
    plan(works)
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "Late already" in html and "The only promise will break; no plan can keep more." in html


def test_a_result_told_in_another_form_is_not_shown(works: Works, client_of: Any) -> None:
    plan(works)
    DayPlanResult.objects.update(result={"fills": []})
    answer = client_of(works.person).get(reverse("bottles:plan"))
    assert answer.status_code == 200 and "Plan anew" in answer.content.decode()


def test_gathering_a_day_asks_no_more_of_ten_bottles_than_of_two(works: Works, django_assert_max_num_queries: Any) -> None:
    from django.db import connection
    from django.test.utils import CaptureQueriesContext

    many(works, 1)
    with CaptureQueriesContext(connection) as few:
        gather(works.shop, INPUTS)
    many_more = [works.bottle_to_fill(f"T-{700 + number}") for number in range(8)]
    for bottle in many_more:
        wants(bottle)
    works.connected("S-11")
    with django_assert_max_num_queries(len(few.captured_queries)):
        assert len(gather(works.shop, INPUTS).day.bottles) == 10


def test_the_page_asks_no_more_for_a_long_plan(
    works: Works, client_of: Any, run_jobs: Any, django_assert_max_num_queries: Any
) -> None:  # fmt: skip
    from django.db import connection
    from django.test.utils import CaptureQueriesContext

    client = client_of(works.person)
    plan(works)
    with CaptureQueriesContext(connection) as few:
        client.get(reverse("bottles:plan"))
    many(works)
    plan(works)
    run_jobs()
    with django_assert_max_num_queries(len(few.captured_queries)):
        client.get(reverse("bottles:plan"))


def test_the_shops_good_enough_is_its_policy(works: Works) -> None:
    assert gather(works.shop, INPUTS).day.good_per_mille == 950
    factories.PolicyFactory(effective_from=NOW.date(), values={"good_enough_per_mille": 800})
    assert gather(works.shop, INPUTS).day.good_per_mille == 800


def test_the_manager_decides_what_is_good_enough(shop: Any, manager: Any, client_of: Any) -> None:
    from shop.base.models import Policy

    client = client_of(manager)
    form = {
        "form_key": str(uuid.uuid4()), "effective_from": clock.today(shop).isoformat(), "month_rule": "rules",
        "good_percent": "92.5",
    }  # fmt: skip
    assert client.post(reverse("rooms:policy_new"), form).status_code == 302
    assert Policy.objects.latest("id").values["good_enough_per_mille"] == 925
    assert "92.5 % of the target" in client.get(reverse("rooms:policies")).content.decode()


def test_the_counter_leads_the_desk_to_the_plan_and_not_the_bench(works: Works, technician: Any, client_of: Any) -> None:
    address = f'href="{reverse("bottles:plan")}"'
    assert address in client_of(works.person).get(reverse("rooms:counter")).content.decode()
    assert address not in client_of(technician).get(reverse("rooms:counter")).content.decode()
