"""Every page, logged out, in each role alone, and without any role: only who may, may."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from django.test import Client
from django.urls import URLPattern, URLResolver, get_resolver, reverse

from shop.base.models import Act
from shop.base.permissions import Role
from shop.people.acting import ActView
from tests.permissions_table import OPEN, TABLE, Page, World

pytestmark = pytest.mark.django_db


def addresses(resolver: URLResolver | None = None, space: str = "") -> Iterator[tuple[str, Any]]:
    """Every address of the shop as (name, view)."""
    for entry in (resolver or get_resolver()).url_patterns:
        if isinstance(entry, URLResolver):
            yield from addresses(entry, f"{space}{entry.namespace}:" if entry.namespace else space)
        else:
            assert isinstance(entry, URLPattern)
            yield f"{space}{entry.name}", entry.callback


def address_of(page: Page, world: World) -> str:
    return reverse(page.name, kwargs=page.args(world)) + (f"?{page.query}" if page.query else "")


@pytest.fixture
def world(shop: Any) -> World:
    return World()


@pytest.fixture(params=TABLE, ids=lambda page: page.name)
def page(request: pytest.FixtureRequest) -> Page:
    return request.param


def test_every_address_stands_in_the_table_once() -> None:
    rows = Counter(page.name for page in TABLE)
    assert [name for name, times in rows.items() if times > 1] == []
    assert set(rows) == {name for name, _ in addresses()}


def test_every_view_says_which_roles_may_open_it() -> None:
    silent = []
    for name, view in addresses():
        if getattr(view, "login_required", True) is False:
            continue
        owner = getattr(view, "view_class", None)
        if owner is None:
            said = getattr(view, "roles", None)
        else:  # inherited from a base of the app's own is fine, from ActView itself it isn't
            said = next((vars(c)["roles"] for c in owner.__mro__ if c is not ActView and "roles" in vars(c)), None)
        if not said:
            silent.append(name)
    assert silent == []


def test_what_a_view_says_is_what_the_table_says() -> None:
    views = dict(addresses())
    for page in TABLE:
        view = views[page.name]
        if page.roles is OPEN:
            assert view.login_required is False, page.name
        else:
            assert frozenset(getattr(view, "view_class", view).roles) == page.roles, page.name


def test_nobody_gets_in_unsigned(page: Page, world: World) -> None:
    client = Client()
    answer = client.get(address_of(page, world))
    if page.roles is OPEN:
        assert answer.status_code == page.get
        return
    assert answer.status_code == 302
    assert answer["Location"].startswith(reverse("people:sign_in"))
    assert client.post(address_of(page, world), {"name": "x"}).status_code == 401


def test_only_the_right_role_gets_in(
    page: Page, world: World, make_user: Callable[..., Any], client_of: Callable[..., Client]
) -> None:
    for role in (*Role, None):
        client = client_of(make_user(role.value, name=f"the {role.value}") if role else make_user())
        answer = client.get(address_of(page, world))
        if page.roles is OPEN:
            assert answer.status_code in (page.get, 302), role  # at the door whoever is in goes on
        elif role in page.roles:
            assert answer.status_code == page.get, role
        else:
            assert answer.status_code == 403, role
            # An empty form is refused for the role before anything is looked at.
            assert client.post(address_of(page, world)).status_code == 403, role


def saves(page: Page) -> bool:
    view = dict(addresses()).get(page.name)
    return issubclass(getattr(view, "view_class", object), ActView)


@pytest.mark.parametrize("form_page", [page for page in TABLE if saves(page)], ids=lambda page: page.name)
def test_an_empty_form_saves_nothing_and_says_so(
    form_page: Page, world: World, make_user: Callable[..., Any], client_of: Callable[..., Client]
) -> None:
    acts = Act.objects.count()
    client = client_of(make_user("front_desk", "technician", "manager", name="Mara K."))
    answer = client.post(address_of(form_page, world))
    assert answer.status_code == 422
    assert answer.content.count(b'id="errors"') == 1
    assert Act.objects.count() == acts
