"""What no plan of a day can do better than: promises that must break, bottles that can't be good enough.

Each rule leaves something out, so that its answer is never worse than the best plan's: supply bottles
are there for one bottle alone; hoses, people and the freezer are
counted apart; masses are counted without pressure where that is simpler.
"""

from __future__ import annotations

from itertools import combinations, permutations

from bottles.rules.planning.problem import MOST_DRAWS, Bound
from bottles.rules.planning.schedule import Rehearsal
from shop.physics.fluid import T_SATURATION_MAX, engine

_SLACK = 0.02  # of the target: the lattice's error, and supplies cooled otherwise than was tried
_COOLED = (0.0, 6.0, 12.0)  # K
NEVER = 1 << 40


def bound_of(rehearsal: Rehearsal) -> Bound:
    """Return the fewest promises that must break and the most bottles that can be good enough."""
    day, ready = rehearsal.day, earliest(rehearsal)
    able = [number for number, when in enumerate(ready) if when < NEVER]
    by_hoses = _by_hoses(rehearsal, [ready[number] for number in able], day.closes_s)
    good = min(_by_mass(rehearsal, able), by_hoses, _by_freezer(rehearsal, ready))
    promised = [one for one in range(len(day.bottles)) if day.bottles[one].promised_s is not None]
    kept = _kept(rehearsal, ready, [one for one in promised if ready[one] < NEVER])
    return Bound(len(promised) - min(kept, good), good)


def earliest(rehearsal: Rehearsal) -> list[int]:
    """When each bottle could begin to be filled well enough, had it the day to itself; far off where it can't."""
    return [_earliest(rehearsal, number) for number in range(len(rehearsal.day.bottles))]


def _earliest(rehearsal: Rehearsal, bottle: int) -> int:
    day, starts = rehearsal.day, rehearsal.day.bottles[bottle].starts
    there = [number for number, start in enumerate(starts) if start.place is None or day.slots[start.place]]
    if not there or not reaches(rehearsal, bottle, min(there, key=lambda number: starts[number].temperature_k)):
        return NEVER  # what isn't enough at its coldest isn't when it's warmer
    soonest = sorted(there, key=lambda number: starts[number].seconds)
    return day.opens_s + next(starts[number].seconds for number in soonest if reaches(rehearsal, bottle, number))


def reaches(rehearsal: Rehearsal, bottle: int, start: int) -> bool:
    """Whether a bottle can get good enough from a start, the day's supplies being there for it alone."""
    enough = rehearsal.good_kg[bottle] - slack_kg(rehearsal, bottle)
    return best_kg(rehearsal, bottle, start, enough_kg=enough) >= enough


def slack_kg(rehearsal: Rehearsal, bottle: int) -> float:
    """By how much a plan may better the best that is worked out here for a bottle [kg]."""
    return _SLACK * rehearsal.day.bottles[bottle].target_kg


def best_kg(rehearsal: Rehearsal, bottle: int, start: int, *, enough_kg: float | None = None) -> float:
    """The most that a bottle can come to hold from a start; with `enough_kg` it stops there [kg].

    The last supply bottle in turn is taken as it stands, or as warm as the room: it gives no more
    when it's weaker. Those before may have cooled: what comes over colder leaves room for more.
    """
    day = rehearsal.day
    one = day.bottles[bottle]
    enough = one.target_kg if enough_kg is None else enough_kg
    most = one.net_kg
    order = sorted(range(len(day.sources)), key=lambda each: day.sources[each].net_kg / day.sources[each].volume_m3)
    for many in range(1, min(MOST_DRAWS, len(order)) + 1):
        turns = permutations(order, many) if many == 2 else combinations(order, many)
        for sources in reversed(list(turns)):
            for cooled in _COOLED if many > 1 else _COOLED[:1]:
                most = max(most, _in_turn(rehearsal, bottle, start, sources, cooled))
                if most >= enough:
                    return most
    return most


def _in_turn(rehearsal: Rehearsal, bottle: int, start: int, sources: tuple[int, ...], cooled: float) -> float:
    """What a bottle holds after its turns, all supply bottles but the last being so much colder."""
    day, fills = rehearsal.day, rehearsal.fills
    one = day.bottles[bottle]
    held, warm = one.net_kg, one.starts[start].temperature_k
    for turn, source in enumerate(sources, 1):
        net, hot = day.sources[source].net_kg, max(day.sources[source].temperature_k, day.room_k)
        if turn < len(sources):
            hot -= cooled
        moved = max(0.0, min(fills.free_kg((bottle, held, warm), source, net, hot), one.target_kg - held, net))
        if turn < len(sources) and moved:
            warm = fills.receiver_after((bottle, held, warm), source, net, hot, moved)
        held += moved
    return held


def thinnest(rehearsal: Rehearsal) -> tuple[float, float]:
    """Densities: of vapour over the coldest bottle's liquid, and of vapour in a supply bottle that gives no more.

    Nothing leaves a supply bottle whose pressure is that of the coldest bottle's liquid; what a bottle
    takes before there is liquid in it comes on top. In kilograms a cubic metre.
    """
    day, fluid = rehearsal.day, engine()
    temperatures = [start.temperature_k for one in day.bottles for start in one.starts]
    coldest = min(temperatures, default=day.room_k)
    pressure, _, vapour, _, _ = fluid.saturation(min(coldest, T_SATURATION_MAX))
    hottest = max([day.room_k, *(each.temperature_k for each in day.sources)])
    return vapour, min(vapour, fluid.density(pressure, hottest)) if hottest > coldest else vapour


def _by_mass(rehearsal: Rehearsal, able: list[int]) -> int:
    """How many could be good enough by what the supplies can give, the neediest left out."""
    day = rehearsal.day
    vapour, heel = thinnest(rehearsal)
    there = sum(max(0.0, each.net_kg - heel * each.volume_m3) for each in day.sources)
    there += sum(vapour * one.volume_m3 for one in day.bottles)
    many = 0
    for need in sorted(max(0.0, rehearsal.good_kg[one] - day.bottles[one].net_kg) for one in able):
        there -= need
        if there < -1e-9:
            break
        many += 1
    return many


def _by_hoses(rehearsal: Rehearsal, ready: list[int], until_s: int) -> int:
    """How many could be done in time by hoses and people alone."""
    day = rehearsal.day
    rounds = sorted((until_s - max(free, day.opens_s)) // day.fill_s for free in day.stations_free_s)
    fills = sum(max(0, each) for each in rounds[::-1][: day.people])
    in_time = sum(when + day.fill_s <= until_s for when in ready)
    return min(fills, in_time)


def _by_freezer(rehearsal: Rehearsal, ready: list[int]) -> int:
    """How many could be good enough by the freezers' hours: those that need none, and what these take."""
    day = rehearsal.day
    free, needs = 0, []
    for number, one in enumerate(day.bottles):
        if ready[number] >= NEVER:
            continue
        if reaches(rehearsal, number, 0) and one.starts[0].place is None:
            free += 1
        else:
            needs.append(ready[number] - day.opens_s)
    hours = sum(day.slots) * max(0, day.closes_s - day.fill_s - day.opens_s)
    for need in sorted(needs):
        hours -= need
        if hours < 0:
            break
        free += 1
    return free


def _kept(rehearsal: Rehearsal, ready: list[int], promised: list[int]) -> int:
    """How many promises could be kept: fills of one length on so many hoses, the soonest promise first."""
    day = rehearsal.day
    due: list[int] = []
    for one in promised:
        when = day.bottles[one].promised_s
        until = min(day.closes_s, when if when is not None else 0)
        if max(ready[one], day.opens_s) + day.fill_s <= until:
            due.append(until)
    due.sort()
    # Of fills of one length the most that are in time are found by taking the soonest first.
    free = sorted(max(each, day.opens_s) for each in day.stations_free_s)[: day.people]
    ends = sorted(start + day.fill_s * (number + 1) for start in free for number in range(len(due)))
    kept = 0
    for until in due:
        if kept < len(ends) and ends[kept] <= until:
            kept += 1
    return kept
