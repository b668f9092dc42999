"""How far what a plan expects of a fill may be off, and what stands behind it.

Each draw is forecast as the Counter would, from the supply bottle as the plan expects it then. Doubts
of draws in turn join by the root of the sum of squares, as if none but a sure one made up for another:
rather too wide than too narrow. Delays aren't in it.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot

from bottles.physics.condensation import Condensation
from bottles.physics.forecast_band import Tolerances, band_of
from bottles.rules.planning.fills import Receiver
from bottles.rules.planning.problem import Drawn, Filled
from bottles.rules.planning.schedule import Rehearsal
from shop.physics.errors import PhysicsError

_READINGS = Tolerances()


@dataclass(frozen=True, slots=True)
class Before:
    """How a draw begins, and its limits without the fill limit; None where no limit can be told."""

    held_kg: float
    receiver_k: float
    source_kg: float
    source_k: float
    slow_kg: float | None
    quick_kg: float | None


@dataclass(frozen=True, slots=True)
class Span:
    """What a bottle comes to hold, low and high, and how each of its draws begins."""

    low_kg: float
    high_kg: float
    draws: tuple[Before, ...]


def span_of(rehearsal: Rehearsal, filled: Filled) -> Span:
    """Return between which masses a planned fill may end; what's good enough only likely can then be told."""
    bottle = rehearsal.day.bottles[filled.choice.bottle]
    held, warm = bottle.net_kg, bottle.starts[filled.choice.start].temperature_k
    below, above, found = 0.0, 0.0, []
    for draw in filled.draws:
        low, high, before = _draw(rehearsal, (filled.choice.bottle, held, warm), draw, below)
        # Where it's sure to bring more than it has room for, it makes up for what one before may lack.
        below = max(0.0, below - (low - draw.moved_kg)) if low > draw.moved_kg else hypot(below, draw.moved_kg - low)
        above = hypot(above, max(0.0, high - draw.moved_kg))
        found.append(before)
        if draw is not filled.draws[-1]:
            warm = rehearsal.fills.receiver_after(
                (filled.choice.bottle, held, warm), draw.source, before.source_kg, draw.source_k, draw.moved_kg
            )
        held += draw.moved_kg
    return Span(max(bottle.net_kg, held - below), min(bottle.target_kg, held + above), tuple(found))


def _draw(rehearsal: Rehearsal, receiver: Receiver, draw: Drawn, missing: float) -> tuple[float, float, Before]:
    """What one draw brings, low and high, where as much may be missing from the draws before [kg]."""
    number, held, warm = receiver
    bottle, there = rehearsal.day.bottles[number], draw.left_kg + draw.moved_kg + draw.line_kg
    # A draw after another begins from what the scale shows then.
    unsure = bottle.unsure_kg if held == bottle.net_kg and bottle.unsure_kg else _READINGS.scale_kg
    try:
        transfer = rehearsal.fills.transfer(receiver, draw.source, there, draw.source_k)
        band = band_of(
            transfer, bottle.target_kg - held + missing, Condensation(bottle.figure, bottle.deviation), _READINGS,
            ("receiver start" if unsure != _READINGS.scale_kg else "receiver weight", unsure),
        )  # fmt: skip
        limits = transfer.cautious_free_kg(), transfer.mixed_free_kg()
    except PhysicsError:
        return 0.0, draw.moved_kg, Before(held, warm, there, draw.source_k, None, None)
    return band.low, band.high, Before(held, warm, there, draw.source_k, *limits)
