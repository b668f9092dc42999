"""The one field that finds anything."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_safe

from shop.base.permissions import EVERYONE, allow
from shop.rooms import finding

LISTS = {"matches-frame", "matches-main"}


@allow(EVERYONE)
@require_safe
def find(request: HttpRequest) -> HttpResponse:
    """Go to the one exact match, or show what may be meant."""
    text = finding.asked(request.GET.get("q", ""))
    found = finding.find(text, limit=finding.LISTED + 1)
    one = finding.the_one(found)
    if one is not None:
        return redirect(one.url)
    more = len(found) > finding.LISTED
    context = {"query": text, "typed": text, "matches": found[: finding.LISTED], "more": more, "listed": finding.LISTED}
    return render(request, "rooms/find.html", context)


@allow(EVERYONE)
@require_safe
def matches(request: HttpRequest) -> HttpResponse:
    """Offer what may be meant by half-typed text, as the list of the field that asks."""
    text = finding.asked(request.GET.get("q", ""))
    asking = request.headers.get("HX-Target", "")
    context = {
        "typed": text,
        "matches": finding.find(text, limit=finding.OFFERED),
        "list_id": f"{asking if asking in LISTS else 'matches'}-list",
    }
    return render(request, "rooms/_matches.html", context)
