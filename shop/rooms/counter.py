"""The Counter: the scan field, what happens now, what waits, what the supplies still hold."""

from __future__ import annotations

from typing import Any, cast

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.models import Refill, Scale, Standing, Supply
from bottles.rules.fitness import Judgement
from bottles.selectors import counter as selected
from bottles.selectors.judging import judge_many
from bottles.views.judgement import first_reason, verdict
from bottles.views.wording import Words, words_for
from shop.base import clock
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, allow
from shop.physics.weights import MassStyle, format_mass, reading_not_above
from shop.rooms.jobs import going_on


@allow(EVERYONE, room="counter")
def counter(request: HttpRequest) -> HttpResponse:
    """Everything that the desk needs at a glance."""
    shop = Shop.objects.get()
    words = words_for(request, shop)
    refills = list(selected.open_refills())
    waiting, standing_here = selected.waiting(), selected.at_the_counter()
    judged = judge_many([one.bottle for one in (*waiting, *standing_here)], shop=shop)
    filling = {refill.bottle_id for refill in refills}
    context = {
        "refills": [_refill(refill, shop) for refill in refills],
        "waiting": [_bottle(one, judged[one.pk], words, shop) for one in waiting if one.pk not in filling],
        "here": [_bottle(one, judged[one.pk], words, shop) for one in standing_here if one.pk not in filling],
        "supplies": [_supply(supply, words) for supply in selected.supplies()],
        "has_stations": bool(selected.stations()),
        "going_on": going_on(request),
    }
    return render(request, "rooms/counter.html", context)


def _refill(refill: Refill, shop: Shop) -> dict[str, Any]:
    scale = refill.station.scale
    draws = list(refill.draws.all())
    return {
        "url": reverse("bottles:refill", args=[refill.pk]),
        "code": refill.bottle.code,
        "station": refill.station.name,
        "source": draws[-1].source.code if draws else "",
        "stop_at": _reading(refill.stop_at_g, scale),
        "waits": (
            f"{refill.wait_note} until {refill.wait_until.astimezone(clock.zone(shop)):%H:%M}" if refill.wait_until else ""
        ),
    }


def _reading(grams: int, scale: Scale | None) -> str:
    """A gross weight as that scale writes it."""
    if scale is None:
        return format_mass(grams, "kg")
    return reading_not_above(grams, cast(MassStyle, scale.style), scale.resolution_g)


def _bottle(one: Standing, judgement: Judgement, words: Words, shop: Shop) -> dict[str, Any]:
    answer, custody = verdict(judgement), one.custody
    reason = first_reason(judgement) if answer.kind != "yes" else None
    owner = one.ownership
    promised = custody.promised_at if custody else None
    return {
        "url": one.bottle.get_absolute_url(),
        "code": one.bottle.code,
        "owner": str(owner.customer) if owner and owner.customer else "shop" if owner and owner.kind == "shop" else "supplier",
        "wanted": custody.wanted if custody else "",
        "place": custody.place.name if custody and custody.place else "",
        "promised": f"{promised.astimezone(clock.zone(shop)):%a %d %b %H:%M}" if promised else "",
        "late": bool(promised and promised < clock.now()),
        "kind": answer.kind,
        "word": answer.word,
        "reason": reason.sentence if reason else "",
        "holds": (
            words.mass(one.weighing.net_g, plus_minus_g=one.weighing.error_g) if one.weighing else "contents unknown"
        ),
    }


def _supply(supply: Supply, words: Words) -> dict[str, Any]:
    standing = getattr(supply.bottle, "standing", None)
    account = getattr(supply.bottle, "account", None)
    weighing = standing.weighing if standing else None
    return {
        "url": supply.bottle.get_absolute_url(),
        "code": supply.bottle.code,
        "station": supply.station.name,
        "books": words.mass(account.balance_g) if account and weighing else "unknown: never weighed",
        "weighed": words.mass(weighing.net_g, plus_minus_g=weighing.error_g) if weighing else "",
    }

