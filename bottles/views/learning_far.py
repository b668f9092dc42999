"""A refill far outside its band in words: what is known of it beside its weights, and its likely causes."""

from __future__ import annotations

from typing import Any

from bottles.rules.outliers import Traces, Typed, causes
from bottles.services.forecasting import BOOKS, tolerance_k
from bottles.services.refill_books import flows_of
from bottles.views.learning_words import Placed, forecast_of, row_words, small
from bottles.views.refill_words import RefillWords
from shop.base.models import Shop


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
    before, last, forecast = course.before, course.reads[-1], forecast_of(row.went)
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
