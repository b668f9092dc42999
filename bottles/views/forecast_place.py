"""Where a refill ended on what was forecast for it: the band, the scale's mark on it, and the same in words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from bottles.models import Forecast, Refill
from bottles.views.refill_words import RefillWords

WIDTH, EDGE = 600, 20  # of the drawing, and of what it leaves free at either end
BY_HAND = frozenset({"by hand", "abandoned"})
ENDED = {
    "limit": "the fill limit was reached",
    "flow ceased": "the flow ceased",
    "by hand": "stopped by hand",
    "abandoned": "abandoned",
}


@dataclass(frozen=True, slots=True)
class Came:
    """What came over from one supply bottle by the scale, and what ended that."""

    grams: int
    error_g: int
    ended_by: str  # as the refill has it; empty: open still, or gone on from another supply bottle
    goes_on: bool  # more may still come from it


def came_from(refill: Refill, grams: int, error_g: int, *, last: bool) -> Came:
    """What came over, with what ended it where this supply bottle was the last."""
    return Came(grams, error_g, refill.ended_by if last else "", last and refill.closed_at is None)


def place(forecast: Forecast, came: Came, words: RefillWords) -> dict[str, Any]:
    """A refill's place on its forecast, ready to be drawn and read."""
    low, high, error = forecast.low_g, forecast.high_g, came.error_g
    below, above = came.grams < low - error, came.grams > high + error
    early = below and (came.goes_on or came.ended_by in BY_HAND)
    word = "within what was forecast"
    if early:
        word = "not there yet" if came.goes_on else "stopped before it got there"
    elif below or above:
        word = "less than forecast" if below else "more than forecast"
    return {
        "forecast": words.span(low, high), "came": words.mass(came.grams, plus_minus_g=error or None), "word": word,
        "kind": "open" if early else "after" if below or above else "yes", "ended": ENDED.get(came.ended_by, ""),
        "likely": words.mass(forecast.likely_g) if forecast.likely_g is not None else "",
        "off": _off(forecast, came, words),
        "drawn": _drawn(forecast, came),
    }  # fmt: skip


def _off(forecast: Forecast, came: Came, words: RefillWords) -> str:
    """How far from the likely figure the scale ended."""
    if forecast.likely_g is None:
        return ""
    off = came.grams - forecast.likely_g
    if abs(off) <= came.error_g:
        return "as the likely figure has it"
    return f"{words.small(abs(off))} {'more' if off > 0 else 'less'} than likely"


def _drawn(forecast: Forecast, came: Came) -> dict[str, float | None]:
    """Places between nothing and the most that is drawn."""
    room = max(0, int(forecast.result.get("target_g", 0)) - int(forecast.result.get("start_g", 0)))
    most = max(room, forecast.high_g, came.grams + came.error_g, 1)

    def at(grams: int) -> float:
        return round(EDGE + (WIDTH - 2 * EDGE) * max(0, grams) / most, 1)

    low, mark = at(forecast.low_g), at(came.grams)
    left, right = at(came.grams - came.error_g), at(came.grams + came.error_g)
    return {
        "low": low, "width": max(2.0, round(at(forecast.high_g) - low, 1)), "limit": at(room) if room else None,
        "likely": at(forecast.likely_g) if forecast.likely_g is not None else None,
        "mark": mark, "mark_left": mark - 9, "mark_right": mark + 9, "from": left, "to": right,
    }  # fmt: skip
