"""The page of a bottle, its history, and the list of all."""

from __future__ import annotations

from typing import Any

from django.db.models import F
from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import NoReverseMatch, reverse

from bottles.models import Bottle, Ownership, Standing
from bottles.rules.conditions import label_of
from bottles.selectors.counter import came_in_unweighed
from bottles.selectors.register import (
    STATES,
    bottles_matching,
    owner_words,
    standing_of,
    where_words,
    with_open_condition,
)
from bottles.texts import act_sentence
from bottles.views.of_bottle import bottle_or_404
from bottles.views.sections import ACTIONS, ANSWERS, SECTIONS, drawn
from bottles.views.wording import Words, words_for
from shop.base import clock
from shop.base.composed import composed
from shop.base.models import Act, Place, Shop
from shop.base.paging import page_of
from shop.base.permissions import EVERYONE, Role, allow
from shop.cars.models import Car

LATEST = 8  # acts on the bottle's own page
LONGEST_SEARCH = 120
WITHOUT_A_REFILL = frozenset({"bottles:weigh", "bottles:fill", "bottles:hand_over"})


@allow(EVERYONE, room="counter")
def bottle(request: HttpRequest, code: str) -> HttpResponse:
    """Everything about one bottle: the answer first, then what it holds, then what it is."""
    found = bottle_or_404(code)
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    standing = standing_of(found)
    words = words_for(request, shop)
    told = drawn(request, found, standing, shop)
    rows = history_rows(_latest_acts(subject_of(found)), words, shop)
    context = {
        "bottle": found,
        "line": " · ".join(_line(found, standing, words)),
        "owner": owner_words(standing.ownership),
        "where": where_words(standing.custody),
        "wanted": standing.custody.wanted if standing.custody and standing.is_in else "",
        "cars": _cars(standing),
        "actions": actions(found, standing, request.user.roles, told),  # type: ignore[union-attr]
        "answers": ANSWERS,
        "sections": [template for template, _ in SECTIONS if template not in ANSWERS],
        "acts": rows[:LATEST],
        "more": len(rows) > LATEST,
    }
    return render(request, "bottles/bottle.html", told | context)


@allow(EVERYONE, room="counter")
def history(request: HttpRequest, code: str) -> HttpResponse:
    """Every act on a bottle: who, when, what, why."""
    found = bottle_or_404(code)
    shop = Shop.objects.get()
    page = page_of(request, acts_on(found))
    context = {"bottle": found, "page": page, "acts": history_rows(list(page), words_for(request, shop), shop)}
    return render(request, "bottles/history.html", context)


@allow(EVERYONE, room="counter")
def bottles(request: HttpRequest) -> HttpResponse:
    """The register: by owner, use, state and place, or by a text."""
    shop = Shop.objects.get()
    asked = {name: request.GET.get(name, "").replace("\0", "").strip()[:LONGEST_SEARCH] for name in _FILTERS}
    places = list(Place.objects.filter(active=True).order_by("name").values_list("code", "name"))
    place = Place.objects.filter(code=asked["place"]).first() if asked["place"] else None
    found = bottles_matching(
        text=asked["q"], owner=asked["owner"], use=asked["use"], state=asked["state"], place=place
    )
    page = page_of(request, with_open_condition(found).values(*_COLUMNS, **_NAMED))
    words = words_for(request, shop)
    context = {
        "rows": [_row(row, words) for row in page],
        "page": page,
        "asked": asked,
        "narrowed": any(asked.values()),
        "filters": [
            _choice("owner", "Owner", Ownership.KINDS, asked), _choice("use", "Use", Bottle.USES, asked),
            _choice("state", "State", STATES, asked), _choice("place", "Place", places, asked),
        ],
    }
    return render(request, "bottles/bottles.html", context)


def acts_on(bottle: Bottle) -> Any:
    """The acts on a bottle with who did each, the latest first."""
    return _acts(subject_of(bottle))


def subject_of(bottle: Bottle) -> str:
    """The bottle as acts name it."""
    return f"bottle:{bottle.code}"


def _acts(subject: str) -> Any:
    return Act.objects.filter(subject=subject).annotate(who=F("person__name")).order_by("-id")


@composed
def _latest_acts(subject: str) -> Any:
    return _acts(subject)[: LATEST + 1]


def history_rows(acts: list[Any], words: Words, shop: Shop) -> list[dict[str, Any]]:
    """Acts as _history.html takes them, in the shop's time."""
    zone = clock.zone(shop)
    return [
        {
            "recorded_at": act.recorded_at,
            "when": act.recorded_at.astimezone(zone).strftime("%Y-%m-%d %H:%M"),
            "person": act.who or "",
            "sentence": act_sentence(act.code, act.changes, mass=words.mass, condition=label_of),
            "reason": act.reason,
        }
        for act in acts
    ]


def actions(bottle: Bottle, standing: Standing, roles: frozenset[Role], told: dict[str, Any]) -> list[dict[str, Any]]:
    """What this person may do with the bottle now, the likeliest drawn heavier."""
    found: list[dict[str, Any]] = []
    likely = likeliest(standing, may_fill=told["may_fill"], full=told["full"])
    for action in ACTIONS:
        if bottle.retired_at is not None or not action.roles & roles or action.needs_in not in (None, standing.is_in):
            continue
        if told["refilled_now"] and action.page in WITHOUT_A_REFILL:
            continue  # its own refill takes the weights, and holds it until it's closed
        if action.page == "bottles:fill" and not told["offers_fill"]:
            continue  # the answer above says why, and what to do
        try:
            url = reverse(action.page, args=[bottle.code])
        except NoReverseMatch:
            continue
        found.append({"words": action.words, "url": url, "main": action.page == likely and not told["refilled_now"]})
    if told["refilled_now"] and bottle.retired_at is None:
        url = next(row["url"] for row in told["reasons"] if row["code"] == "in-open-refill")
        found.insert(0, {"words": "Go on with its refill", "url": url, "main": True})
    return found


def likeliest(standing: Standing, *, may_fill: bool, full: bool) -> str:
    """The page of what most likely comes next: a bottle that came in is weighed before it's filled."""
    if not standing.is_in:
        return "bottles:check_in"
    if came_in_unweighed(standing):
        return "bottles:weigh"
    return "bottles:hand_over" if full else "bottles:fill" if may_fill else "bottles:weigh"


def _line(bottle: Bottle, standing: Standing, words: Words) -> list[str]:
    return [
        bottle.mark or "mark not legible",
        f"serial {bottle.serial}" if bottle.serial else "serial not legible",
        words.capacity(bottle) + (" (inferred)" if bottle.capacity_basis == "inferred" else ""),
        f"tare {words.tare(standing.tare)}" if standing.tare else "no tare yet",
    ]


def _cars(standing: Standing) -> str:
    if standing.custody and standing.custody.car:
        return str(standing.custody.car)
    if standing.ownership and standing.ownership.customer_id:
        cars = Car.objects.filter(customer=standing.ownership.customer_id, active=True).order_by("number")[:3]
        return ", ".join(str(car) for car in cars)
    return ""


_FILTERS = ("q", "owner", "use", "state", "place")
_COLUMNS = (
    "code", "mark", "serial", "use", "retired_at", "is_stopped", "is_condemned",
)
_NAMED = {
    "is_in": F("standing__is_in"),
    "waits": F("standing__waits"),
    "owner_kind": F("standing__ownership__kind"),
    "customer": F("standing__ownership__customer__name"),
    "supplier": F("standing__ownership__supplier"),
    "place": F("standing__custody__place__name"),
    "custody_kind": F("standing__custody__kind"),
    "car": F("standing__custody__car__number"),
    "wanted": F("standing__custody__wanted"),
    "net_g": F("standing__weighing__net_g"),
    "net_error_g": F("standing__weighing__error_g"),
    "tare_g": F("standing__tare__total_g"),
}
_USES = dict(Bottle.USES)
_KINDS = {"out": "handed over", "car": "on a car", "loan": "lent", "test": "at the test house", "supplier": "at the supplier"}


def _row(row: dict[str, Any], words: Words) -> dict[str, Any]:
    owner = {"customer": row["customer"] or "erased customer", "supplier": row["supplier"], "shop": "the shop"}
    kind, word = _state(row)
    return {
        "code": row["code"],
        "url": f"/b/{row['code']}",
        "what": f"{row['mark'] or 'mark not legible'} · {row['serial'] or 'serial not legible'}",
        "owner": owner.get(row["owner_kind"] or "", "not known"),
        "use": _USES.get(row["use"], row["use"]),
        "where": _where(row),
        "holds": words.mass(row["net_g"], plus_minus_g=row["net_error_g"]) if row["net_g"] is not None else "never weighed",
        "kind": kind,
        "word": word,
    }


def _where(row: dict[str, Any]) -> str:
    if row["custody_kind"] is None:
        return "never checked in"
    if row["is_in"]:
        return row["place"] or ""
    return f"on car {row['car']}" if row["car"] else _KINDS.get(row["custody_kind"], "out")


def _state(row: dict[str, Any]) -> tuple[str, str]:
    if row["retired_at"]:
        return "no", "retired"
    if row["is_condemned"]:
        return "no", "condemned"
    if row["is_stopped"]:
        return "no", "something is wrong"
    if not row["mark"] or row["tare_g"] is None:
        return "unknown", "to complete"
    if row["waits"]:
        return "after", f"waits: {row['wanted']}"
    return ("open", "in the shop") if row["is_in"] else ("open", "out")


def _choice(name: str, label: str, choices: Any, asked: dict[str, str]) -> dict[str, Any]:
    return {
        "name": name,
        "label": label,
        "options": [("", "any", not asked[name])] + [(value, word, value == asked[name]) for value, word in choices],
    }
