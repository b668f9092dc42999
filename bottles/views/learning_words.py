"""Forecast against the scale in words: which refills are compared, groups of them, rows of the table."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from django.urls import reverse

from bottles.models import Forecast, Refill
from bottles.rules.agreement import Agreement, Compared, agreement
from bottles.rules.learning import WHY_NOT_COMPARED, not_compared
from bottles.rules.outliers import Span
from bottles.selectors.learning import Went
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
        forecast = forecast_of(row)
        likely = forecast.likely_g or 0
        came, at_limit = row.came_g, row.refill.ended_by == "limit"
        room = _room(row)
        # The valve is shut short of it by the scale's ±, to its step: what ended at its limit counts as that.
        step = row.refill.station.scale.resolution_g if row.refill.station.scale else 0
        if at_limit and abs(room - came) <= 2 * (row.error_g + step):
            came = room
        found.append(Placed(row, Span(forecast.low_g, likely, forecast.high_g, came, row.error_g, at_limit)))
    return found, others


def others_words(others: Counter[str], words: dict[str, str] | None = None) -> list[tuple[int, str]]:
    """Counts with their words, the most first."""
    named = words or WHY_NOT_COMPARED
    return [(count, named[code]) for code, count in sorted(others.items(), key=lambda pair: (-pair[1], pair[0]))]


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


def _room(row: Went) -> int:
    before = row.course.before
    return row.refill.target_g - max(0, before.net_g) if before else 0


def forecast_of(row: Went) -> Forecast:
    """The forecast of a refill that is compared."""
    forecast = row.course.draws[0].forecast
    assert forecast is not None  # `not_compared` lets no other through
    return forecast


def _percent(share: float) -> str:
    return f"{share * 100:.0f}"
