"""The plan is made anew after what changes it, in the background, and stopped by who asked."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from datetime import timedelta
from typing import Any

import pytest
from django.urls import reverse

from bottles.models import DayPlan, DayPlanResult
from bottles.services import custody, delivering, moving, refill_steps, stations, weighing
from bottles.services.plan_again import KIND, plan_again
from bottles.views.plan_words import CAUSES
from shop.base import clock
from shop.base.models import Act, Job
from tests import factories
from tests.bottles.of_plan import NOW, a_morning, many, plan, told, wants
from tests.bottles.of_refill import Works, key, mass

pytestmark = pytest.mark.django_db


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Iterator[Works]:
    yield from a_morning(shop, front_desk)


def test_the_plan_is_made_anew_after_each_refill_and_says_so(works: Works, client_of: Any, run_jobs: Any) -> None:
    other = works.bottle_to_fill("T-0413")
    wants(other)
    plan(works)
    refill = works.open()
    assert Job.objects.filter(kind=KIND).count() == 1
    refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(4_500), ended_by="by hand")
    assert Job.objects.filter(kind=KIND).count() == 2
    run_jobs()
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    assert "after the refill of T-0412" in html
    assert DayPlanResult.objects.count() == 2  # the first job saw that a later one follows
    result = told(DayPlan.objects.get())
    assert [fill["bottle"] for fill in result["fills"]] == ["T-0413"]
    assert DayPlanResult.objects.latest("id").after_act == Act.objects.latest("id").pk


def test_checking_a_bottle_in_makes_the_plan_anew(works: Works, run_jobs: Any) -> None:
    plan(works)
    new = works.bottle_to_fill("T-0414")
    factories.placed(new, "out")
    custody.check_in(
        key=key(), person=works.person, bottle=new, place=factories.PlaceFactory(), brought_by="Ostrander", wanted="refill"
    )
    run_jobs()
    assert "T-0414" in {fill["bottle"] for fill in told(DayPlan.objects.get())["fills"]}


def _deliver(works: Works) -> None:
    supply = works.supply
    stations.disconnect(key=key(), person=works.person, supply=supply)
    place = factories.PlaceFactory()
    delivering.give_back(key=key(), person=works.person, bottle=supply.bottle, supplier="Halden Gas Supply")
    ticket = delivering.Ticket("Halden Gas Supply", "1", mass("19 kg"))
    delivering.deliver(key=key(), person=works.person, bottle=supply.bottle, ticket=ticket, place=place)


def _reverse(works: Works) -> None:
    vented = moving.vent(key=key(), person=works.person, bottle=works.bottle, reason="test of the valve", amount=mass("100 g"))
    moving.reverse_movement(key=key(), person=works.person, movement=vented, reason="another bottle")


def _strike(works: Works) -> None:
    weighing.strike(key=key(), person=works.person, weighing=works.weigh(works.bottle, 7_000, reason="ice"), reason="mistyped")


def _take_off_and_connect(works: Works) -> None:
    bottle = works.supply.bottle
    stations.disconnect(key=key(), person=works.person, supply=works.supply)
    stations.connect(key=key(), person=works.person, station=works.station, bottle=bottle)


def _weigh(works: Works) -> None:
    works.weigh(works.supply.bottle, 33_500 + 14_990)


def _let_wait(works: Works) -> None:
    refill, until = works.open(), NOW + timedelta(hours=1)
    refill_steps.wait(key=key(), person=works.person, refill=refill, version=refill.version, until=until)


WHAT_CHANGES_A_PLAN: list[tuple[Callable[[Works], None], list[str]]] = [
    (_weigh, ["bottle.weighed"]),
    (_deliver, ["supply.taken off", "bottle.given back", "bottle.delivered"]),
    (_take_off_and_connect, ["supply.taken off", "supply.connected"]),
    (_reverse, ["bottle.vented", "movement.reversed"]),
    (_strike, ["bottle.weighed", "weighing.struck"]),
    (_let_wait, ["refill.opened", "refill.waits"]),
]


@pytest.mark.parametrize(("act", "codes"), WHAT_CHANGES_A_PLAN)
def test_the_plan_is_made_anew_after_what_changes_it(
    works: Works, client_of: Any, run_jobs: Any, act: Callable[[Works], None], codes: list[str]
) -> None:  # fmt: skip
    plan(works)
    act(works)
    assert [job.args["why"] for job in Job.objects.filter(kind=KIND).order_by("id")] == codes
    run_jobs()
    html = client_of(works.person).get(reverse("bottles:plan")).content.decode()
    last = Job.objects.filter(kind=KIND).latest("id")
    assert CAUSES[codes[-1]].format(last.args["bottle"]) in html


def test_without_a_plan_for_today_what_would_change_it_costs_one_query(works: Works, django_assert_num_queries: Any) -> None:
    act = factories.ActFactory()
    with django_assert_num_queries(1):
        plan_again(act, "T-0412")


def test_without_a_plan_for_today_nothing_is_asked_for(works: Works) -> None:
    with clock.pretend(NOW - timedelta(days=1)):
        plan(works)
    works.open()
    assert not Job.objects.filter(kind=KIND).exists()


def test_a_large_day_is_made_in_the_background_while_the_last_plan_stays(works: Works, client_of: Any, run_jobs: Any) -> None:
    plan(works)
    many(works)
    plan(works)
    client = client_of(works.person)
    html = client.get(reverse("bottles:plan")).content.decode()
    assert "waiting to start" in html and "Stop this" in html and "1 of 1 good enough" in html
    run_jobs()
    html = client.get(reverse("bottles:plan")).content.decode()
    assert "of 10 good enough" in html and "Stop this" not in html


def test_who_asked_for_a_plan_may_stop_it_and_nobody_else_but_a_manager(
    works: Works, client_of: Any, make_user: Any, manager: Any
) -> None:  # fmt: skip
    plan(works)
    many(works)
    plan(works)
    job = Job.objects.filter(kind=KIND).latest("id")
    stop = reverse("rooms:job_cancel", args=[job.pk])
    other = client_of(make_user("front_desk", name="other"))
    assert other.post(stop).status_code == 403
    assert "Stop this" not in other.get(reverse("bottles:plan")).content.decode()
    answer = client_of(works.person).post(stop)
    assert answer.status_code == 302 and answer.url == reverse("bottles:plan")
    html = client_of(works.person).get(answer.url).content.decode()
    assert "cancelled" in html and "The last plan stays" in html and "1 of 1 good enough" in html


def test_work_that_is_stopped_amid_its_computing_keeps_nothing(works: Works, monkeypatch: Any) -> None:
    from bottles import tasks_plan
    from shop.base import jobs

    many(works)
    plan(works)
    job = Job.objects.get(kind=KIND)
    monkeypatch.setattr(tasks_plan, "_TOLD_EVERY", 0.0)
    real = tasks_plan.gather

    def gathered(*args: Any) -> Any:
        jobs.cancel(Job.objects.get(pk=job.pk))
        return real(*args)

    monkeypatch.setattr(tasks_plan, "gather", gathered)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "cancelled" and not DayPlanResult.objects.exists()
