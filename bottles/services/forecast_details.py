"""What is worked out beside a forecast, when it's asked for: how other starts would end."""

from __future__ import annotations

from dataclasses import dataclass, replace

from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, Start
from bottles.services.forecasting import Pair
from shop.physics.errors import PhysicsError

STARTS = (VENTED, OWN_VAPOUR, AIR)


@dataclass(frozen=True, slots=True)
class StartWorth:
    """How a refill would end from one start: what goes over, what the bottle holds then."""

    kind: str
    begins_g: int
    likely_g: int
    holds_g: int


def starts_compared(pair: Pair) -> list[StartWorth]:
    """Work the refill out for the start as it is, then for each other one; a start that can't be is left out."""
    found = [_worth(pair, pair.start)]
    found += [_worth(pair, Start(kind, None, pair.start.ambient_pa)) for kind in STARTS if kind != pair.start.kind]
    return [one for one in found if one is not None]


def _worth(pair: Pair, start: Start) -> StartWorth | None:
    try:
        answer = replace(pair, start=start).worked_out()
    except PhysicsError:
        return None
    if answer.likely_kg is None:
        return None
    begins = pair.limit_kg - answer.room_kg
    return StartWorth(
        start.kind, round(begins * 1000), round(answer.likely_kg * 1000), round((begins + answer.likely_kg) * 1000)
    )
