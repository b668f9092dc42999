"""What letting out would do to a bottle as it is now: vapour or liquid, by its dip tube and how it stands."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.models import Bottle
from bottles.physics.venting import INVERTED, UPRIGHT, phase_leaving, vent
from bottles.physics.vessel import Vessel
from bottles.selectors.filling_facts import below_tube_m3, known_contents, walls_by
from shop.physics.errors import PhysicsError


@dataclass(frozen=True, slots=True)
class VentingWorth:
    """One way of letting out so much: what leaves, and the bottle after it."""

    inverted: bool
    phase: str
    lost_g: int
    temperature_mk: int
    pressure_pa: int


def venting_worth(bottle: Bottle, *, amount_g: int, limit_g: int | None, temperature_mk: int) -> list[VentingWorth]:
    """Return what letting out an amount does, and coming down to the limit where it holds more.

    Nothing where what it holds, its capacity or its tube isn't known: then the scale alone tells.
    """
    known = known_contents(bottle)
    if not known.grams or not bottle.capacity_ml:
        return []
    wall = walls_by(bottle, known.tare).heat_j_k[0]
    amounts = [amount_g] if amount_g < known.grams else []
    if limit_g and known.grams > limit_g:
        amounts.append(known.grams - limit_g)
    found = []
    for inverted in (False, True):
        phase = phase_leaving(bottle.dip_tube, INVERTED if inverted else UPRIGHT)
        for grams in amounts if phase else ():
            try:
                told = vent(
                    Vessel(
                        bottle.capacity_ml / 1e6, wall, known.grams / 1000, temperature_mk / 1000,
                        below_tube_m3=below_tube_m3(bottle, inverted=inverted),
                    ),
                    phase or "", to_kg=(known.grams - grams) / 1000,
                )  # fmt: skip
            except PhysicsError:
                return []
            found.append(VentingWorth(inverted, phase or "", grams, round(told.temperature_k * 1000), round(told.pressure_pa)))
    return found
