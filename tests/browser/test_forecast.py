"""The forecast as people see it: the band, why it's that wide, what would help, the course when it's opened."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page, Route, expect

from tests import factories
from tests.bottles.of_refill import TARE_G
from tests.browser import steps
from tests.browser.desk import Desk

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]

WIDTH, COURSE = "What makes the span this wide", "Course over time, other starts, fills left"


@pytest.fixture
def desk(shop: Any, front_desk: Any) -> Desk:
    desk = Desk(shop, front_desk)
    desk.forecast()  # loads the states of nitrous oxide, once a process
    return desk


def read(page: Page, *, bottle: str = "15 °C") -> None:
    """The readings of a bottle that pressure alone doesn't fill."""
    steps.sign_in(page, "front desk")
    page.goto("/b/T-0421/fill")
    readings = {
        "Gauge of the supply bottle": "49.5 bar", "Its temperature": "20 °C", "Temperature of the bottle to fill": bottle,
        "The bottle to fill weighs": f"{TARE_G + 300} g",
    }  # fmt: skip
    for label, text in readings.items():
        steps.field(page, label).fill(text)
    expect(page.locator("#forecast")).to_contain_text("Goes over")


def fold(page: Page, name: str) -> None:
    """Open a fold by keyboard, as everyone can."""
    summary = page.locator("summary", has_text=name)
    summary.focus()
    page.keyboard.press("Enter")


def fine(page: Page) -> None:
    """What axe, a phone and a finger say of the page as it stands."""
    assert steps.violations(page) == []
    page.set_viewport_size({"width": 360, "height": 740})
    assert steps.overflow(page) == 0 and steps.violations(page) == [] and steps.too_small(page) == []
    page.emulate_media(color_scheme="dark")
    assert steps.violations(page, only="color-contrast") == []


def test_the_band_its_explanation_and_what_would_help_are_seen(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page(width=1440, height=1000)
    read(page)
    forecast = page.locator("#forecast")
    expect(forecast.locator("svg.band")).to_be_visible()
    for word in ("Lowest", "Likely (dot)", "Highest", "Room to the target (thick line)"):
        expect(forecast.get_by_text(word, exact=True)).to_be_visible()
    low, mark = forecast.locator("svg.band rect").bounding_box(), forecast.locator("svg.band circle").bounding_box()
    assert low and mark and low["x"] <= mark["x"] <= low["x"] + low["width"]
    expect(forecast.get_by_role("heading", name="Would help")).to_be_visible()
    expect(forecast).to_contain_text(re.compile("Chill it to .+: full"))
    fold(page, WIDTH)
    table = forecast.get_by_role("table", name=WIDTH)
    expect(table.get_by_role("row")).to_have_count(6)
    expect(table).to_contain_text("how much vapour condenses")
    fine(page)


def test_an_answer_that_comes_late_takes_no_focus_away(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page()
    read(page)
    summary = page.locator("summary", has_text=WIDTH)
    summary.focus()
    with page.expect_response(re.compile("/fill/forecast$")):
        steps.field(page, "Target, if less than the limit").evaluate(
            "field => { field.value = '3 kg'; field.dispatchEvent(new Event('input', { bubbles: true })); }"
        )
    expect(page.locator("#forecast")).to_contain_text("target")
    expect(summary).to_be_focused()


def test_enter_opens_the_refill_and_not_the_course(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page()
    read(page)
    page.get_by_label("I looked at each of these, and each is in order").check()
    steps.field(page, "The bottle to fill weighs").focus()
    steps.enter(page)
    expect(page).to_have_url(re.compile(r"/refills/\d+$"))


def test_a_fold_that_was_opened_stays_open_while_one_types_on(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page()
    read(page)
    fold(page, WIDTH)
    before = page.locator("#forecast h2").inner_text()
    steps.field(page, "Temperature of the bottle to fill").fill("10 °C")
    expect(page.locator("#forecast h2")).not_to_have_text(before)
    expect(page.get_by_role("table", name=WIDTH)).to_be_visible()


def test_the_course_is_fetched_when_opened_and_follows_the_readings(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page(width=1440, height=1000)
    asked: list[str] = []
    page.on("request", lambda request: asked.append(request.url) if request.url.endswith("/fill/course") else None)
    read(page)
    assert asked == []  # nothing dear is worked out unasked
    fold(page, COURSE)
    course = page.locator("#course")
    expect(course.locator("svg.chart")).to_have_count(2)
    expect(course).to_contain_text("Nine tenths of what goes over")
    expect(course.get_by_role("heading", name="How the bottle starts")).to_be_visible()
    expect(course.get_by_role("heading", name="What the supply bottle still gives")).to_be_visible()
    first = course.inner_text()
    steps.field(page, "Temperature of the bottle to fill").fill("-10 °C")
    expect(course.get_by_role("table", name="How the bottle starts")).to_contain_text("as it is")
    page.wait_for_function("first => document.querySelector('#course').innerText !== first", arg=first)
    assert len(asked) >= 2
    fine(page)


def test_without_javascript_the_course_comes_by_a_button(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    page = new_page(java_script_enabled=False)
    steps.sign_in(page, "front desk")
    page.goto("/b/T-0421/fill")
    steps.field(page, "The bottle to fill weighs").fill(f"{TARE_G + 300} g")
    steps.field(page, "Its temperature").fill("20 °C")
    steps.field(page, "Temperature of the bottle to fill").fill("15 °C")
    page.locator("summary", has_text=COURSE).click()
    with page.expect_navigation():
        page.get_by_role("button", name="Show the course").click()
    expect(page.locator("#course")).to_contain_text("Nine tenths of what goes over")
    expect(page.locator("#course svg.chart").first).to_be_visible()
    expect(page.locator("#forecast")).to_contain_text("Goes over")


def test_after_the_refill_its_place_on_the_forecast_is_drawn(new_page: Callable[..., Page], desk: Desk) -> None:
    refill = desk.open(desk.bottle_to_fill("T-0421"))
    page = new_page(width=1440, height=1000)
    steps.sign_in(page, "front desk")
    page.goto(f"/refills/{refill.pk}")
    page.get_by_label("The scale reads", exact=True).fill("11.0 kg")
    page.keyboard.press("Enter")
    place = page.locator(".place-row")
    expect(place).to_contain_text("within what was forecast")
    band, mark = place.locator("rect").bounding_box(), place.locator("polygon").bounding_box()
    assert band and mark
    middle = mark["x"] + mark["width"] / 2
    assert band["x"] - 12 <= middle <= band["x"] + band["width"] + 12  # within the ± of its weighings
    fine(page)
    page.goto(f"/refills/{refill.pk}/receipt")
    expect(page.locator(".place-row svg.band")).to_be_visible()
    assert steps.overflow(page) == 0 and steps.violations(page) == []


def test_fields_follow_another_station_and_keep_what_is_typed_meanwhile(new_page: Callable[..., Page], desk: Desk) -> None:
    desk.bottle_to_fill("T-0421")
    other = desk.connected("S-08")
    other.station = desk.make_station(code="ST2", name="Station 2", scale=factories.ScaleFactory(name="scale C"))
    other.save()
    page = new_page(width=1440, height=1000)
    read(page)
    held: list[Route] = []
    page.route("**/fill/forecast", lambda route: route.continue_() if held else held.append(route))
    with page.expect_request("**/fill/forecast"):
        steps.field(page, "From").select_option(str(other.pk))
    steps.field(page, "Gauge of the supply bottle").fill("48 bar")
    steps.field(page, "It's wet or frosted").check()
    held[0].continue_()
    expect(page.get_by_text("As scale C writes it").first).to_be_visible()
    expect(steps.field(page, "Known weight put on the scale")).to_have_value("")
    expect(steps.field(page, "From")).to_have_value(str(other.pk))
    expect(steps.field(page, "Gauge of the supply bottle")).to_have_value("48 bar")
    expect(steps.field(page, "It's wet or frosted")).to_be_checked()
    expect(page.locator("#forecast")).to_contain_text("on scale C")
    fine(page)
