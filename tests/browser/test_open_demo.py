"""`manage.py open --demo`, as whoever tries Tarebook meets it: printed sign-ins, rooms, bottles on the counter."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from playwright.sync_api import Browser, Page, expect

from shop.demo.counter import ON_THE_COUNTER
from tests.base.test_open import home, open_shop  # noqa: F401  (fixtures)
from tests.base.workers import wait_for
from tests.browser import steps

pytestmark = [pytest.mark.browser, pytest.mark.workers, pytest.mark.slow]

ROOMS = {"front desk": "Counter", "technician": "Bay", "manager": "Office"}


@pytest.fixture
def visit(chromium: Browser) -> Iterator[Callable[[str], Page]]:
    """Open a page on a shop of its own, signed in as nobody."""
    contexts = []

    def make(address: str) -> Page:
        contexts.append(chromium.new_context(base_url=address, viewport={"width": 1440, "height": 900}))
        return contexts[-1].new_page()

    yield make
    for context in contexts:
        context.close()


def test_each_role_lands_in_its_room_and_finds_the_bottles_on_the_counter(
    open_shop: Callable[..., Any],  # noqa: F811
    visit: Callable[[str], Page],
) -> None:
    shop = open_shop("--demo").until_open()
    wait_for(lambda: re.search(r"^manager ", shop.said(), re.MULTILINE), "the sign-ins to be printed", 60)
    printed = {role: re.search(rf"^{role} (\S+) (\S+)$", shop.said(), re.MULTILINE) for role in ROOMS}
    for role, room in ROOMS.items():
        told = printed[role]
        assert told, shop.said()
        page = visit(shop.address)
        steps.sign_in(page, told[1], password=told[2])
        assert steps.h1(page) == room
        page.goto("/counter")
        page.get_by_role("progressbar").wait_for()
        expect(page.locator(".progress")).to_contain_text(re.compile(r"\d+ of \d+|waiting to start"))

    def they_stand_there() -> bool:
        page.goto("/counter")
        return all(page.locator("main").get_by_role("link", name=code).count() for code in ON_THE_COUNTER)

    wait_for(they_stand_there, "three bottles on the counter", 60)
    rows = page.locator("main li").filter(has=page.get_by_role("link", name=re.compile("^T-010[123]$")))
    words = " ".join(rows.all_inner_texts())
    assert "May be filled" in words and "Must not be filled" in words
    page.get_by_role("link", name=ON_THE_COUNTER[0], exact=True).click()
    expect(page.locator(".decision__word")).to_contain_text("May be filled")
    page.get_by_role("link", name="Forecast and fill").click()
    expect(page.locator(".stop-at__figure")).to_be_visible()
