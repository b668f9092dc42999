"""What two bottles do that are joined: each as it's known, at the temperature read on it.

Saves nothing. Where it isn't known what a wall is made of, both materials are tried and the one
that puts more into the bottle that takes is told.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

from bottles.models import Bottle, Supply
from bottles.physics.joined import SECOND, Joined, joined
from bottles.physics.vessel import Vessel
from bottles.selectors.filling_facts import Known, below_tube_m3, known_contents, takes_liquid, walls_by
from bottles.selectors.judging import rulebook
from bottles.services.stations import line_volume_m3
from shop.base.errors import NotReady, Refusal
from shop.base.models import Shop


@dataclass(frozen=True, slots=True)
class End:
    """One bottle of the pair, as it stands."""

    bottle: Bottle
    temperature_mk: int
    inverted: bool = False


@dataclass(frozen=True, slots=True)
class JoinedAnswer:
    """The forecast for the pair, with what it was worked out from."""

    ends: tuple[End, End]
    known: tuple[Known, Known]
    limits_g: tuple[int | None, int | None]
    found: Joined
    walls_guessed: tuple[str, ...]  # codes of bottles whose wall isn't known

    @property
    def giver(self) -> int | None:
        """Which of the two gives, 0 or 1; None where nothing flows."""
        if self.found.flows_from is None:
            return None
        return 1 if self.found.flows_from == SECOND else 0


def work_out_joined(shop: Shop, ends: tuple[End, End]) -> JoinedAnswer:
    """Forecast what flows between two joined bottles.

    Raises Refusal for one bottle twice; NotReady where a capacity or the contents aren't known; and
    PhysicsError for temperatures that no bottle may have.
    """
    bottles = [end.bottle for end in ends]
    if bottles[0].pk == bottles[1].pk:
        raise Refusal("That is the same bottle. Choose the other one.", code="same bottle", field="other")
    known = known_contents(bottles[0]), known_contents(bottles[1])
    judged = rulebook(shop).judge_all(bottles)
    limits = judged[bottles[0].pk].limit.grams, judged[bottles[1].pk].limit.grams
    candidates = [_vessels(end, one) for end, one in zip(ends, known, strict=True)]
    line = _line_m3(bottles)
    limits_kg = (limits[0] / 1000 if limits[0] else None), (limits[1] / 1000 if limits[1] else None)
    answers = [joined(first, second, limits_kg=limits_kg, line_volume_m3=line) for first, second in product(*candidates)]
    guessed = tuple(bottle.code for bottle, vessels in zip(bottles, candidates, strict=True) if len(vessels) > 1)
    return JoinedAnswer(ends, known, limits, max(answers, key=_taken_kg), guessed)


def _vessels(end: End, known: Known) -> Sequence[Vessel]:
    """The bottle with each wall that it may have."""
    bottle = end.bottle
    if bottle.capacity_ml is None:
        raise NotReady(
            f"{bottle.code} has no water capacity written down. Complete its record first.", code="no capacity", field="other"
        )
    if known.grams is None:
        raise NotReady(
            f"Nobody knows what {bottle.code} holds: it was never weighed. Weigh it first.", code="contents unknown", field="other"
        )
    return [
        Vessel(
            bottle.capacity_ml / 1e6, wall, max(0, known.grams) / 1000, end.temperature_mk / 1000,
            liquid_pickup=takes_liquid(bottle, inverted=end.inverted) is not False,
            below_tube_m3=below_tube_m3(bottle, inverted=end.inverted),
        )
        for wall in walls_by(bottle, known.tare).heat_j_k
    ]  # fmt: skip


def _taken_kg(found: Joined) -> float:
    """What the bottle that takes may come to hold."""
    return max((passing.outcome.receiver_final_kg for passing in (found.quick, found.long) if passing), default=0.0)


def _line_m3(bottles: Sequence[Bottle]) -> float:
    """The hose between them: that of the station on which one of them hangs."""
    supply = Supply.objects.filter(bottle__in=bottles).select_related("station").first()
    return line_volume_m3(supply.station) if supply else 0.0
