"""A pumped refill's forecast, as its page says it: it has stops of its own."""

from __future__ import annotations

from typing import Any

from bottles.models import Station
from bottles.physics.pumped import DELIVERY_LIMIT, INLET_LIMIT
from bottles.physics.venting_filling import RECEIVER_FULL
from bottles.services.forecasting import Answer
from bottles.views.refill_words import RefillWords

STOPPED = {
    "fill limit": "the fill limit: stop by the scale",
    "source out of liquid": "the supply's liquid runs out: stop the pump before it draws vapour",
    DELIVERY_LIMIT: "the pump's highest delivery pressure",
    INLET_LIMIT: "the pump's lowest inlet pressure",
    RECEIVER_FULL: "the bottle is full of liquid: far too much",
}
METHOD = (
    "A pump moves liquid against any pressure up to what its plate allows, so equal pressures end nothing: the fill limit, the "
    "supply's liquid or the plate does. Mass and energy conserved, the pump's work (at half efficiency, common practice, no "
    "source) stays in the liquid; between a quick refill and one with both bottles kept at their temperatures. The span is what "
    "the supply bottle's weight leaves open."
)
REACHES = (("yes", "The limit is reached, by the lowest figure too"), ("yes", "The limit is likely reached"),
           ("after", "The limit is reached at best"), ("after", "A short fill: the limit isn't reached"))  # fmt: skip


def pumped_context(answer: Answer, station: Station, words: RefillWords) -> dict[str, Any]:
    """What takes the place of the forecast by pressure."""
    pumped = answer.pumped
    assert pumped is not None
    kind, reached = _reached(answer)
    named = (("pumped quickly", pumped.quick), ("pumped, kept at temperature", pumped.held))
    return {
        "limits": [(name, words.mass(round(one.moved_kg * 1000)), STOPPED[one.stopped_by]) for name, one in named],
        "kind": kind, "reached": reached, "cold": "", "width": [], "narrowing": "", "helps": None, "method": METHOD,
        "warnings": [sentence for _, sentence in (*pumped.warnings, *answer.notes)],
        "plate": _plate(station, words),
    }  # fmt: skip


def _reached(answer: Answer) -> tuple[str, str]:
    room = answer.target_g - answer.start_g - 1  # a gram is lost in rounding down
    ends = (answer.low_g, answer.likely_g or 0, answer.high_g)
    kind, said = next((word for word, grams in zip(REACHES, ends, strict=False) if grams >= room), REACHES[-1])
    return kind, said


def _plate(station: Station, words: RefillWords) -> str:
    parts = [
        f"{name} {words.pressure(pascal)}"
        for name, pascal in (("highest delivery pressure", station.pump_most_pa), ("lowest inlet pressure", station.pump_least_pa))
        if pascal is not None
    ]  # fmt: skip
    return "By its plate: " + ", ".join(parts) + "." if parts else ""
