"""What a person does at a page, and what is looked at on the way: small steps for whole jobs."""

from __future__ import annotations

import re
from typing import Any

from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Locator, Page, expect

from tests.conftest import PASSWORD

DOOR = re.compile("/sign-in")

# What a finger must hit: everything pressed or filled in that shows. A link within a line of text is let
# through, as WCAG 2.2, success criterion 2.5.8, does (exception "inline"); a tick's or choice's target is its label.
TARGETS = """least => {
  const small = [];
  for (const one of document.querySelectorAll("a[href], button, input:not([type=hidden]), select, textarea, summary")) {
    if (!one.checkVisibility({ visibilityProperty: true })) continue;
    if (one.closest(".visually-hidden, .skip") || one.matches(".visually-hidden-until-focus, .skip")) continue;
    if (one.tagName === "A" && getComputedStyle(one).display === "inline") continue;
    const target = one.matches("[type=checkbox], [type=radio]") ? one.closest("label") ?? one : one;
    const box = target.getBoundingClientRect();
    if (box.height === 0) continue;
    const wanted = one.closest("main") ? least : 44;
    if (box.height < wanted - 0.5 || box.width < Math.min(wanted, 44) - 0.5) {
      small.push(`${one.tagName} ${(target.innerText || one.name || "").trim().slice(0, 40)}: ${box.width}×${box.height}`);
    }
  }
  return small;
}"""


def sign_in(page: Page, name: str, *, password: str = PASSWORD, shared: bool = False) -> None:
    """Sign in at the door, by keyboard."""
    page.goto("/sign-in")
    sign_in_here(page, name, password=password, shared=shared)
    expect(page).not_to_have_url(DOOR)


def sign_in_here(page: Page, name: str, *, password: str = PASSWORD, shared: bool = False) -> None:
    """Sign in on the page that asks for it, wherever one was."""
    page.get_by_label("Name", exact=True).focus()
    page.keyboard.type(name)
    page.keyboard.press("Tab")
    page.keyboard.type(password)
    if shared:
        page.keyboard.press("Tab")
        page.keyboard.press("Space")
    enter(page)


def let_in(page: Page, client: Any, address: str) -> None:
    """Give the browser the sign-in of a test's client, where signing in isn't what is tested."""
    cookie = client.cookies["sessionid"]
    page.context.add_cookies([{"name": cookie.key, "value": cookie.value, "url": address}])


def h1(page: Page) -> str:
    """The page's one heading."""
    heading = page.locator("h1")
    expect(heading).to_have_count(1)
    return heading.inner_text()


def too_small(page: Page) -> list[str]:
    """What a finger, or at the Counter a gloved one, would miss."""
    counter = "counter" in (page.locator("body").get_attribute("class") or "").split()
    found: list[str] = page.evaluate(TARGETS, 60 if counter else 44)
    return found


def overflow(page: Page) -> int:
    """By how many pixels the page is wider than its window."""
    wide: int = page.evaluate("document.scrollingElement.scrollWidth - document.documentElement.clientWidth")
    return max(0, wide)


def violations(page: Page, *, only: str = "") -> list[str]:
    """What axe finds, a line each: rule, help, where."""
    options = {"runOnly": [only]} if only else None
    found: list[dict[str, Any]] = Axe().run(page, options=options).response["violations"]
    return [f"{one['id']}: {one['help']}: {[node['target'] for node in one['nodes'][:4]]}" for one in found]


def field(page: Page, label: str) -> Locator:
    """The field of that label, whether or not it says that it's optional."""
    return page.get_by_label(re.compile(rf"^\s*{re.escape(label)}(\s+optional)?\s*$"))


def tab_to(page: Page, what: Locator, *, at_most: int = 40) -> None:
    """Press Tab until the focus is there, and see that it shows."""
    for _ in range(at_most):
        if what.evaluate("one => one === document.activeElement"):
            assert what.evaluate("one => one.matches(':focus-visible')")
            return
        page.keyboard.press("Tab")
    raise AssertionError(f"{what} isn't reached by {at_most} presses of Tab")


def tab_and_type(page: Page, label: str, text: str) -> None:
    """Go to a field by Tab and type over what it holds."""
    tab_to(page, field(page, label))
    page.keyboard.press("Control+a")
    page.keyboard.type(text)


def press(page: Page, name: str, role: Any = "link") -> None:
    """Go to a link or button by Tab and press Enter; wait for the page that follows."""
    tab_to(page, page.get_by_role(role, name=name, exact=True).first)
    enter(page)


def enter(page: Page) -> None:
    """Press Enter, and wait for the page that follows."""
    with page.expect_navigation():
        page.keyboard.press("Enter")


def scan(page: Page, code: str) -> None:
    """Scan at the Counter: its field has the focus by itself, and a scanner types and presses Enter."""
    expect(page.locator("#scan-main")).to_be_focused()
    page.keyboard.type(code)
    enter(page)


def largest(page: Page) -> str:
    """The text of the largest letters on the page."""
    found: str = page.evaluate("""() => {
      let best = null, size = 0;
      for (const one of document.querySelectorAll("main *")) {
        const own = [...one.childNodes].some(node => node.nodeType === 3 && node.data.trim());
        const now = parseFloat(getComputedStyle(one).fontSize);
        if (own && one.checkVisibility() && now > size) [best, size] = [one, now];
      }
      return best.innerText.trim();
    }""")
    return found


def origin(page: Page) -> str:
    """The shop's address, without the page's."""
    found: str = page.evaluate("location.origin")
    return found
