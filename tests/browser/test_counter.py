"""Whole refills at the Counter, as the people at the front desk do them."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from bottles.models import Refill, Weighing
from tests.bottles.of_refill import TARE_G
from tests.browser import steps
from tests.browser.desk import Desk

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


def read_by_keyboard(
    page: Page, gross: str, *, gauge: str = "49.5 bar", supply: str = "20 °C", bottle: str = "-12 °C"
) -> None:
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
    expect(page.locator(".acts .main")).to_have_text("Forecast and fill")

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
    assert list(said)[1:] == [("arrival", 300), ("before", 300), ("after", 4_480), ("disconnected", 4_460)]

    steps.press(page, "T-0421")
    steps.press(page, "Hand over")
    steps.tab_to(page, page.get_by_label(re.compile("They were told")))
    page.keyboard.press("Space")
    steps.enter(page)
    bottle.standing.refresh_from_db()
    assert not bottle.standing.is_in


def test_a_second_fill_in_a_row_asks_for_two_weighings_and_the_look(new_page: Callable[..., Page], desk: Desk) -> None:
    bottle = desk.bottle_to_fill("T-0431")
    desk.open(desk.bottle_to_fill("T-0430"))
    page = new_page()
    steps.sign_in(page, "front desk")
    steps.scan(page, "T-0431")
    steps.press(page, "Forecast and fill")
    for label, offered in (("Its temperature", "20 °C"), ("Temperature of the bottle to fill", "-12 °C")):
        expect(steps.field(page, label)).to_have_value(offered)
        expect(steps.field(page, label)).to_have_accessible_description(re.compile("As read 0 min ago by front desk"))
    expect(page.get_by_label("The bottle to fill weighs", exact=True)).to_be_focused()
    page.keyboard.type(f"{TARE_G + 300} g")
    expect(page.locator("#forecast")).to_contain_text("Goes over")
    looked_by_keyboard(page)
    steps.enter(page)
    assert Refill.objects.get(bottle=bottle).draws.get().forecast is not None
    page.keyboard.type("11.0 kg")  # full, with the line off: the scale itself says what ended it
    steps.enter(page)
    assert Refill.objects.get(bottle=bottle).ended_by == "limit"


def test_going_on_from_another_supply_is_forecast_while_typing(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.connected("S-09")
    refill = desk.open(desk.bottle_to_fill("T-0432"))
    page = new_page()
    steps.sign_in(page, "front desk")
    page.goto(f"/refills/{refill.pk}/another-supply")
    page.get_by_label("The bottle being filled weighs now").fill("8.42 kg")
    expect(page.locator("#forecast")).to_contain_text("Goes over")
    assert refill.draws.count() == 1  # nothing was saved by looking


def fit_for_a_phone(page: Page) -> None:
    assert steps.overflow(page) == 0, page.url
    assert steps.too_small(page) == [], page.url
    assert steps.violations(page) == [], page.url


def tap(page: Page, name: str, role: Any = "link") -> None:
    """Look at the page with a gloved hand in mind, then tap and wait for the next."""
    fit_for_a_phone(page)
    with page.expect_navigation():
        page.get_by_role(role, name=name, exact=True).first.tap()


def touch_type(page: Page, label: str, text: str) -> None:
    """Tap a field, and type on what the phone offers."""
    steps.field(page, label).tap()
    page.keyboard.insert_text(text)


def up_to_the_forecast(page: Page, tap: Callable[..., None], write: Callable[[Page, str, str], None]) -> None:
    """From the Counter to the readings; the phone goes this way, and the page without JavaScript."""
    write(page, "Scan a label, or type a code, serial, car number or name", "T-0421")
    tap(page, "Find", "button")
    tap(page, "Check in")
    tap(page, "Check in", "button")
    tap(page, "Weigh")
    write(page, "The scale says", "6.72 kg")
    tap(page, "Record the weight", "button")
    tap(page, "Forecast and fill")
    write(page, "The bottle to fill weighs", "6.72 kg")
    write(page, "Gauge of the supply bottle", "49.5 bar")
    write(page, "Its temperature", "20 °C")
    write(page, "Temperature of the bottle to fill", "-12 °C")


def finish(
    page: Page, tap: Callable[..., None], choose: Callable[[Page, str], None], write: Callable[..., None]
) -> None:
    """From the forecast on: look, open, weigh with the line on and off, close, hand over."""
    choose(page, "I looked at each of these, and each is in order")
    tap(page, "Open the refill", "button")
    assert steps.largest(page) == "11.01 kg"
    write(page, "The scale reads", "10.9 kg")
    choose(page, "still connected")
    tap(page, "Save the weight", "button")
    write(page, "The scale reads", "10.88 kg")
    tap(page, "Save the weight", "button")
    tap(page, "Close")
    choose(page, "the limit was reached")
    tap(page, "Close", "button")
    tap(page, "Receipt")
    expect(page.locator("main")).to_contain_text("Full weight")
    tap(page, "Back")
    tap(page, "T-0421")
    tap(page, "Hand over")
    choose(page, "They were told")
    tap(page, "Hand over", "button")


def test_a_whole_refill_on_a_phone_by_touch(new_page: Callable[..., Page], desk: Desk) -> None:
    def choose(page: Page, label: str) -> None:
        page.get_by_label(label).tap()

    bottle = desk.customers("T-0421")
    page = new_page(width=360, height=740, has_touch=True, is_mobile=True)
    steps.sign_in(page, "front desk")
    up_to_the_forecast(page, tap, touch_type)
    expect(page.locator("#forecast")).to_contain_text("Goes over")
    assert steps.largest(page) == "11.01 kg"
    finish(page, tap, choose, touch_type)
    assert Refill.objects.get(bottle=bottle).ended_by == "limit"
    bottle.standing.refresh_from_db()
    assert not bottle.standing.is_in


def test_a_whole_refill_without_javascript(new_page: Callable[..., Page], desk: Desk) -> None:
    def click(page: Page, name: str, role: Any = "link") -> None:
        with page.expect_navigation():
            page.get_by_role(role, name=name, exact=True).first.click()

    def write(page: Page, label: str, text: str) -> None:
        steps.field(page, label).fill(text)

    def choose(page: Page, label: str) -> None:
        page.get_by_label(label).check()

    bottle = desk.customers("T-0421")
    page = new_page(java_script_enabled=False)
    steps.sign_in(page, "front desk")
    up_to_the_forecast(page, click, write)
    click(page, "Work out the forecast", "button")
    expect(page.locator("#forecast")).to_contain_text("Goes over")
    expect(steps.field(page, "Its temperature")).to_have_value("20 °C")
    finish(page, click, choose, write)
    assert Refill.objects.get(bottle=bottle).ended_by == "limit"
    bottle.standing.refresh_from_db()
    assert not bottle.standing.is_in
