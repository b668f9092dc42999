"""The day's fill plan at the desk: made, changed by a logged refill, stopped while it's being made."""

from __future__ import annotations

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from bottles.models import Bottle, Standing
from bottles.services import refill_steps
from shop.base import clock
from shop.base.models import Place
from tests import factories
from tests.bottles.of_refill import key
from tests.browser import steps
from tests.browser.desk import Desk

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


def wants_a_refill(bottle: Bottle) -> None:
    factories.placed(bottle, "moved", wanted="refill", happened_at=clock.now() - timedelta(minutes=30))
    Standing.objects.filter(bottle=bottle).update(waits=True)


def plan(page: Page) -> None:
    page.get_by_label("Filling from").fill("00:00")
    page.get_by_label("Filling until").fill("23:59")
    page.get_by_role("button", name="Plan the day").click()


@pytest.fixture
def desk(shop: Any, front_desk: Any) -> Desk:
    made = Desk(shop, front_desk)
    Place.objects.create(code="FREEZER", name="Chest freezer", kind="freezer", coldest_mk=255_150, takes_at_once=3)
    wants_a_refill(made.bottle)
    wants_a_refill(made.bottle_to_fill("T-0413"))
    return made


@pytest.mark.parametrize("width", [360, 1440])
def test_the_desk_plans_the_day_and_the_plan_follows_a_logged_refill(
    new_page: Callable[..., Page], desk: Desk, run_jobs: Any, width: int
) -> None:  # fmt: skip
    page = new_page(width=width)
    steps.sign_in(page, "front desk")
    page.goto("/counter")
    page.get_by_role("link", name="Plan the day").click()
    expect(page.locator("main")).to_contain_text("Today isn't planned yet.")
    page.get_by_role("link", name="Plan the day").click()
    expect(page.locator("main")).to_contain_text("Chest freezer")
    assert steps.overflow(page) == 0 and steps.violations(page) == []
    plan(page)
    assert steps.h1(page).startswith("Fill plan for")
    order = page.get_by_role("region", name="In this order")
    expect(page.locator("main")).to_contain_text("Made at")
    expect(order).to_contain_text("T-0412")
    expect(order).to_contain_text("T-0413")
    assert steps.overflow(page) == 0 and steps.violations(page) == []
    refill = desk.open()
    refill_steps.weigh_refill(key=key(), person=desk.person, refill=refill, weight=desk.weight(4_500), ended_by="by hand")
    page.goto("/plan")
    expect(page.locator("main")).to_contain_text("waiting to start")
    run_jobs()
    # The page asks again by itself and shows the new plan.
    expect(page.locator("main")).to_contain_text("after the refill of T-0412")
    expect(order).not_to_contain_text("T-0412")
    expect(order).to_contain_text("T-0413")


def test_on_paper_a_plan_keeps_its_rows_and_loses_what_can_only_be_pressed(new_page: Callable[..., Page], desk: Desk) -> None:
    page = new_page()
    steps.sign_in(page, "front desk")
    page.goto("/plan/new")
    plan(page)
    again, why = page.get_by_role("link", name="Plan anew"), page.get_by_text("Why so much").first
    expect(again).to_be_visible()
    page.emulate_media(media="print")
    expect(again).to_be_hidden()
    expect(why).to_be_hidden()
    expect(page.get_by_role("region", name="In this order")).to_contain_text("stop by the scale, never by this plan")
    page.emulate_media(media="screen")
    why.click()
    page.emulate_media(media="print")
    expect(why).to_be_visible()


def test_a_plan_is_stopped_while_it_is_being_made_and_the_last_one_stays(new_page: Callable[..., Page], desk: Desk) -> None:
    page = new_page()
    steps.sign_in(page, "front desk")
    page.goto("/plan/new")
    plan(page)
    expect(page.locator("main")).to_contain_text("of 2 good enough")
    for number in range(8):
        wants_a_refill(desk.bottle_to_fill(f"T-{600 + number}"))
    page.get_by_role("link", name="Plan anew").click()
    plan(page)
    page.get_by_role("button", name="Stop this").click()
    expect(page.locator("main")).to_contain_text("cancelled")
    expect(page.locator("main")).to_contain_text("The last plan stays as it was.")
    expect(page.locator("main")).to_contain_text("of 2 good enough")
