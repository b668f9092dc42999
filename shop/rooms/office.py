"""The Office: the manager's books, and what the shop itself is."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import NoReverseMatch, reverse

from bottles.models import Refill, Scale, Station, Supply
from bottles.selectors.books import balance_between
from bottles.selectors.leaks import leaking
from bottles.views.wording import words_for
from shop.base import clock
from shop.base.models import Place, Shop
from shop.base.permissions import MANAGERS, allow
from shop.people.models import User
from shop.rooms.jobs import going_on

# What can be opened from here, in groups; a page that isn't in the addresses isn't shown.
BOOKS: tuple[tuple[str, tuple[tuple[str, str, str], ...]], ...] = (
    (
        "Nitrous",
        (
            ("bottles:balance", "Balance", "what came, went and isn't accounted for, between two days"),
            ("bottles:bottles", "Bottles", "the register of all bottles"),
            ("bottles:leaks", "Leak watch", "stored bottles that lose weight, and how soon a leak would show"),
            ("bottles:learning", "Learning", "forecasts against the scale, and what the shop's own refills tell"),
            ("bottles:plan", "Fill plan", "today's fills in their order, promises, and the last day to order"),
            ("bottles:scales", "Scales", "their resolution, error and checks"),
            ("bottles:stations", "Filling stations", "what hangs on each"),
            ("bottles:stock_take", "Stock-take", "every bottle that is in, and when it was weighed"),
            ("rooms:jobs", "Background work", "the nightly check of the books, and what else runs"),
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

DAYS = 30
LATELY = (
    ("delivery", "delivered"),
    ("customer", "with customers"),
    ("car", "used on cars"),
    ("line", "line loss"),
    ("vented", "vented"),
    ("returned", "went back"),
    ("unaccounted", "unaccounted"),
)


@allow(MANAGERS, room="office")
def office(request: HttpRequest) -> HttpResponse:
    """What moved lately, and the ways to every book."""
    groups = [{"name": name, "links": links(entries)} for name, entries in BOOKS]
    context = {
        "groups": [group for group in groups if group["links"]],
        "nitrous": nitrous_lately(request),
        "first_steps": first_steps(),
        "going_on": going_on(request),
        "leaking": len(leaking()),
    }
    return render(request, "rooms/office.html", context)


def nitrous_lately(request: HttpRequest) -> dict[str, Any]:
    """The books of the last thirty days in one line, each figure with its ±."""
    shop = Shop.objects.get()
    words = words_for(request, shop)
    last = clock.today(shop)
    told = balance_between(last - timedelta(days=DAYS - 1), last, shop=shop)
    flows = {flow.code: flow for flow in told.flows}
    shown = [
        {
            "what": word,
            "value": words.mass(abs(flows[code].net_g), plus_minus_g=flows[code].error_g),
            "way": ("over" if flows[code].net_g > 0 else "short") if code == "unaccounted" else "",
        }
        for code, word in LATELY
        if code in flows
    ]
    if told.filled_g:
        at = sum(flow["what"] == "delivered" for flow in shown)
        shown.insert(at, {"what": "filled", "value": words.mass(told.filled_g), "way": ""})
    if shown and "unaccounted" not in flows:
        shown.append({"what": "unaccounted", "value": "nothing", "way": ""})
    return {
        "first": told.first,
        "last": told.last,
        "stock": words.mass(told.closing_g, plus_minus_g=told.closing_error_g),
        "flows": shown,
        "url": f"{reverse('bottles:balance')}?first={told.first}&last={told.last}",
    }


def first_steps() -> list[dict[str, str]]:
    """What a new shop still has to do before it can fill, in its order; empty once a bottle was filled."""
    if Refill.objects.exists():
        return []
    steps = (
        (Place, "rooms:places", "Write down the places", "the counter, a shelf, the quarantine"),
        (Scale, "bottles:scales", "Add a scale", "its step and its error: they decide the ± of every weight"),
        (Station, "bottles:stations", "Set up a filling station", "its scale, its hose"),
        (Supply, "bottles:register", "Register a supply bottle, enter its delivery, connect it", "with its tare and its lot"),
        (User, "people:people", "Add the people who work here", "each with a badge or a short code"),
        (Refill, "rooms:counter", "Fill the first bottle at the Counter", "register it, check it in, weigh it"),
    )
    return [
        {"words": words, "hint": hint, "url": reverse(page), "done": "yes" if _begun(model) else ""}
        for model, page, words, hint in steps
    ]


def _begun(model: Any) -> bool:
    return model.objects.count() > 1 if model is User else model.objects.exists()


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
