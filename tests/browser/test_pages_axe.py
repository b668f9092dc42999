"""Every page of the table of permissions, in a real browser, light and dark, wide and on a phone."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from playwright.sync_api import Page as BrowserPage
from playwright.sync_api import expect

from tests.browser import steps
from tests.permissions_table import OPEN, TABLE, Page, World
from tests.test_pages import is_page
from tests.test_permissions import address_of, saves

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.mark.parametrize("row", [row for row in TABLE if is_page(row)], ids=lambda row: row.name)
def test_a_page_can_be_used_by_everyone(
    row: Page,
    new_page: Callable[..., BrowserPage],
    make_user: Callable[..., Any],
    client_of: Callable[..., Any],
    live_server: Any,
) -> None:
    address = address_of(row, World())
    page = new_page(width=1440, height=900)
    if row.roles is not OPEN:
        everyone = make_user("front_desk", "technician", "manager", name="Mara K.")
        steps.let_in(page, client_of(everyone), live_server.url)
    page.goto(address)
    assert steps.h1(page)
    wrong = {"wide": steps.violations(page), "too wide at 1440": steps.overflow(page)}
    page.set_viewport_size({"width": 360, "height": 740})
    wrong |= {"narrow": steps.violations(page), "too wide at 360": steps.overflow(page), "small": steps.too_small(page)}
    page.emulate_media(color_scheme="dark")
    wrong["dark"] = steps.violations(page, only="color-contrast")
    if saves(row):
        wrong |= nothing_filled_in(page)
    assert {what: found for what, found in wrong.items() if found} == {}


def nothing_filled_in(page: BrowserPage) -> dict[str, Any]:
    """Press the page's button as it is: what is said then takes the focus and can be read by everyone."""
    button = page.locator("main form button.main").last
    if not button.count():
        return {}  # refused before there is a form
    button.press("Enter")
    page.wait_for_load_state()
    if not page.locator("#errors").count():
        return {}  # there is nothing that must be filled in
    expect(page.locator("#errors")).to_be_focused()
    return {"refused": steps.violations(page), "refused, too wide": steps.overflow(page)}
