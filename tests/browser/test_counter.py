"""Whole refills at the Counter, as the people at the front desk do them."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from bottles.models import Refill, Weighing
from tests.browser import steps
from tests.browser.desk import Desk
from tests.bottles.of_refill import TARE_G

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def desk(shop: Any, front_desk: Any) -> Desk:
    return Desk(shop, front_desk)


def check_in_by_keyboard(page: Page) -> None:
    steps.press(page, "Check in")
    expect(page.get_by_label("Brought by")).to_have_value("Ostrander")
    steps.tab_to(page, page.get_by_label("Brought by"))
    steps.enter(page)


def weigh_by_keyboard(page: Page, gross: str) -> None:
    steps.press(page, "Weigh")
    steps.tab_and_type(page, "The scale says", gross)
    steps.enter(page)


def read_by_keyboard(page: Page, gross: str, *, gauge: str = "49.5 bar", supply: str = "20 °C", bottle: str = "-12 °C") -> None:
    """The readings, in the order in which the focus meets them; it stands on the weight by itself."""
    expect(page.get_by_label("The bottle to fill weighs", exact=True)).to_be_focused()
    page.keyboard.type(gross)
    steps.tab_and_type(page, "Gauge of the supply bottle", gauge)
    steps.tab_and_type(page, "Its temperature", supply)
    steps.tab_and_type(page, "Temperature of the bottle to fill", bottle)


def looked_by_keyboard(page: Page) -> None:
    steps.tab_to(page, page.get_by_label("I looked at each of these, and each is in order"))
    page.keyboard.press("Space")


def test_a_whole_refill_by_keyboard_alone(new_page: Callable[..., Page], desk: Desk) -> None:
    bottle = desk.customers("T-0421", net_g=1_000)
    page = new_page()
    steps.sign_in(page, "front desk")
    steps.scan(page, "T-0421")
    check_in_by_keyboard(page)
    weigh_by_keyboard(page, f"{TARE_G + 300} g")
    expect(page.get_by_text("used by its owner").first).to_be_visible()

    steps.press(page, "Forecast and fill")
    read_by_keyboard(page, f"{TARE_G + 300} g")
    expect(page.locator("#forecast")).to_contain_text("Goes over")
    assert steps.largest(page) == "11.01 kg"
    looked_by_keyboard(page)
    steps.enter(page)

    refill = Refill.objects.get(bottle=bottle)
    assert steps.largest(page) == "11.01 kg"
    expect(page.get_by_label("The scale reads", exact=True)).to_be_focused()
    page.keyboard.type("10.9 kg")
    steps.tab_to(page, page.get_by_label("disconnected", exact=True))
    page.keyboard.press("ArrowUp")
    expect(page.get_by_label("still connected")).to_be_checked()
    steps.enter(page)
    expect(page.get_by_role("link", name="Close", exact=True)).to_have_count(0)
    page.keyboard.type("10.88 kg")
    steps.enter(page)
    steps.press(page, "Close")
    steps.tab_to(page, page.get_by_role("radio").first)
    page.keyboard.press("Space")
    steps.enter(page)
    refill.refresh_from_db()
    assert refill.closed_at is not None
    said = Weighing.objects.filter(bottle=bottle).order_by("id").values_list("step", "net_g")
    assert list(said)[2:] == [("before", 300), ("after", 4_480), ("disconnected", 4_460)]

    steps.press(page, "T-0421")
    steps.press(page, "Hand over")
    steps.tab_to(page, page.get_by_label(re.compile("They were told")))
    page.keyboard.press("Space")
    steps.enter(page)
    bottle.standing.refresh_from_db()
    assert not bottle.standing.is_in
