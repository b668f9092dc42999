"""The Counter: the scan field, what happens now, what waits, what the supplies still hold."""

from __future__ import annotations

from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.rules.fitness import Judgement
from bottles.selectors import counter as selected
from bottles.selectors.judging import rulebook
from bottles.selectors.leaks import leaking
from bottles.selectors.refill_lists import open_refills
from bottles.views.judgement import FILLED_SHORT, first_reason, verdict
from bottles.views.reason_rows import in_own_units
from bottles.views.refill_rows import refill_rows
from bottles.views.refill_words import RefillWords, refill_words
from bottles.views.wording import Words
from shop.base import clock
from shop.base.models import Shop
from shop.base.permissions import DESK, EVERYONE, allow
from shop.rooms.jobs import going_on


@allow(EVERYONE, room="counter")
def counter(request: HttpRequest) -> HttpResponse:
    """Everything that the desk needs at a glance."""
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    words = refill_words(request, shop)
    refills = open_refills()
    waiting, standing_here = selected.waiting(), selected.at_the_counter()
    standings = {one.pk: one for one in (*waiting, *standing_here)}
    supplies = selected.supplies()
    fills = selected.fills_left_of(supplies)
    judged = rulebook(shop).judge_all([one.bottle for one in standings.values()], standings)
    filling = {refill.bottle_id for refill in refills}
    context = {
        "refills": refill_rows(refills, words, shop),
        "waiting": [_bottle(one, judged[one.pk], words, shop) for one in waiting if one.pk not in filling],
        "here": [_bottle(one, judged[one.pk], words, shop) for one in standing_here if one.pk not in filling],
        "supplies": [_supply(supply, fills.get(supply.pk), words, shop) for supply in supplies],
        "has_stations": bool(supplies) or selected.has_stations(),
        "going_on": going_on(request),
        "may_plan": bool(DESK & request.user.roles),  # type: ignore[union-attr]
        "leaking": len(leaking()),
    }
    return render(request, "rooms/counter.html", context)


def _bottle(one: Any, judgement: Judgement, words: Words, shop: Shop) -> dict[str, Any]:
    answer, promised = verdict(judgement), one.promised_at
    weighed_now = one.weighing is not None and "net" not in judgement.not_judged
    if answer.kind in ("yes", "after") and weighed_now and one.weighing.step == "disconnected":
        answer = FILLED_SHORT  # its refill is closed: it waits for its owner, not for nitrous
    reason = first_reason(judgement) if answer.kind not in ("yes", "open") else None
    owner = one.ownership
    of_limit = f" of {words.mass(judgement.limit.grams)}" if judgement.limit.grams else ""
    return {
        "url": f"/b/{one.bottle.code}",
        "code": one.bottle.code,
        "owner": (one.customer or "erased customer") if owner and owner.customer_id
        else "the shop" if owner and owner.kind == "shop" else "the supplier",
        "wanted": one.wanted or "",
        "place": one.place or "",
        "promised": f"{promised.astimezone(clock.zone(shop)):%a %d %b %H:%M}" if promised else "",
        "late": bool(promised and promised < clock.now()),
        "kind": answer.kind,
        "word": answer.word,
        "reason": in_own_units(reason.sentence, words) if reason else "",
        "holds": (
            words.mass(one.weighing.net_g, plus_minus_g=one.weighing.error_g) + of_limit if one.weighing else "contents unknown"
        ),
    }  # fmt: skip


def _supply(supply: Any, fills: selected.FillsLeft | None, words: RefillWords, shop: Shop) -> dict[str, Any]:
    weighed = supply.net_g is not None
    return {
        "url": reverse("bottles:bottle", args=[supply.code]),
        "code": supply.code,
        "station": supply.station_name,
        "books": words.mass(supply.books_g) if supply.books_g is not None and weighed else "unknown: never weighed",
        "weighed": words.mass(supply.net_g, plus_minus_g=supply.error_g) if weighed else "",
        "fills": _fills(fills, words, shop) if fills else "",
    }


def _fills(fills: selected.FillsLeft, words: RefillWords, shop: Shop) -> str:
    """What a kept forecast says for quick fills, less what left since."""
    at = fills.forecast_at.astimezone(clock.zone(shop))
    when = f"{at:%H:%M}" if at.date() == clock.today(shop) else f"{at:%a %d %b}"
    count = f"at best {fills.count}" if fills.count else "no"
    into = f"{words.mass(fills.target_g)} into a bottle at {words.temperature(fills.bottle_mk)}"
    return f"{count} full fill{'s' if fills.count > 1 else ''} of {into} left, by the forecast of {when}"
