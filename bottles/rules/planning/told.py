"""A day worked out, and told in whole numbers: what a page says, without a word of it yet."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from bottles.physics.vessel import pressure_and_energy
from bottles.rules.planning.bound import best_kg
from bottles.rules.planning.exact import NODES, best_plan, is_small
from bottles.rules.planning.fills import warming_time
from bottles.rules.planning.heuristic import Watch, good_plan
from bottles.rules.planning.problem import LEAST_DRAW_KG, MOST_DRAWS, Choice, Day, Filled, Plan
from bottles.rules.planning.schedule import Position, Rehearsal
from bottles.rules.planning.spans import Before, span_of
from shop.physics.errors import PhysicsError
from shop.physics.fluid import engine

TOLD = 3  # the form in which a plan is told; one kept in another form isn't shown
_MIDDLING = 12  # bottles: up to here it's worth looking longer, where nobody waits for the page
_LONGER_LOOKED_AT, _LONGER_TRANSFERS = 60_000, 12_000
_AT_ONCE = 3_000  # partial plans, while somebody waits for the page
_EMPTY = 1.02  # of what vapour alone holds
_A_WEEK = 7 * 86_400


def work_out(day: Day, watch: Watch | None = None, *, patient: bool = False) -> dict[str, Any]:
    """Plan a day and tell it; small days by looking at everything, where there is time for that."""
    if not is_small(day):
        if patient and len(day.bottles) <= _MIDDLING:
            return tell(day, good_plan(day, watch, most=_LONGER_LOOKED_AT, transfers=_LONGER_TRANSFERS))
        return tell(day, good_plan(day, watch))
    return tell(day, best_plan(day, watch, nodes=NODES if patient else _AT_ONCE))


def tell(day: Day, plan: Plan) -> dict[str, Any]:
    """Tell a plan: grams, millikelvin, pascal absolute, seconds from the moment of planning."""
    rehearsal = Rehearsal(day)
    end, _ = rehearsal.follow(filled.choice for filled in plan.fills)
    in_time = sorted(plan.fills, key=lambda filled: (filled.draws[0].from_s, filled.choice.bottle))
    left_out = [number for number in range(len(day.bottles)) if number not in end.done]
    return {
        "fills": [_fill(rehearsal, filled) for filled in in_time],
        "unfilled": [_unfilled(rehearsal, end, number) for number in left_out],
        "sources": [_source(rehearsal, end, number) for number in range(len(day.sources))],
        "empties": [_empty(rehearsal, end, number) for number in range(len(day.sources)) if _is_empty(rehearsal, end, number)],
        "count": len(day.bottles), "good": plan.good, "most_good": plan.bound.good, "broken": plan.score[0],
        "least_broken": plan.bound.broken, "exact": plan.exact, "looked_at": plan.looked_at, "changes": plan.score[5],
        "good_per_mille": day.good_per_mille, "told": TOLD,
    }  # fmt: skip


def _fill(rehearsal: Rehearsal, filled: Filled) -> dict[str, Any]:
    day = rehearsal.day
    bottle = day.bottles[filled.choice.bottle]
    start = bottle.starts[filled.choice.start]
    enough = filled.final_kg >= rehearsal.good_kg[filled.choice.bottle] - 1e-6
    late = max(0, filled.until_s - bottle.promised_s) if bottle.promised_s is not None else 0
    span, good = span_of(rehearsal, filled), rehearsal.good_kg[filled.choice.bottle]
    return {
        "bottle": bottle.code, "promised_s": bottle.promised_s, "late_s": late, "good": enough,
        "short_g": 0 if enough else _grams(good - filled.final_kg),
        "low_g": _grams(span.low_kg), "high_g": _grams(span.high_kg), "low_short_g": _grams(max(0.0, good - span.low_kg)),
        "start_g": _grams(bottle.net_kg), "final_g": _grams(filled.final_kg), "target_g": _grams(bottle.target_kg),
        "start_mk": round(start.temperature_k * 1000), "place": start.place, "stands_in": bottle.stands_in,
        "figure_milli": round(bottle.figure * 1000), "goes_on": bottle.hose is not None,
        "chill_from_s": filled.chill_from_s, "chill_until_s": filled.chill_until_s,
        "draws": [
            {
                "source": day.sources[draw.source].code, "station": draw.station, "from_s": draw.from_s, "until_s": draw.until_s,
                "moved_g": _grams(draw.moved_kg), "line_g": _grams(draw.line_kg), "left_g": _grams(draw.left_kg),
                "left_mk": round(draw.left_k * 1000), "left_pa": _pressure(day, draw.source, draw.left_kg, draw.left_k),
                "changed": draw.changed, "last": draw.left_kg <= _EMPTY * rehearsal.heel_kg[draw.source],
            }
            | _before(before)
            for draw, before in zip(filled.draws, span.draws, strict=True)
        ],
    }  # fmt: skip


def _before(before: Before) -> dict[str, int | None]:
    limits = {"slow_g": before.slow_kg, "quick_g": before.quick_kg}
    return {
        "held_g": _grams(before.held_kg), "bottle_mk": round(before.receiver_k * 1000),
        "there_g": _grams(before.source_kg), "there_mk": round(before.source_k * 1000),
    } | {name: None if mass is None else _grams(mass) for name, mass in limits.items()}  # fmt: skip


def _unfilled(rehearsal: Rehearsal, end: Position, number: int) -> dict[str, Any]:
    """A bottle that the plan leaves out, the first thing that stands against it, and the best it could have had."""
    day = rehearsal.day
    bottle = day.bottles[number]
    starts = range(len(bottle.starts))
    best = max((best_kg(rehearsal, number, start) for start in starts), default=bottle.net_kg)
    if not day.sources:
        why = "no supply"
    elif not day.stations_free_s:
        why = "no station"
    elif best < bottle.net_kg + LEAST_DRAW_KG:
        why = "supply weak" if len(bottle.starts) > 1 else "too warm"
    elif _goes_another_day(rehearsal, end, number):
        why = "no time"
    else:
        why = "supply used" if len(bottle.starts) > 1 else "supply used, warm"
    return {
        "bottle": bottle.code, "why": why, "best_g": _grams(best), "target_g": _grams(bottle.target_kg),
        "start_g": _grams(bottle.net_kg), "promised_s": bottle.promised_s,
        "short_g": _grams(max(0.0, rehearsal.good_kg[number] - bottle.net_kg)),
    }  # fmt: skip


def _goes_another_day(rehearsal: Rehearsal, end: Position, number: int) -> bool:
    """Whether it could be filled from what is left, were there a week more."""
    day = rehearsal.day
    longer = Rehearsal(replace(day, closes_s=day.closes_s + _A_WEEK))
    return any(longer.place(end, Choice(number, start, (source,))) is not None
               for start in range(len(day.bottles[number].starts)) for source in range(len(day.sources)))  # fmt: skip


def _source(rehearsal: Rehearsal, end: Position, number: int) -> dict[str, Any]:
    day = rehearsal.day
    one = day.sources[number]
    return {
        "code": one.code, "station": one.station, "net_g": _grams(one.net_kg), "mk": round(one.temperature_k * 1000),
        "pa": _pressure(day, number, one.net_kg, one.temperature_k), "end_g": _grams(end.net_kg[number]),
        "end_mk": round(end.temperature_k[number] * 1000),
        "end_pa": _pressure(day, number, end.net_kg[number], end.temperature_k[number]),
        "heel_g": _grams(min(rehearsal.heel_kg[number], end.net_kg[number])),
        "warming_s": round(warming_time(one, max(end.net_kg[number], 0.1), day.room_k)),
    }  # fmt: skip


def _is_empty(rehearsal: Rehearsal, end: Position, number: int) -> bool:
    return end.net_kg[number] <= _EMPTY * rehearsal.heel_kg[number]


def _empty(rehearsal: Rehearsal, end: Position, number: int) -> dict[str, Any]:
    """What a supply bottle out of liquid holds, how cold a bottle must be to draw from it, and what each waiting one could.

    As each waits now, as cold as it gets; those that the plan leaves out come first.
    """
    day, warm = rehearsal.day, rehearsal.day.room_k
    could: list[tuple[bool, int, str, int]] = []
    pressure = _pressure(day, number, end.net_kg[number], warm)
    for index, bottle in enumerate(day.bottles):
        start = min(bottle.starts, key=lambda each: each.temperature_k)
        receiver = (index, bottle.net_kg, start.temperature_k)
        moved = min(rehearsal.fills.free_kg(receiver, number, end.net_kg[number], warm), bottle.target_kg - bottle.net_kg)
        if moved >= LEAST_DRAW_KG:
            could.append((index in end.done, -_grams(moved), bottle.code, round(start.temperature_k * 1000)))
    return {
        "code": day.sources[number].code, "holds_g": _grams(end.net_kg[number]),
        "pa": pressure, "below_mk": _boils_at(pressure),
        "could": [
            {"bottle": code, "g": -grams, "mk": mk, "filled": filled} for filled, grams, code, mk in sorted(could)[:MOST_DRAWS]
        ],
    }  # fmt: skip


def _pressure(day: Day, source: int, net_kg: float, temperature_k: float) -> int:
    try:
        return round(pressure_and_energy(day.sources[source].volume_m3, max(net_kg, 0.0), temperature_k)[0])
    except PhysicsError:
        return 0


def _boils_at(pressure_pa: int) -> int | None:
    try:
        return round(engine().boiling_temperature(pressure_pa) * 1000)
    except PhysicsError:
        return None


def _grams(kilograms: float) -> int:
    return round(kilograms * 1000)
