"""The part of a bottle's page about what is in it: contents, their course over time, pressure to expect."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import datetime
from typing import Any

from django.http import HttpRequest
from django.urls import reverse
from django.utils.safestring import mark_safe

from bottles.models import Account, Bottle, Line, Movement, Standing, Weighing
from bottles.selectors.contents import holding_of
from bottles.selectors.course import Course, Moved, Weighed, course_over_time, others_of
from bottles.views.holding_words import account_words, at, pressure_rows, tell
from bottles.views.refill_words import RefillWords, refill_words
from bottles.views.sections import Seen
from bottles.views.warming_chart import warming_chart
from shop.base import clock
from shop.base.models import Shop
from shop.base.permissions import MANAGERS
from shop.charts.model import Axis, Chart, Mark, Series
from shop.charts.svg import to_svg
from shop.charts.table import to_rows
from shop.people.models import full_name
from shop.physics.units import value_in

STEPS, KINDS, ORIGINS = dict(Weighing.STEPS), dict(Movement.KINDS), dict(Line.ORIGINS)
LATEST = 8  # weighings and movements listed on the page; the chart shows more


def section(request: HttpRequest, seen: Seen) -> dict[str, Any]:
    """Contents with ±, the chart and its table, weighings with their strikes, movements."""
    bottle, standing, shop = seen.bottle, seen.standing, seen.shop
    words = refill_words(request, shop)
    holding = holding_of(bottle, standing)
    limit = seen.judgement.limit.grams
    course = course_over_time(bottle)
    moved = course.lines[: -LATEST - 1 : -1]
    others = others_of(bottle, moved)
    manager = bool(MANAGERS & request.user.roles)  # type: ignore[union-attr]
    told: dict[str, Any] = {
        "told": tell(holding, limit, words, shop),
        "pressure_head": ["Temperature", "Gauge"],
        "pressures": pressure_rows(holding, bottle, words),
        "warming": warming_chart(holding, bottle, words),
        "weighings": [_weighing(row, words, shop) for row in course.weighings[: -LATEST - 1 : -1]],
        "moves": [_move(line, bottle, others, words, shop, linked=manager) for line in moved],
        "acts": list(_acts(bottle, standing, manager)),
        "chart": None,
    }
    if len(course.levels) + len(course.weighings) > 1:
        chart = _chart(bottle, course, limit, words, shop)
        head, *rows = to_rows(chart)
        told["chart"] = {"svg": mark_safe(to_svg(chart, id="contents-chart")), "head": head, "rows": rows}
    return {"contents": told}


def _acts(bottle: Bottle, standing: Standing, manager: bool) -> Iterator[dict[str, str]]:
    """What else can be done with the contents."""
    supply = bottle.use == "supply" or bool(standing.ownership and standing.ownership.kind == "supplier")
    pages = [("bottles:use", "Used by a car"), ("bottles:vent", "Vented"), ("bottles:joined", "Joined with another")]
    if supply:
        pages += [("bottles:deliver", "Delivery"), ("bottles:give_back", "Return to the supplier")]
    for page, word in pages:
        yield {"url": reverse(page, args=[bottle.code]), "words": word}


def _chart(bottle: Bottle, course: Course, limit: int | None, words: RefillWords, shop: Shop) -> Chart:
    unit = "lb" if words.units.name == "us" else "kg"
    zone = clock.zone(shop)

    def x(instant: datetime) -> float:
        local = instant.astimezone(zone)
        return local.toordinal() + (local.hour * 3600 + local.minute * 60 + local.second) / 86_400

    def y(grams: int) -> float:
        return float(value_in(grams, unit))

    series = [Series("by the books", [(x(when), y(level)) for when, level in course.levels], kind="step")]
    series.append(
        Series("weighed", [(x(row.happened_at), y(max(0, row.net_g)), y(row.error_g)) for row in course.weighings], kind="dots")
    )
    return Chart(
        title=f"What {bottle.code} held",
        x=Axis("Day", kind="day"),
        y=Axis("Nitrous", unit, low=0, decimals=1 if unit == "lb" else 2),
        series=[one for one in series if one.points],
        marks=[Mark("fill limit", y=y(limit))] if limit else [],
    )


def _weighing(row: Weighed, words: RefillWords, shop: Shop) -> dict[str, Any]:
    return {
        "when": at(row.happened_at, shop),
        "net": words.mass(row.net_g, plus_minus_g=row.error_g),
        "typed": row.typed,
        "scale": row.scale,
        "step": STEPS[row.step],
        "wet": row.wet,
        "who": row.person or full_name(None),
        "strike_url": reverse("bottles:strike_weighing", args=[row.key]),
    }


def _move(
    line: Moved, bottle: Bottle, others: Mapping[int, Account], words: RefillWords, shop: Shop, *, linked: bool
) -> dict[str, Any]:
    came = line.own == bottle.pk
    other = others[line.source if came else line.target]
    undone = line.reverses is None and line.reversed_by is not None
    return {
        "when": at(line.happened_at, shop),
        "what": f"{KINDS[line.kind]}{', reversed' if undone else ''}: {'from' if came else 'to'} {account_words(other)}",
        "grams": f"{'+' if came else '−'}{words.mass(line.grams)}",
        "origin": ORIGINS[line.origin],
        "who": line.person or full_name(None),
        "note": line.note,
        "url": reverse("bottles:movement", args=[line.movement]) if linked else "",
    }
