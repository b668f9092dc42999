"""Which refill informs the condensation figure, in which class it counts, and which stay out.

A refill that ended because the flow ceased tells its own figure. One stopped before, at its limit
or by hand, tells that its figure can't have been lower than what came over: a lower bound.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

# Upper ends of the classes of sizes, in millilitres of water capacity (this project's own choice).
SIZES_ML = (2_500, 5_000, 7_500, 12_000, 20_000, 50_000, 1_000_000)
BOUNDS = ("limit", "by hand")

WHY: Mapping[str, str] = {
    "abandoned": "abandoned",
    "pumped": "pumped",
    "vented": "vented while filling",
    "several supplies": "filled from several supply bottles in turn",
    "reversed": "reversed, or a weighing struck that nothing replaced",
    "line on": "last weighed with the line still on",
    "wet": "weighed wet: ice adds to the reading",
    "no temperatures": "no temperatures were read",
    "reading only": "the supply bottle was known by its gauge alone",
    "walls unknown": "what a wall is made of isn't known",
    "limits alike": "both limits are alike within the scale's ±",
    "no liquid": "the supply bottle gave vapour alone",
    "no flow": "by its readings nothing could flow",
    "not computed": "its readings can't be computed",
}
# What also keeps a forecast from being compared with the scale.
WHY_NOT_COMPARED: Mapping[str, str] = {
    **{code: WHY[code] for code in (
        "abandoned", "pumped", "vented", "several supplies", "reversed", "line on", "wet", "no temperatures", "reading only",
    )},
    "by hand": "stopped by hand before the flow ceased",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Closed:
    """What is known of how a refill went, as far as it decides what it tells."""

    ended_by: str
    draws: int = 1
    pumped: bool = False
    vented: bool = False
    reversed_by_hand: bool = False
    weighed_before: bool = True
    weighed_after: bool = True
    line_off: bool = True
    wet: bool = False
    forecast: bool = True
    supply_known: bool = True


def left_out(closed: Closed) -> str:
    """Return why a refill tells nothing of the condensation figure; empty where it tells something."""
    first = (
        ("abandoned", closed.ended_by == "abandoned"),
        ("pumped", closed.pumped),
        ("vented", closed.vented),
        ("several supplies", closed.draws != 1),
        ("reversed", closed.reversed_by_hand or not (closed.weighed_before and closed.weighed_after)),
        ("line on", not closed.line_off),
        ("wet", closed.wet),
        ("no temperatures", not closed.forecast),
        ("reading only", not closed.supply_known),
    )
    return next((code for code, holds in first if holds), "")


def not_compared(closed: Closed) -> str:
    """Return why what came over says nothing of how good its forecast was; empty where it does."""
    return left_out(closed) or ("by hand" if closed.ended_by == "by hand" else "")


def is_bound(ended_by: str) -> bool:
    """Say whether a refill was stopped before its flow ceased, so that it's a lower bound."""
    return ended_by in BOUNDS


def way_of(dip_tube: str) -> str:
    """Return how the liquid enters a bottle by its dip tube; empty where that isn't known."""
    return {"dip": "dip", "none": "spray"}.get(dip_tube, "")


def size_of(capacity_ml: int) -> int:
    """Return the class of sizes that a water capacity falls in: its upper end."""
    return next((end for end in SIZES_ML if capacity_ml <= end), SIZES_ML[-1])


def size_span(size_ml: int) -> tuple[int, int]:
    """Return the ends of a class of sizes, the lower one excluded."""
    before = [end for end in SIZES_ML if end < size_ml]
    return (before[-1] if before else 0), size_ml
