"""The scan field in a real browser: offered while typing, chosen by arrows, left by Escape."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Page, expect

from tests.conftest import PASSWORD
from tests.factories import BottleFactory

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


def signed_in(page: Page, name: str) -> None:
    page.goto("/sign-in")
    page.get_by_label("Name", exact=True).fill(name)
    page.get_by_label("Password").fill(PASSWORD)
    page.keyboard.press("Enter")
    page.wait_for_url("**/counter")


def test_a_match_is_chosen_without_a_mouse(new_page: Callable[..., Page], front_desk: Any) -> None:
    for code in ("T-0412", "T-0413", "T-0500"):
        BottleFactory(code=code)
    page = new_page()
    signed_in(page, front_desk.sign_in_name)
    field = page.locator("#scan-main")
    expect(field).to_be_focused()
    expect(field).to_have_attribute("role", "combobox")
    page.keyboard.type("t-04")
    expect(page.get_by_role("option")).to_have_count(2)
    expect(field).to_have_attribute("aria-expanded", "true")
    page.keyboard.press("ArrowDown")
    page.keyboard.press("ArrowDown")
    second = page.get_by_role("option").nth(1)
    expect(second).to_have_attribute("aria-selected", "true")
    expect(field).to_have_attribute("aria-activedescendant", second.get_attribute("id") or "")
    expect(field).to_be_focused()
    assert Axe().run(page).response["violations"] == []
    page.keyboard.press("Escape")
    expect(page.get_by_role("option")).to_have_count(0)
    expect(field).to_have_value("t-04")
    expect(field).to_have_attribute("aria-expanded", "false")
    page.keyboard.type("1")
    expect(page.get_by_role("option")).to_have_count(2)
    page.keyboard.press("ArrowUp")  # from the field: the last
    page.keyboard.press("Enter")
    page.wait_for_url("**/b/T-0413")


def test_a_whole_code_and_enter_go_there_without_waiting_for_matches(
    new_page: Callable[..., Page], front_desk: Any
) -> None:
    BottleFactory(code="T-0412")
    page = new_page(java_script_enabled=False)
    signed_in(page, front_desk.sign_in_name)
    page.locator("#scan-main").fill("https://bottles.example/b/T-0412")
    page.keyboard.press("Enter")
    page.wait_for_url("**/b/T-0412")
