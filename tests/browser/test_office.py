"""The manager's days: the nitrous balance and what isn't accounted for, people, the shop's policy."""

from __future__ import annotations

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from shop.base import clock
from shop.base.models import Policy
from shop.people.models import User
from tests.bottles.of_refill import TARE_G, grams, key
from tests.browser import steps
from tests.browser.desk import Desk

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


def office(page: Page, link: str) -> None:
    """From the Office to one of its books."""
    page.goto("/office")
    page.get_by_role("link", name=link, exact=True).click()


def test_the_balance_lists_what_is_unaccounted_for_until_its_weighing_is_struck(
    new_page: Callable[..., Page], shop: Any, front_desk: Any
) -> None:
    from bottles.services.weighing import weigh

    desk = Desk(shop, front_desk)
    bottle = desk.bottle_to_fill("T-0440", net_g=3_000)
    weigh(
        key=key(), person=front_desk, bottle=bottle, scale=desk.scale, gross=grams(TARE_G + 2_000),
        happened_at=clock.now() - timedelta(minutes=5), reason="a leaking valve",
    )  # fmt: skip
    page = new_page()
    steps.sign_in(page, "manager")
    assert steps.h1(page) == "Office"
    office(page, "Balance")
    assert steps.h1(page) == "Nitrous"
    expect(page.locator("main")).to_contain_text("The books sum to zero")
    row = page.get_by_role("region", name="Unaccounted for").get_by_role("row").filter(has_text="T-0440")
    for told in ("2.2 ±0.1 lb short", "nobody by the books", "a leaking valve"):
        expect(row).to_contain_text(told)
    row.get_by_role("link", name="2.2 ±0.1 lb short").click()
    page.get_by_role("link", name="strike that weighing").click()
    page.get_by_label("What was wrong").fill("another bottle stood on the scale")
    steps.enter(page)
    office(page, "Balance")
    expect(page.locator("main")).to_contain_text("The books sum to zero")
    expect(page.get_by_role("region", name="Unaccounted for")).to_have_count(0)


def test_a_new_person_signs_in_and_lands_where_their_role_works(new_page: Callable[..., Page], shop: Any) -> None:
    page = new_page()
    steps.sign_in(page, "manager")
    office(page, "People")
    page.get_by_role("link", name="Add a person").click()
    page.get_by_label("Name", exact=True).fill("Ines Aldermoor")
    page.get_by_label("Signs in as").fill("Ines A")
    page.get_by_label("Technician").check()
    page.get_by_label("Password").fill("a-long-first-word-7")
    page.get_by_role("button", name="Add").click()
    expect(page.locator("main")).to_contain_text("Ines Aldermoor")
    assert User.objects.get(name="Ines Aldermoor").sign_in_name == "ines.a"
    theirs = new_page()
    steps.sign_in(theirs, "Ines A", password="a-long-first-word-7")
    assert steps.h1(theirs) == "Bay"
    answer = theirs.goto("/office")
    assert answer is not None and answer.status == 403
    assert steps.h1(theirs)


def test_a_policy_is_decided_and_says_who_and_why(new_page: Callable[..., Page], shop: Any) -> None:
    page = new_page()
    steps.sign_in(page, "manager")
    office(page, "Policy")
    page.get_by_role("link", name="Decide a policy").click()
    page.get_by_label("stop from the first day of that month").check()
    page.get_by_label("Months between visual inspections").fill("24")
    page.get_by_label("Why").fill("the insurer asks for it")
    page.get_by_role("button", name="Decide").click()
    latest = page.locator("main section").first
    for told in ("stop from the first day", "24 months", "Manager", "the insurer asks for it"):
        expect(latest).to_contain_text(told)
    assert Policy.objects.count() == 2  # the first was decided when the shop was founded
