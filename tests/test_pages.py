"""What holds of every page: one h1, a language, a title, unique ids, named fields, nothing inline."""

from __future__ import annotations

from collections import Counter
from html.parser import HTMLParser

import pytest
from django.test import Client

from tests.permissions_table import OPEN, TABLE, Page, World
from tests.test_permissions import address_of

pytestmark = pytest.mark.django_db

VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}


class Reader(HTMLParser):
    """Reads a page's elements, with the text of those that need one."""

    def __init__(self, html: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.texts: Counter[str] = Counter()
        self.words: dict[str, str] = {}
        self.stack: list[str] = []
        self.unclosed: list[str] = []
        self.inside_label: list[dict[str, str]] = []
        self.feed(html)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        found = {name: value or "" for name, value in attrs}
        self.elements.append((tag, found))
        if "label" in self.stack and tag in ("input", "select", "textarea"):
            self.inside_label.append(found)
        if tag not in VOID:
            self.stack.append(tag)

    def handle_endtag(self, tag: str) -> None:
        if tag in VOID:
            return
        if not self.stack or self.stack[-1] != tag:
            self.unclosed.append(tag)
            return
        self.stack.pop()

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {name: value or "" for name, value in attrs}))

    def handle_data(self, data: str) -> None:
        if self.stack:
            self.words[self.stack[-1]] = self.words.get(self.stack[-1], "") + data.strip()

    def all(self, *tags: str) -> list[dict[str, str]]:
        return [attrs for tag, attrs in self.elements if tag in tags]


def is_page(page: Page) -> bool:
    return page.html and page.get == 200


READ: dict[str, Reader] = {}  # each page is asked for once, whatever is looked at on it


@pytest.fixture(params=[page for page in TABLE if is_page(page)], ids=lambda page: page.name)
def read(request: pytest.FixtureRequest) -> Reader:
    page: Page = request.param
    if page.name not in READ:
        all_roles = request.getfixturevalue("make_user")("front_desk", "technician", "manager", name="Mara K.")
        client: Client = request.getfixturevalue("client_of")(None if page.roles is OPEN else all_roles)
        answer = client.get(address_of(page, World()))
        assert answer.status_code == 200
        assert "content-security-policy" in {name.lower() for name in answer.headers}
        READ[page.name] = Reader(answer.content.decode())
    return READ[page.name]


def test_a_page_is_well_formed_and_says_what_it_is(read: Reader) -> None:
    assert read.unclosed == [] and read.stack == []
    assert [attrs.get("lang") for attrs in read.all("html")] == ["en-GB"]
    assert len(read.all("h1")) == 1 and read.words["h1"]
    assert len(read.all("title")) == 1 and not read.words["title"].startswith("Tarebook")
    assert len(read.all("main")) == 1


def test_ids_are_unique_and_what_points_at_one_finds_it(read: Reader) -> None:
    ids = Counter(attrs["id"] for _, attrs in read.elements if "id" in attrs)
    assert [name for name, times in ids.items() if times > 1] == []
    for _, attrs in read.elements:
        pointed = [attrs.get("for", ""), attrs.get("list", "")]
        for name in ("aria-describedby", "aria-labelledby", "aria-controls"):
            pointed += attrs.get(name, "").split()
        assert [one for one in pointed if one and one not in ids] == []


def test_every_field_has_its_label(read: Reader) -> None:
    labelled = {attrs.get("for") for attrs in read.all("label")}
    for attrs in read.all("input", "select", "textarea"):
        if attrs.get("type") == "hidden":
            continue
        named = attrs.get("id") in labelled or attrs in read.inside_label or "aria-label" in attrs
        assert named, attrs


def test_nothing_is_inline(read: Reader) -> None:
    assert read.all("style") == []
    assert [attrs for attrs in read.all("script") if not attrs.get("src")] == []
    for tag, attrs in read.elements:
        assert [name for name in attrs if name == "style" or name.startswith("on")] == [], tag


def test_nothing_comes_from_elsewhere(read: Reader) -> None:
    for attrs in read.all("script", "link", "img", "iframe"):
        assert not attrs.get("src", attrs.get("href", "")).startswith(("http:", "https:", "//"))
