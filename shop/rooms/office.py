"""The Office: the manager's books, and what the shop itself is."""

from __future__ import annotations

from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import NoReverseMatch, reverse

from shop.base.permissions import MANAGERS, allow

# What can be opened from here, in groups; a page that isn't in the addresses isn't shown.
BOOKS: tuple[tuple[str, tuple[tuple[str, str, str], ...]], ...] = (
    (
        "Nitrous",
        (
            ("bottles:balance", "Balance", "what came, went and isn't accounted for, between two days"),
            ("bottles:bottles", "Bottles", "the register of all bottles"),
            ("bottles:scales", "Scales", "their resolution, error and checks"),
            ("bottles:stations", "Filling stations", "what hangs on each"),
        ),
    ),
    (
        "People and cars",
        (
            ("people:customers", "Customers", "who owns bottles and cars"),
            ("cars:cars", "Cars", "numbers, classes, owners"),
            ("people:people", "People", "who signs in, and what each may do"),
        ),
    ),
    (
        "The shop",
        (
            ("rooms:settings", "Settings", "name, units, time zone, height, notice"),
            ("rooms:policies", "Policy", "what the shop decided beyond the rules"),
            ("rooms:places", "Places", "counter, shelves, freezer, quarantine"),
        ),
    ),
)


@allow(MANAGERS, room="office")
def office(request: HttpRequest) -> HttpResponse:
    """The ways to every book."""
    groups = [{"name": name, "links": links(entries)} for name, entries in BOOKS]
    return render(request, "rooms/office.html", {"groups": [group for group in groups if group["links"]]})


def links(entries: tuple[tuple[str, str, str], ...]) -> list[dict[str, Any]]:
    """Return the entries whose address exists."""
    found = []
    for name, word, hint in entries:
        try:
            url = reverse(name)
        except NoReverseMatch:
            continue
        found.append({"url": url, "name": word, "hint": hint})
    return found
