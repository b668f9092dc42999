"""A bottle above its limit is a timer: when it's full of liquid, and what must come out until then.

Computed outside any transaction, from the last weighing and what was read when the refill began.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import timedelta

from bottles.models import Bottle, Weighing
from bottles.physics.heating import overfull
from bottles.physics.vessel import COLDEST, HOTTEST, Vessel
from bottles.selectors.filling_facts import walls_of
from bottles.selectors.refills import Course, net_without_hose
from shop.base import clock

ROOM_MK = 293_150  # where no reading of the supply bottle, which stands in the room, is at hand
WARMS_MK = 3_000  # by so much a room may warm in the meantime (common practice, no source)


@dataclass(frozen=True, slots=True)
class Timer:
    """What an overfull bottle asks for; `left` None: this room doesn't warm it so far."""

    over_g: int
    out_g: int  # at least so much must come out for the scale to show the limit
    full_now: bool
    full_at_mk: int | None
    left: timedelta | None
    room_mk: int
    room_read: bool
    start_mk: int
    how: tuple[str, ...]


def timer_of(course: Course, weighing: Weighing) -> Timer:
    """Return the timer of a bottle that was weighed above its limit.

    The warmer of what was read and what was forecast counts as its temperature, the upper end of
    its ± as its contents, the lighter of two walls as its wall: whatever is quicker.
    """
    refill = course.refill
    bottle = refill.bottle
    start_mk, room_mk, read = _temperatures(course)
    room_mk += WARMS_MK
    net = net_without_hose(refill, weighing)
    vessel = Vessel(
        (bottle.capacity_ml or 1) / 1e6, min(walls_of(bottle).heat_j_k), (net + weighing.error_g) / 1000,
        min(max(start_mk / 1000, COLDEST), HOTTEST),
    )  # fmt: skip
    found = overfull(vessel, refill.limit_g / 1000, ambient_k=room_mk / 1000)
    left = None
    if found.seconds_until_full is not None:
        since = clock.now() - weighing.happened_at
        left = max(timedelta(0), timedelta(seconds=found.seconds_until_full) - since)
    return Timer(
        over_g=net - refill.limit_g, out_g=net - refill.limit_g, full_now=found.full_now or left == timedelta(0),
        full_at_mk=round(found.full_at_k * 1000) if found.full_at_k is not None else None, left=left, room_mk=room_mk,
        room_read=read, start_mk=start_mk, how=how_to_let_out(bottle),
    )  # fmt: skip


def how_to_let_out(bottle: Bottle) -> tuple[str, ...]:
    """Return how nitrous is let out of a bottle, from its dip tube (common practice, no source)."""
    which = {
        "dip": "Upright, its dip (siphon) tube lets liquid out: a lot at once, very cold. Open the valve a little at a time.",
        "none": "Upright it lets vapour out: slowly, and the bottle cools. Upside down it lets liquid out: a lot at once.",
        "unknown": "Whether it lets liquid or vapour out isn't known: expect liquid, a lot at once and very cold.",
    }[bottle.dip_tube]
    return (
        "Outdoors, away from people, flames, fuel, open windows, pits and drains; never in the shop. Stand up-wind of it, "
        "don't breathe it.",
        which,
        "The bottle strapped so that it can't move, the outlet pointing away; gloves and eye protection on.",
        "Don't warm it, don't lay it in the sun, don't leave it.",
    )


def _temperatures(course: Course) -> tuple[int, int, bool]:
    """The bottle's likely temperature, that of the room, and whether the latter was read."""
    draw = course.draws[-1] if course.draws else None
    if draw is None or draw.forecast is None:
        return ROOM_MK, ROOM_MK, False
    readings, result = draw.forecast.readings, draw.forecast.result
    start = int(readings["bottle_temperature"]["stored"])
    mixed = result.get("mixed")
    if mixed:
        start = max(start, round((mixed["receiver_final_c"] + 273.15) * 1000))
    return start, int(readings["supply_temperature"]["stored"]), True
