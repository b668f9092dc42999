"""Find a thing by what someone scans or types: a label, a code, a serial, a car, a name.

Each kind is looked up by the index of its own, so that typing stays quick in a long book; the
number of queries doesn't grow with what is found.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from urllib.parse import unquote

from django.db.models import Q
from django.urls import reverse

from bottles.models import Bottle
from shop.cars.selectors import cars_starting
from shop.people.models import Customer
from shop.people.selectors import begins, customers_starting, folded

LONGEST = 300
OFFERED = 8  # while typing
LISTED = 50  # on the page of results
LABEL = re.compile(r"/b/([^/?#\s]+)/?(?:[?#]\S*)?$")


@dataclass(frozen=True, slots=True)
class Match:
    """Something found: where it is, what to call it, and whether it's all that was typed."""

    url: str
    code: str
    what: str
    exact: bool
    word: str = ""
    kind: str = "open"


def asked(raw: str) -> str:
    """Return what is asked for: a label's link becomes its code."""
    text = " ".join(raw.replace("\0", " ").split())[:LONGEST]
    label = LABEL.search(text)
    return unquote(label[1]) if label else text


def find(text: str, *, limit: int) -> list[Match]:
    """Return what matches, exact matches first, at most `limit`."""
    if not text:
        return []
    found = [*_bottles(text, limit), *_cars(text, limit), *_customers(text, limit)]
    once = list({match.url: match for match in reversed(found)}.values())[::-1]
    return sorted(once, key=lambda match: not match.exact)[:limit]


def the_one(matches: list[Match]) -> Match | None:
    """Return the match to go to at once: the only exact one."""
    exact = [match for match in matches if match.exact]
    return exact[0] if len(exact) == 1 else None


def _bottles(text: str, limit: int) -> list[Match]:
    ways = {text, text.upper()}
    rows = Bottle.objects.select_related("standing__ownership__customer")
    by_code = rows.filter(begins("code", text.upper())).order_by("code")[:limit]
    serial = Q()
    for way in sorted(ways):
        serial |= begins("serial", way)
    by_serial = rows.filter(serial).order_by("serial", "code")[:limit]
    return [_bottle(one, ways) for one in [*by_code, *by_serial]]


def _bottle(one: Bottle, ways: set[str]) -> Match:
    parts = [one.mark, f"serial {one.serial}" if one.serial else "", _owner(one)]
    return Match(
        url=bottle_url(one.code),
        code=one.code,
        what=" · ".join(part for part in parts if part),
        exact=one.code in ways or one.serial in ways,
        word="retired" if one.retired_at else "",
        kind="no",
    )


def _owner(one: Bottle) -> str:
    standing = getattr(one, "standing", None)
    ownership = standing.ownership if standing else None
    if ownership is None:
        return ""
    return str(ownership.customer) if ownership.customer else ownership.supplier or ownership.get_kind_display()


def bottle_url(code: str) -> str:
    """Return the address of a bottle's page."""
    return reverse("bottles:bottle", args=[code])


def _cars(text: str, limit: int) -> list[Match]:
    number = re.sub(r"^(?:car\s+|#\s*)", "", text, flags=re.IGNORECASE)
    if not number:
        return []
    return [
        Match(
            url=reverse("rooms:car", args=[car.pk]),
            code=str(car),
            what=" · ".join(part for part in (str(car.customer) if car.customer else "", car.description) if part),
            exact=folded(car.number) == folded(number),
        )
        for car in cars_starting(number)[:limit]
    ]


def _customers(text: str, limit: int) -> list[Match]:
    found = list(customers_starting(text)[:limit])
    if not found and len(text) > 2:  # a last name, then: no index helps, so only where nothing else was found
        found = list(Customer.objects.filter(erased_at__isnull=True, name__icontains=text).order_by("name")[:limit])
    return [
        Match(
            url=reverse("rooms:customer", args=[one.pk]),
            code=one.name,
            what=" · ".join(part for part in ("customer", one.phone) if part),
            exact=folded(one.name) == folded(text),
        )
        for one in found
    ]
