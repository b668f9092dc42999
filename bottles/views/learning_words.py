"""Forecast against the scale in words: rows, groups, the fitted figures, refills far outside their band."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from django.urls import reverse

from bottles.models import Fit, Forecast, Refill
from bottles.physics.condensation import PRIOR
from bottles.physics.fitting import ENOUGH
from bottles.physics.fitting_words import WAYS, litres, why_untold
from bottles.rules.agreement import Agreement, Compared, agreement
from bottles.rules.learning import WHY, WHY_NOT_COMPARED, not_compared, size_span
from bottles.rules.outliers import Span, Traces, Typed, causes
from bottles.selectors.learning import Figures, Scope, Went
from bottles.services.forecasting import BOOKS, tolerance_k
from bottles.services.refill_books import flows_of
from bottles.views.refill_words import RefillWords
from shop.base import clock
from shop.base.models import Shop

GROUP_HEAD = ("", "Refills", "Bias", "Spread", "Within the band")
_OUNCE_G, _OUNCES_BELOW_G = 28.349523125, 450
ROW_HEAD = ("Closed", "Bottle", "From", "Likely", "Came", "Difference", "Band", "")


@dataclass(frozen=True, slots=True)
class Placed:
    """A refill that can be compared: what was forecast and what came, as the statistics count it."""

    went: Went
    span: Span

    @property
    def refill(self) -> Refill:
        """The refill itself."""
        return self.went.refill

    @property
    def source(self) -> str:
        """The supply bottle's code."""
        return self.went.course.draws[0].source.code

    @property
    def compared(self) -> Compared:
        """The refill as the statistics take it."""
        return Compared(self.span.off_g, self.span.inside)


def placed(rows: Iterable[Went]) -> tuple[list[Placed], Counter[str]]:
    """Part the refills into those that are compared and the others, these counted by why."""
    found: list[Placed] = []
    others: Counter[str] = Counter()
    for row in rows:
        why = not_compared(row.closed)
        if why:
            others[why] += 1
            continue
        forecast = _forecast(row)
        likely = forecast.likely_g or 0
        came, at_limit = row.came_g, row.refill.ended_by == "limit"
        room = _room(row)
        # The valve is shut short of it by the scale's ± and step: what ended at its limit counts as that.
        if at_limit and (row.course.proves_full or abs(room - came) <= 2 * row.error_g):
            came = room
        found.append(Placed(row, Span(forecast.low_g, likely, forecast.high_g, came, row.error_g, at_limit)))
    return found, others


def others_words(others: Counter[str], words: dict[str, str] | None = None) -> list[tuple[int, str]]:
    """Counts with their words, the most first."""
    named = words or WHY_NOT_COMPARED
    return [(count, named[code]) for code, count in sorted(others.items(), key=lambda pair: (-pair[1], pair[0]))]


def summed(rows: Sequence[Placed]) -> Agreement | None:
    """All of them as one group."""
    return agreement([row.compared for row in rows])


def groups(rows: Sequence[Placed], by: Callable[[Placed], Any], name: Callable[[Any], str], words: RefillWords) -> list[list[str]]:
    """A row a group, in alphabetical order or that of the sizes: never by how well it did."""
    parts: dict[Any, list[Compared]] = {}
    for row in rows:
        parts.setdefault(by(row), []).append(row.compared)
    return [[name(key), *figures(agreement(parts[key]), words)] for key in sorted(parts)]


def figures(told: Agreement | None, words: RefillWords) -> list[str]:
    """A group's cells: how many, bias and spread with their intervals, how many inside."""
    if told is None:
        return ["0", "", "", ""]
    bias = signed(told.bias_g, words)
    if told.bias_error_g is not None:
        bias += f" ±{small(told.bias_error_g, words)}"
    spread = "" if told.spread_g is None else small(told.spread_g, words)
    if told.spread_low_g is not None and told.spread_high_g is not None:
        spread += f" ({small(told.spread_low_g, words)} to {small(told.spread_high_g, words)})"
    share = f"{told.inside} of {told.count} ({_percent(told.inside_low)} to {_percent(told.inside_high)} %)"
    return [str(told.count), bias, spread, share]


def row_words(row: Placed, words: RefillWords, shop: Shop) -> dict[str, Any]:
    """One line of the table."""
    span, refill = row.span, row.refill
    return {
        "url": reverse("bottles:refill", args=[refill.pk]),
        "cells": [
            f"{refill.closed_at.astimezone(clock.zone(shop)):%Y-%m-%d %H:%M}" if refill.closed_at else "",
            refill.bottle.code, row.source, words.mass(span.likely_g), words.mass(span.came_g, plus_minus_g=span.error_g),
            signed(span.off_g, words), words.span(span.low_g, span.high_g), position(span),
        ],
    }  # fmt: skip


def position(span: Span) -> str:
    """Where it lies, in a word."""
    if span.inside:
        return "within"
    side = "less" if span.off_g < 0 else "more"
    return f"far {side}" if span.far else side


def odd(row: Placed, same_side: int, words: RefillWords, shop: Shop) -> dict[str, Any]:
    """A refill far outside its band, with its likely causes."""
    shown = row_words(row, words, shop)
    cells = shown["cells"]
    return {
        "url": shown["url"], "code": row.refill.bottle.code, "when": cells[0], "source": row.source,
        "difference": f"{small(abs(row.span.off_g), words)} {'less' if row.span.off_g < 0 else 'more'} than likely",
        "forecast": words.span(row.span.low_g, row.span.high_g), "came": cells[4],
        "causes": [{"sentence": one.sentence, "strength": one.strength} for one in causes(row.span, traces(row, same_side))],
    }  # fmt: skip


def traces(row: Placed, same_side: int) -> Traces:
    """What else is known of a refill that went far out of its band."""
    course, refill = row.went.course, row.refill
    before, last, forecast = course.before, course.reads[-1], _forecast(row.went)
    assert before is not None
    told, readings = forecast.result, forecast.readings
    flows = {flow.kind: flow.grams for flow in flows_of(course)}
    taken = {name: readings.get(name, "wall") for name in ("taken", "bottle_taken")}
    worth = {part["from"]: float(part["kg"]) for part in told.get("width", ())}
    degrees = max(tolerance_k(refill.station, each) for each in taken.values())
    ends = [told.get(name) or {} for name in ("mixed", "wall_condensing")]
    left = told.get("source_left_kg")
    return Traces(
        before=Typed(before.typed, before.gross_g), after=Typed(last.typed, last.gross_g),
        tares_differ=before.tare_id != last.tare_id, missing_g=flows.get("missing", 0), found_g=flows.get("found beyond", 0),
        supply_by_books=told.get("source_origin") == BOOKS, supply_left_g=None if left is None else round(left * 1000),
        supply_held_g=told.get("source_g"), liquid_out=any(end.get("liquid_out") for end in ends),
        not_vented="not_vented" in told.get("notes", ()), start=readings.get("start", "weighed"),
        supply_in_air=taken["taken"] == "air", bottle_in_air=taken["bottle_taken"] == "air",
        supply_kg_k=worth.get("source temperature", 0.0) / degrees, bottle_kg_k=worth.get("receiver temperature", 0.0) / degrees,
        minutes=int((refill.closed_at - refill.opened_at).total_seconds() // 60) if refill.closed_at else 0,
        same_bottle_off=same_side,
    )  # fmt: skip


def fitted_rows(known: Figures, shop: Shop) -> list[dict[str, Any]]:
    """The condensation figures: the ways, their sizes, then where the way isn't known; priors said as such."""
    wanted: list[Scope] = [("dip", None), ("spray", None), ("", None)]
    wanted += [scope for scope in known.rows if scope not in wanted and scope[0]]
    order = {"dip": 0, "spray": 1, "": 2}
    wanted.sort(key=lambda scope: (order[scope[0]], scope[1] or 0))
    return [_fitted(scope[0], scope[1], known.rows.get(scope), known, shop) for scope in wanted]


def left_out_words(row: Fit | None) -> list[tuple[int, str]]:
    """Why refills tell nothing of condensation, counted."""
    return others_words(Counter(row.left_out), dict(WHY)) if row else []


def signed(grams: float, words: RefillWords) -> str:
    """A difference with its sign."""
    shown = small(abs(grams), words)
    if shown.split()[0].strip("0.") == "":
        return shown
    return f"{'+' if grams > 0 else '−'}{shown}"


def small(grams: float, words: RefillWords) -> str:
    """A weight that may be a few grams: ounces to a tenth, for a bias is finer than a scale's step."""
    if words.units.name == "us" and abs(grams) < _OUNCES_BELOW_G:
        return f"{grams / _OUNCE_G:.1f} oz"
    return words.small(round(grams))


def _fitted(way: str, size: int | None, row: Fit | None, known: Figures, shop: Shop) -> dict[str, Any]:
    """One line of the figures."""
    informative, bounds = (row.informative, row.bounds) if row else (0, 0)
    holds = known.row_for(way, size)
    own = row is not None and holds is row
    figure = (row.figure_milli / 1000, row.deviation_milli / 1000) if row and own else _of(holds)
    if own and row is not None:
        since = f"{row.act.recorded_at.astimezone(clock.zone(shop)):%Y-%m-%d}"
        said = ""
    else:
        since, said = "", why_untold(informative, bounds)
        if holds is not None:
            said = f"Too few of its own: that of {'all its sizes' if size else 'the whole shop'} holds."
    return {
        "name": litres(size_span(size)) if size else WAYS[way].capitalize(), "inner": bool(size),
        "figure": f"{figure[0]:.2f} ±{2 * figure[1]:.2f}",
        "origin": "fitted" if own else "taken over" if holds is not None else f"prior, {PRIOR.origin}",
        "since": since, "informative": informative, "bounds": bounds, "said": said,
        "enough": informative >= ENOUGH,
    }  # fmt: skip


def _of(row: Fit | None) -> tuple[float, float]:
    return (row.figure_milli / 1000, row.deviation_milli / 1000) if row else (PRIOR.figure, PRIOR.deviation)


def _room(row: Went) -> int:
    before = row.course.before
    return row.refill.target_g - max(0, before.net_g) if before else 0


def _forecast(row: Went) -> Forecast:
    forecast = row.course.draws[0].forecast
    assert forecast is not None  # `not_compared` lets no other through
    return forecast


def _percent(share: float) -> str:
    return f"{share * 100:.0f}"
