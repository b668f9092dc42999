"""The technician's room: cars, what is on each, and the way to their bottles."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from tests import factories
from tests.browser import steps

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


def test_a_technician_finds_a_car_its_bottle_and_adds_a_car(new_page: Callable[..., Page], technician: Any) -> None:
    owner = factories.CustomerFactory(name="Ostrander")
    car = factories.CarFactory(number="27", customer=owner)
    bottle = factories.placed(factories.owned(factories.BottleFactory(code="T-0413"), owner), "car", car=car)
    factories.weighed(bottle, gross_g=10_940, tare_g=6_420)
    page = new_page()
    steps.sign_in(page, "technician")
    assert steps.h1(page) == "Bay"
    row = page.locator("main li").filter(has_text="Ostrander")
    expect(row).to_contain_text("10.0 ±0.1 lb")
    expect(row).to_contain_text("weighed")
    row.get_by_role("link", name="27").click()
    assert steps.h1(page) == "Car 27 (Sprint)"
    page.get_by_role("link", name="T-0413").click()
    assert steps.h1(page) == "T-0413"
    expect(page.locator(".head").first).to_contain_text("27")
    page.get_by_role("link", name="Bay", exact=True).click()
    page.get_by_role("link", name="Add a car").click()
    page.get_by_label("Number", exact=True).fill("88")
    steps.enter(page)
    page.get_by_role("link", name="Bay", exact=True).click()
    expect(page.locator("main li").filter(has_text="88")).to_have_count(1)
