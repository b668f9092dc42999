"""The part of a bottle's page that the register fills: what is known of it, and what isn't yet."""

from __future__ import annotations

from typing import Any

from django.http import HttpRequest
from django.urls import reverse

from bottles.models import Bottle, Condition, Stamp, Standing, Tare
from bottles.rules.conditions import label_of
from bottles.rules.lying import how_it_lies
from bottles.rules.marks import read_mark
from bottles.selectors.missing import what_is_missing
from bottles.selectors.register import conditions_of, owner_words, stamps_of, tares_of
from bottles.views.sections import Seen
from bottles.views.wording import Words, words_for
from shop.base import clock
from shop.base.permissions import BENCH, DESK, MANAGERS
from shop.physics.formatting import format_volume
from shop.rules import month as months


def section(request: HttpRequest, seen: Seen) -> dict[str, Any]:
    """What is missing, tare, stamps, conditions, owner, how it lies."""
    bottle, standing, shop = seen.bottle, seen.standing, seen.shop
    words = words_for(request, shop)
    stamps = stamps_of(bottle)
    counted = {stamp.kind for stamp in stamps if not hasattr(stamp, "strike")}
    conditions = list(conditions_of(bottle))
    zone = clock.zone(shop)
    roles = request.user.roles  # type: ignore[union-attr]
    register = {
        "retired": bottle.retired_at is not None,
        "missing": [
            {"what": one.what, "why": one.why, "stops": one.stops, "url": reverse(f"bottles:{one.page}", args=[bottle.code])}
            for one in what_is_missing(bottle, standing, counted)
        ],
        "facts": _facts(bottle, standing, words),
        "lies": how_it_lies(bottle.use, bottle.dip_tube),
        "tares": [_tare(tare, words, zone) for tare in tares_of(bottle)],
        "stamps": [stamp_row(bottle, stamp) for stamp in stamps],
        "open_conditions": [_condition(bottle, one) for one in conditions if not hasattr(one, "end")],
        "ended_conditions": [_condition(bottle, one) for one in conditions if hasattr(one, "end")],
        "may_end": bool(BENCH & roles),
        "may_change_owner": bool(DESK & roles),
        "may_retire": bool(MANAGERS & roles),
    }
    return {"register": register}


def mark_words(typed: str) -> str:
    """A mark as stamped, with what it tells where the list knows it."""
    mark = read_mark(typed)
    if not mark.specification:
        return f"{typed} (not in the list of specifications)"
    pressure = mark.service or mark.test_pressure
    what = "service" if mark.service else "test"
    told = [mark.specification.title.lower(), f"{what} pressure {pressure}" if pressure else "its pressure wasn't read"]
    return f"{typed} ({', '.join(told)})"


def _facts(bottle: Bottle, standing: Standing, words: Words) -> list[tuple[str, str]]:
    owner = owner_words(standing.ownership)
    if standing.ownership:
        owner += f", since {standing.ownership.since:%Y-%m-%d}"
    grade = {True: "race grade (with SO2)", False: "plain nitrous"}
    rows = [
        ("Mark", mark_words(bottle.mark) if bottle.mark else "not legible"),
        ("Serial number", bottle.serial or "not legible"),
        ("Maker", bottle.maker),
        ("Water capacity", _capacity(bottle, words)),
        ("Size", f"{words.mass(bottle.charge_g)} (labelled)" if bottle.charge_g else ""),
        ("Wall", " ".join(filter(None, ("" if bottle.wall == "unknown" else bottle.wall, bottle.alloy)))),
        ("Dip (siphon) tube", "" if bottle.dip_tube == "unknown" else bottle.get_dip_tube_display()),
        ("Left below the tube's end", _below_tube(bottle)),
        ("Outlet", bottle.outlet),
        ("Safety disc", bottle.disc),
        ("Permit", _permit(bottle, words)),
        ("Use", bottle.get_use_display()),
        ("Owner", owner),
        ("Last held", bottle.get_last_held_display() if bottle.last_held else ""),
        ("Nitrous in it", grade.get(bottle.race_grade, "") if bottle.race_grade is not None else ""),
        ("The shop's own limit", words.mass(bottle.own_limit_g) if bottle.own_limit_g else ""),
        ("Note", bottle.note),
    ]
    return [(name, value) for name, value in rows if value]


def _capacity(bottle: Bottle, words: Words) -> str:
    if bottle.capacity_ml is None:
        return ""
    basis = bottle.get_capacity_basis_display()
    return f"{words.capacity(bottle)}, {basis}"


def _below_tube(bottle: Bottle) -> str:
    if bottle.below_tube_ml is None:
        return ""
    return f"{format_volume(bottle.below_tube_ml, 'mL')}, entered as “{bottle.below_tube_typed}”"


def _permit(bottle: Bottle, words: Words) -> str:
    if not bottle.permit:
        return ""
    charge = f", at most {words.mass(bottle.permit_charge_g)}" if bottle.permit_charge_g else ""
    until = f", until {bottle.permit_until:%Y-%m-%d}" if bottle.permit_until else ""
    listed = {True: ", lists nitrous oxide", False: ", doesn't list nitrous oxide"}.get(bottle.permit_lists_nitrous, "")  # type: ignore[arg-type]
    return f"{bottle.permit}{listed}{charge}{until}"


def _tare(tare: Tare, words: Words, zone: Any) -> dict[str, Any]:
    parts = list(tare.parts.all())
    return {
        "total": words.tare(tare),
        "since": tare.since.astimezone(zone).strftime("%Y-%m-%d %H:%M"),
        "basis": tare.get_basis_display(),
        "parts": [
            {
                "thing": "all that is on it" if len(parts) == 1 and part.thing == "bottle" else part.get_thing_display(),
                "mass": words.mass(part.grams),
                "typed": part.typed,
            }
            for part in sorted(parts, key=lambda part: part.pk)
        ],
    }


def stamp_row(bottle: Bottle, stamp: Stamp) -> dict[str, Any]:
    """One stamp as the page and the stamps' own page list it."""
    date = months.slashed(months.from_ym(stamp.year, stamp.month)) if stamp.month else str(stamp.year)
    strike = getattr(stamp, "strike", None)
    return {
        "kind": stamp.get_kind_display(),
        "date": date,
        "signs": ", ".join(filter(None, ("star" if stamp.star else "", "plus" if stamp.plus else ""))),
        "facility": stamp.facility,
        "typed": stamp.typed,
        "struck": f"struck: {strike.act.reason}" if strike else "",
        "strike_url": "" if strike else reverse("bottles:strike_stamp", args=[bottle.code, stamp.pk]),
    }


def _condition(bottle: Bottle, condition: Condition) -> dict[str, Any]:
    end = getattr(condition, "end", None)
    return {
        "what": label_of(condition.code),
        "note": condition.note,
        "seen_on": f"{condition.seen_on:%Y-%m-%d}",
        "how": end.how if end else "",
        "end_url": ""
        if end or condition.code == "condemned"
        else reverse("bottles:end_condition", args=[bottle.code, condition.pk]),
    }
