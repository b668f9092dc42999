"""What goes wrong at a desk: a shared machine, a sign-in that ran out, a double click, a slow answer."""

from __future__ import annotations

import re
from collections.abc import Callable
from contextlib import suppress
from typing import Any

import pytest
from django.contrib.sessions.models import Session
from playwright.sync_api import Error, Page, Request, Route, expect

from bottles.models import Custody, Weighing
from shop.base.models import Act
from shop.people.services.identifying import digest
from tests.bottles.of_refill import TARE_G
from tests.browser import steps
from tests.browser.desk import Desk

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def desk(shop: Any, front_desk: Any) -> Desk:
    return Desk(shop, front_desk)


def test_a_machine_that_stays_open_records_whose_badge_it_was(
    new_page: Callable[..., Page], desk: Desk, make_user: Callable[..., Any]
) -> None:
    ines, tomas = make_user("technician", name="Ines"), make_user("front_desk", name="Tomas")
    for person, code in ((ines, "7305"), (tomas, "9416")):
        person.code_digest = digest(code)
        person.save()
    bottle = desk.customers("T-0421")
    page = new_page()
    steps.sign_in(page, "front desk", shared=True)
    steps.scan(page, "T-0421")

    steps.press(page, "Check in")
    steps.field(page, "Note").fill("valve sticks")
    steps.field(page, "Note").press("Enter")
    expect(page.locator("#errors")).to_be_focused()
    expect(page.locator("#errors")).to_contain_text("Scan your badge or type your short code")
    expect(steps.field(page, "Note")).to_have_value("valve sticks")

    steps.tab_and_type(page, "Your badge or short code", "1111")
    page.keyboard.press("Enter")
    expect(page.locator("#errors")).to_contain_text("No one has that badge or code")
    expect(steps.field(page, "Your badge or short code")).to_have_value("")
    assert Custody.objects.filter(bottle=bottle, kind="in").count() == 1  # from when it was first weighed here

    steps.tab_and_type(page, "Your badge or short code", "7305")
    steps.enter(page)
    expect(page.locator(".history li").first).to_contain_text("Ines")
    steps.press(page, "Weigh")
    steps.tab_and_type(page, "The scale says", f"{TARE_G + 300} g")
    steps.tab_and_type(page, "Your badge or short code", "9416")
    steps.enter(page)
    expect(page.locator(".history li").first).to_contain_text("Tomas")
    assert [act.person for act in Act.objects.filter(subject="bottle:T-0421").order_by("-id")[:2]] == [tomas, ines]


def test_a_sign_in_that_ran_out_gives_back_what_was_typed(new_page: Callable[..., Page], desk: Desk) -> None:
    bottle = desk.bottle_to_fill("T-0421")
    weighings = Weighing.objects.filter(bottle=bottle)
    page = new_page()
    steps.sign_in(page, "front desk")
    page.goto("/b/T-0421/weigh")
    steps.field(page, "The scale says").fill("6.9 kg")
    steps.field(page, "Reason, if the books say otherwise").fill("topped up at the track")
    Session.objects.all().delete()
    page.get_by_role("button", name="Record the weight").click()
    expect(page.locator("main")).to_contain_text("what you typed comes back")
    assert weighings.count() == 1
    steps.sign_in_here(page, "front desk")
    expect(page.locator("main")).to_contain_text("isn't saved yet")
    expect(steps.field(page, "The scale says")).to_have_value("6.9 kg")
    expect(steps.field(page, "Reason, if the books say otherwise")).to_have_value("topped up at the track")
    page.get_by_role("button", name="Record the weight").click()
    expect(page).to_have_url(f"{steps.origin(page)}/b/T-0421")
    assert list(weighings.order_by("id").values_list("gross_g", flat=True)) == [TARE_G + 300, 6_900]


@pytest.mark.parametrize("java_script", [True, False], ids=["with JavaScript", "without"])
def test_a_double_click_saves_once(new_page: Callable[..., Page], desk: Desk, java_script: bool) -> None:
    bottle = desk.customers("T-0421")
    acts = Act.objects.count()
    page = new_page(java_script_enabled=java_script)
    steps.sign_in(page, "front desk")
    page.goto("/b/T-0421/check-in")
    page.get_by_role("button", name="Check in").dblclick()
    expect(page.locator("h1")).to_have_text("T-0421")
    assert Act.objects.count() == acts + 1
    assert Custody.objects.filter(bottle=bottle).count() == 3


def test_a_late_answer_never_takes_the_place_of_a_newer_one(new_page: Callable[..., Page], desk: Desk) -> None:
    page = new_page()
    steps.sign_in(page, "front desk")
    page.goto("/b/T-0412/fill")
    forecast, held = page.locator("#forecast"), list[Route]()

    def slow_at_first(route: Route, request: Request) -> None:
        if not held:
            held.append(route)
        else:
            route.continue_()

    for label, text in (("The bottle to fill weighs", "6.72 kg"), ("Its temperature", "20 °C")):
        steps.field(page, label).fill(text)
    expect(forecast).to_contain_text(re.compile("waits for: (the )?temperature of the bottle to fill", re.IGNORECASE))
    page.route("**/fill/forecast", slow_at_first)
    steps.field(page, "Temperature of the bottle to fill").press_sequentially("20 °C")
    for _ in range(100):
        if held:
            break
        page.wait_for_timeout(50)
    assert held and "20" in (held[0].request.post_data or "")
    steps.field(page, "Temperature of the bottle to fill").fill("-12 °C")
    page.wait_for_timeout(600)  # by now the newer question is on its way, or waits for the first to be answered
    with suppress(Error):  # the browser may have given the first one up already
        held[0].fulfill(body="<p>the late answer</p>", content_type="text/html")
    expect(forecast).to_contain_text("Goes over")
    newer = forecast.inner_text()
    page.wait_for_timeout(300)
    assert forecast.inner_text() == newer
    expect(page.locator("#live-trouble")).to_be_empty()
    steps.field(page, "Target, if less than the limit").press_sequentially("2 kg")
    expect(forecast).to_contain_text("8.39 kg")


def test_a_half_typed_name_is_found_without_javascript(new_page: Callable[..., Page], desk: Desk) -> None:
    for code in ("T-0421", "T-0422"):
        desk.customers(code)
    page = new_page(java_script_enabled=False)
    steps.sign_in(page, "front desk")
    page.locator("#scan-main").fill("T-042")
    page.keyboard.press("Enter")
    expect(page.locator("h1")).to_have_text("Find")
    expect(page.locator("main")).to_contain_text("2 matches for “T-042”")
    page.get_by_role("link", name="T-0422").click()
    expect(page.locator("h1")).to_have_text("T-0422")
    page.locator("#scan-frame").fill("no such thing")
    page.keyboard.press("Enter")
    expect(page.locator("main")).to_contain_text("Nothing in the book matches “no such thing”")


def test_an_overfull_bottle_is_a_timer_until_the_scale_lets_it_go(new_page: Callable[..., Page], desk: Desk) -> None:
    refill = desk.open()
    page = new_page(width=360, height=740)
    steps.sign_in(page, "front desk")
    page.get_by_role("link", name="T-0412").first.click()
    steps.field(page, "The scale reads").fill(f"{TARE_G + 5_000} g")
    page.get_by_label("What ended it").select_option("the limit was reached")
    page.get_by_role("button", name="Save the weight").click()
    expect(page.locator("main")).to_contain_text("The weight is kept, the refill stays open.")
    timer = page.locator(".decision--no")
    expect(steps.field(page, "The scale reads")).to_be_focused()
    expect(timer.get_by_text("Overfull by")).to_be_in_viewport()
    expect(timer).to_contain_text("Overfull by 0.9")
    expect(timer).to_contain_text("full of liquid")
    expect(timer).to_contain_text("must come out")
    expect(page.get_by_role("link", name="Close", exact=True)).to_have_count(0)
    assert steps.overflow(page) == 0
    assert steps.violations(page) == []
    page.goto(f"/refills/{refill.pk}/close")
    page.get_by_label("the limit was reached").check()
    page.get_by_role("button", name="Close").click()
    expect(page.locator("#errors")).to_contain_text("holds more than its limit")
    page.goto("/b/T-0412/hand-over")
    steps.field(page, "Handed to").fill("Ostrander")
    page.get_by_label("They were told").check()
    page.get_by_role("button", name="Hand over").click()
    expect(page.locator("#errors")).to_be_visible()
    page.goto(f"/refills/{refill.pk}")
    steps.field(page, "The scale reads").fill(f"{TARE_G + 4_500} g")
    page.get_by_label("What ended it").select_option("the limit was reached")
    page.get_by_role("button", name="Save the weight").click()
    expect(page.locator("main")).to_contain_text("Weighed and closed.")
    expect(timer).to_have_count(0)
