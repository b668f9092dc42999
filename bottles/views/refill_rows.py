"""Refills as lists, their own page and their receipt show them: ready strings."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import timedelta
from typing import Any

from django.urls import reverse

from bottles.models import Refill, Weighing
from bottles.physics.filling import percent_of_limit
from bottles.rules.refill_flows import Flow
from bottles.rules.tares import together
from bottles.selectors.refill_lists import last_sources, last_weighings
from bottles.selectors.refills import Course, course_of, courses_of, net_without_hose
from bottles.services.overfull import timer_of
from bottles.services.refill_books import flows_of
from bottles.services.refill_steps import may_close
from bottles.services.weighing import tare_at
from bottles.views.forecast_place import came_from, place
from bottles.views.forecast_words import stop_words
from bottles.views.refill_words import RefillWords
from shop.base import clock
from shop.base.errors import NotReady
from shop.base.models import Shop
from shop.physics.errors import PhysicsError

BINDS = {
    "filling density": "filling density × water capacity", "charge": "the stamped or labelled charge",
    "permit": "the permit's figure", "own": "the shop's own for this bottle", "shop": "the shop's own",
}  # fmt: skip
WENT = {
    "arrived": "from {source} into the bottle", "line": "left in the line of {source}",
    "missing": "left {source} and didn't arrive: unaccounted", "found": "more than {source} lost by its scale, within the ±",
    "found beyond": "more than {source} lost by its scale: unaccounted", "vented": "let out",
}  # fmt: skip


def refill_rows(refills: Sequence[Refill], words: RefillWords, shop: Shop) -> list[dict[str, Any]]:
    """Rows of a list: what, where, from what, how it stands."""
    if not refills:
        return []
    weighed, sources = last_weighings(refills), last_sources(refills)
    rows = []
    for refill in refills:
        last = weighed.get(refill.pk)
        over = last is not None and refill.closed_at is None and net_without_hose(refill, last) > refill.limit_g
        rows.append({
            "url": reverse("bottles:refill", args=[refill.pk]), "code": refill.bottle.code, "station": str(refill.station),
            "source": sources[refill.pk].code if refill.pk in sources else "",
            "stop_at": words.on_scale(refill.stop_at_g, refill.station.scale),
            "holds": _net(refill, last, words) or "not weighed since it began",
            "limit": words.mass(refill.limit_g), "opened": at(refill.opened_at, shop), "closed": at(refill.closed_at, shop),
            "waits": wait_words(refill, shop), "wait_over": bool(refill.wait_until and refill.wait_until <= clock.now()),
            "kind": "no" if over else "after" if refill.closed_at is None else "yes",
            "word": "overfull" if over else "waits" if refill.wait_until else "filling" if refill.closed_at is None
            else refill.get_ended_by_display(),
        })  # fmt: skip
    return rows


def page_context(refill: Refill, words: RefillWords, shop: Shop) -> dict[str, Any]:
    """Everything that a refill's page and its receipt say."""
    course = course_of(refill)
    last, over = course.last, course.overfull if refill.closed_at is None else None
    return {
        "is_open": refill.closed_at is None,
        "stop": _stop(refill, words),
        "timer": _timer(course, over, words) if over else None,
        "course": course,
        "weighings": [_weighing(refill, row, words, shop) for row in (course.before, *course.reads) if row is not None],
        "draws": [_draw(course, number, words, shop) for number in range(len(course.draws))],
        "moved": [_moved(course, flow, words) for flow in flows_of(course)],
        "waits": wait_words(refill, shop), "wait_over": bool(refill.wait_until and refill.wait_until <= clock.now()),
        "closable": _closable(course), "why_not": _why_not(course),
        "net": _net(refill, last, words),
        "percent": f"{percent_of_limit(net_without_hose(refill, last), refill.limit_g)} %" if last else "",
        "limit": words.mass(refill.limit_g), "target": words.mass(refill.target_g),
        "binds": BINDS.get(refill.decision.binds, refill.decision.binds), "edition": refill.decision.edition,
        "empty_weight": _as_read(course.before, course.before.tare.total_g if course.before else 0, refill, words),
        "full_weight": words.on_scale(refill.stop_at_g, refill.station.scale),
        "left_at": _left_at(course, words), "wet": bool(last and last.wet), "proven_full": course.proves_full,
        "opened": at(refill.opened_at, shop), "closed": at(refill.closed_at, shop), "looked": _looked(refill),
        "compared": compared(course, words),
    }  # fmt: skip


def section_rows(refills: Sequence[Refill], words: RefillWords, shop: Shop) -> list[dict[str, Any]]:
    """A bottle's refills with what was forecast and what came."""
    rows = refill_rows(refills, words, shop)
    for row, course in zip(rows, courses_of(refills), strict=True):
        row["compared"] = compared(course, words) if len(course.draws) == 1 else None  # of several: on its own page
    return rows


def compared(course: Course, words: RefillWords, number: int = 0) -> dict[str, Any] | None:
    """What was forecast for a supply bottle, beside what came over from it; None without either."""
    draw = course.draws[number] if course.draws else None
    if draw is None or draw.forecast is None or not course.reads:
        return None
    last = number == len(course.draws) - 1
    flows = [flow for flow in flows_of(course) if flow.draw == number and flow.kind in ("arrived", "found", "found beyond")]
    if not flows and last and course.refill.closed_at is None:
        return None  # not weighed since it was connected
    error = together(flow.error_g for flow in flows)  # within the ± of the weighings it can't be told apart
    return place(draw.forecast, came_from(course.refill, sum(flow.grams for flow in flows), error, last=last), words)


def at(instant: Any, shop: Shop) -> str:
    """An instant as the shop's clock shows it; empty where there is none."""
    return f"{instant.astimezone(clock.zone(shop)):%Y-%m-%d %H:%M}" if instant else ""


def wait_words(refill: Refill, shop: Shop) -> str:
    """What it waits for and until when."""
    if refill.wait_until is None:
        return ""
    until = refill.wait_until.astimezone(clock.zone(shop))
    same = until.date() == clock.today(shop)
    return f"{refill.wait_note or 'waits'} until {until:%H:%M}" + ("" if same else f" on {until:%Y-%m-%d}")


def _stop(refill: Refill, words: RefillWords) -> dict[str, str] | None:
    if refill.closed_at is not None or refill.station.scale is None:
        return None
    try:
        return stop_words(tare_at(refill.bottle, clock.now()), refill.stop_at_g, refill.target_g, refill.station, words)
    except NotReady:
        return {"figure": words.on_scale(refill.stop_at_g, refill.station.scale), "scale": str(refill.station.scale)}


def _timer(course: Course, over: Weighing, words: RefillWords) -> dict[str, Any]:
    """The overfull bottle: what must come out, how, until when."""
    try:
        found = timer_of(course, over)
    except PhysicsError as error:
        return {"over": words.mass(over.net_g - course.refill.limit_g), "troubles": error.sentence}
    room = f"a room that warms to {words.temperature(found.room_mk)}" + ("" if found.room_read else " (taken, not read)")
    return {
        "over": words.mass(found.over_g), "out": words.mass(found.out_g), "full_now": found.full_now, "how": found.how,
        "full_at": words.temperature(found.full_at_mk) if found.full_at_mk is not None else "",
        "left": _minutes(found.left) if found.left is not None else "", "room": room, "start": words.temperature(found.start_mk),
    }  # fmt: skip


def _net(refill: Refill, weighing: Weighing | None, words: RefillWords) -> str:
    return words.mass(net_without_hose(refill, weighing), plus_minus_g=weighing.error_g) if weighing else ""


def _minutes(left: timedelta) -> str:
    minutes = int(left.total_seconds() // 60)
    if minutes < 1:
        return "less than a minute"
    return f"about {minutes} minutes" if minutes < 120 else f"about {minutes // 60} hours"


def _weighing(refill: Refill, row: Weighing, words: RefillWords, shop: Shop) -> list[str]:
    return [
        at(row.happened_at, shop), row.get_step_display(), words.read(row.gross_g, row.scale),
        words.mass(net_without_hose(refill, row), plus_minus_g=row.error_g) + (", wet" if row.wet else ""), str(row.scale),
    ]  # fmt: skip


def _draw(course: Course, number: int, words: RefillWords, shop: Shop) -> dict[str, Any]:
    draw = course.draws[number]
    forecast = draw.forecast
    return {
        "code": draw.source.code, "url": draw.source.get_absolute_url(), "lot": draw.lot or "lot not known",
        "since": at(draw.happened_at, shop),
        "forecast": words.span(forecast.low_g, forecast.high_g) if forecast else "not forecast",
        "now": "yes" if number == len(course.draws) - 1 else "", "compared": compared(course, words, number),
    }  # fmt: skip


def _moved(course: Course, flow: Flow, words: RefillWords) -> tuple[str, str, str]:
    source = course.draws[flow.draw].source.code if flow.draw is not None else ""
    return (words.small(flow.grams, plus_minus_g=flow.error_g), WENT[flow.kind].format(source=source), flow.origin)


def _closable(course: Course) -> bool:
    return course.refill.closed_at is None and not _why_not(course)


def _why_not(course: Course) -> str:
    try:
        may_close(course, "by hand")
    except NotReady as why:
        return why.sentence
    return ""


def _as_read(weighing: Weighing | None, grams: int, refill: Refill, words: RefillWords) -> str:
    scale = weighing.scale if weighing else refill.station.scale
    return words.read(grams, scale) if scale else words.mass(grams)


def _left_at(course: Course, words: RefillWords) -> str:
    last = course.reads[-1] if course.reads else None
    return words.read(last.gross_g, last.scale) if last else ""


def _looked(refill: Refill) -> str:
    passed = refill.checks.filter(passed=True).count()
    return f"{passed} items in order, looked at by {refill.person or 'Tarebook'}".rstrip(".") + "."
