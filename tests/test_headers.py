"""Every answer, from the first page on and refusals too, forbids whatever the page didn't bring from the shop itself."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client

from tests.permissions_table import World

pytestmark = pytest.mark.django_db

WANTED = {
    "default-src": ["'none'"], "script-src": ["'self'"], "style-src": ["'self'"], "img-src": ["'self'"], "font-src": ["'self'"],
    "connect-src": ["'self'"], "form-action": ["'self'"], "frame-ancestors": ["'none'"], "base-uri": ["'none'"],
}  # fmt: skip


def policy(answer: Any) -> dict[str, list[str]]:
    parts = answer["Content-Security-Policy"].split(";")
    return {words[0]: words[1:] for words in (part.split() for part in parts) if words}


def check(answer: Any, status: int) -> None:
    assert answer.status_code == status
    found = policy(answer)
    assert {name: found.get(name) for name in WANTED} == WANTED
    assert not [source for sources in found.values() for source in sources if source not in ("'self'", "'none'")]
    assert "Content-Security-Policy-Report-Only" not in answer
    assert answer["X-Content-Type-Options"] == "nosniff"
    assert answer["X-Frame-Options"] == "DENY"
    assert answer["Referrer-Policy"] == "same-origin"


def test_at_the_door_and_where_it_stays_shut(shop: Any) -> None:
    client = Client()
    check(client.get("/sign-in"), 200)
    check(client.get("/counter"), 302)
    check(client.post("/customers/new", {"name": "x"}), 401)
    check(client.get("/healthz"), 200)


def test_inside_on_pages_parts_papers_and_refusals(
    shop: Any, front_desk: Any, client_of: Callable[..., Client]
) -> None:
    world, client = World(), client_of(front_desk)
    for address in ("/counter", f"/b/{world.bottle.code}", "/bottles/register", f"/refills/{world.refill.pk}/receipt"):
        check(client.get(address), 200)
    check(client.get("/find/matches?q=T"), 200)
    check(client.get("/office"), 403)
    check(client.get("/b/NO-SUCH"), 404)
    check(client.post("/bottles/register", {}), 422)


def test_a_page_that_broke_is_answered_as_strictly(
    shop: Any, front_desk: Any, client_of: Callable[..., Client], monkeypatch: pytest.MonkeyPatch
) -> None:
    world, client = World(), client_of(front_desk)
    client.raise_request_exception = False

    def broken(*args: Any, **kwargs: Any) -> Any:
        raise RuntimeError("a fault")

    monkeypatch.setattr("bottles.views.of_bottle.bottle_or_404", broken)
    answer = client.get(f"/b/{world.bottle.code}/weigh")
    check(answer, 500)
    assert b"Traceback" not in answer.content and b"a fault" not in answer.content
