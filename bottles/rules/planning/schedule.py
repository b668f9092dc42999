"""What comes of decisions in turn: when each bottle is chilled and filled, and what the supplies have left.

Every bottle is placed at the earliest moment at which its hose, a person, its supply bottle and its
own temperature allow it; it leaves the freezer when its hose opens. A position is never changed: a
search goes back to an earlier one.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from typing import TypeVar

from bottles.rules.planning.fills import Fills, Receiver
from bottles.rules.planning.problem import LEAST_DRAW_KG, MOST_DRAWS, Choice, Day, Drawn, Filled, Score
from shop.physics.fluid import T_SATURATION_MAX, engine

_NOBODY = -1
_ALIKE_KG = 0.3  # full supply bottles of one delivery differ by as much
_T = TypeVar("_T")


@dataclass(frozen=True, slots=True)
class Position:
    """Where a day stands after some bottles."""

    net_kg: tuple[float, ...]
    temperature_k: tuple[float, ...]
    source_free_s: tuple[int, ...]
    source_at: tuple[int | None, ...]
    station_free_s: tuple[int, ...]
    connected: tuple[int, ...]  # supply bottle on each hose
    person_free_s: tuple[int, ...]
    slot_free_s: tuple[tuple[int, ...], ...]
    broached: int
    done: frozenset[int]
    sums: tuple[int, int, int, int, int, int]  # broken, lateness, good, short, changes, minutes


class Rehearsal:
    """A day with its fills: where it begins, what comes of a choice, what a position is worth."""

    def __init__(self, day: Day, fills: Fills | None = None) -> None:
        """Fix what doesn't depend on decisions."""
        self.day = day
        self.fills = fills or Fills(day)
        self.heel_kg = tuple(_heel(day, number) for number in range(len(day.sources)))
        self.good_kg = tuple(one.good_kg(day.good_per_mille) for one in day.bottles)

    def beginning(self) -> Position:
        """Return the position before anything is done."""
        day = self.day
        connected = [_NOBODY] * len(day.stations_free_s)
        for number, source in enumerate(day.sources):
            if source.station is not None and connected[source.station] == _NOBODY:
                connected[source.station] = number
        return Position(
            tuple(one.net_kg for one in day.sources), tuple(one.temperature_k for one in day.sources),
            (day.opens_s,) * len(day.sources), tuple(one.station for one in day.sources),
            tuple(max(free, day.opens_s) for free in day.stations_free_s), tuple(connected), (day.opens_s,) * day.people,
            tuple(
                (day.opens_s,) * (takes - day.standing_in(place)) + (day.closes_s,) * day.standing_in(place)
                for place, takes in enumerate(day.slots)
            ), 0, frozenset(), (0, 0, 0, 0, 0, 0),
        )  # fmt: skip

    def choices(self, at: Position, bottle: int) -> Iterator[Choice]:
        """Every choice for a bottle: each start, and supply bottles in turn, the weaker first.

        Of several in store that are alike and untouched one is tried: another would do the same.
        """
        weakest_first = sorted(self._unlike(at), key=lambda each: self._strength(at, each))
        for start in range(len(self.day.bottles[bottle].starts)):
            for many in range(1, min(MOST_DRAWS, len(weakest_first)) + 1):
                for sources in combinations(weakest_first, many):
                    yield Choice(bottle, start, sources)

    def place(self, at: Position, choice: Choice) -> tuple[Position, Filled] | None:
        """What comes of a choice; None where it can't be done today, draws on a stronger one first, or draws nothing."""
        day, bottle = self.day, self.day.bottles[choice.bottle]
        if list(choice.sources) != sorted(choice.sources, key=lambda each: self._strength(at, each)):
            return None
        start = bottle.starts[choice.start]
        slots, chill_from, ready = at.slot_free_s, None, day.opens_s
        if start.place is not None:
            if not slots[start.place]:
                return None
            chill_from = day.opens_s if start.place == bottle.stands_in else min(slots[start.place])
            ready = chill_from + start.seconds
        person, *others = sorted(at.person_free_s)
        ready, held, warm = max(ready, person), bottle.net_kg, start.temperature_k
        now = at
        draws: list[Drawn] = []
        for source in choice.sources:
            if bottle.target_kg - held < LEAST_DRAW_KG:
                return None  # full before: the shorter choice is the one to look at
            drawn = self._draw(now, (choice.bottle, held, warm), source, ready, draws, last=source == choice.sources[-1])
            if drawn is None or drawn.until_s > day.closes_s:
                return None
            if source != choice.sources[-1]:
                before = now.net_kg[source], self._warmed(now, source, drawn.from_s)
                warm = self.fills.receiver_after((choice.bottle, held, warm), source, *before, drawn.moved_kg)
            draws.append(drawn)
            now = _after(now, drawn, day)
            held += drawn.moved_kg
            ready = drawn.until_s
        filled = Filled(choice, tuple(draws), held, chill_from, draws[0].from_s if chill_from is not None else None)
        slots = _rooms(at.slot_free_s, bottle.stands_in, start.place, chill_from, draws[0].from_s)
        return replace(
            now, person_free_s=tuple(sorted((*others, ready))), slot_free_s=slots, done=at.done | {choice.bottle},
            sums=self._sums(at, filled),
        ), filled  # fmt: skip

    def score(self, at: Position) -> Score:
        """What a position is worth if nothing more is filled."""
        broken, late, good, short, changes, minutes = at.sums
        for number, one in enumerate(self.day.bottles):
            if number not in at.done:
                short += hectograms(self.good_kg[number] - one.net_kg)
                if one.promised_s is not None:
                    broken += 1
                    late += lateness(self.day.closes_s - one.promised_s)
        left = sum(min(net, heel) for net, heel in zip(at.net_kg, self.heel_kg, strict=True))
        return (broken, late, -good, short, half_kilos(left), changes, at.broached.bit_count(), minutes)

    def follow(self, choices: Iterable[Choice]) -> tuple[Position, tuple[Filled, ...]]:
        """Place choices in turn, leaving out what can't be done."""
        at, fills = self.beginning(), []
        for choice in choices:
            placed = self.place(at, choice)
            if placed is not None:
                at, filled = placed
                fills.append(filled)
        return at, tuple(fills)

    def _unlike(self, at: Position) -> list[int]:
        found: list[int] = []
        for number, one in enumerate(self.day.sources):
            twin = at.source_at[number] is None and any(
                at.source_at[other] is None and abs(at.net_kg[other] - at.net_kg[number]) <= _ALIKE_KG
                and self.fills.alike(other, number) for other in found
            )  # fmt: skip
            if not twin and one.net_kg > 0.0:
                found.append(number)
        return found

    def _strength(self, at: Position, source: int) -> tuple[float, int]:
        return at.net_kg[source] / self.day.sources[source].volume_m3, source

    def _draw(
        self, at: Position, receiver: Receiver, source: int, ready: int, before: Sequence[Drawn], *, last: bool
    ) -> Drawn | None:  # fmt: skip
        """One draw from a supply bottle, as early as it can be; None where nothing goes over, or it hangs on another hose."""
        day, bottle = self.day, self.day.bottles[receiver[0]]
        hose = before[0].station if before else bottle.hose  # a refill stays at its station
        station = at.source_at[source]
        if station is None:
            station = hose
        elif hose is not None and station != hose:
            return None
        if station is None:
            if not at.station_free_s:
                return None
            station = min(range(len(at.station_free_s)), key=lambda each: (at.station_free_s[each], each))
        changed = at.connected[station] != source
        begins = max(ready, at.station_free_s[station], at.source_free_s[source]) + (day.change_s if changed else 0)
        net, warm = at.net_kg[source], self._warmed(at, source, begins)
        line = self.fills.line_kg(source, net, warm)
        room = bottle.target_kg - receiver[1]
        moved = min(self.fills.free_kg(receiver, source, net, warm), room, net - line)
        if moved < LEAST_DRAW_KG:
            return None
        left = net - moved - line
        spent = sum(draw.until_s - draw.from_s for draw in before)
        takes = day.draw_s(moved, bottle.target_kg - bottle.net_kg, spent_s=spent, last=last)
        return Drawn(
            source, station, begins, begins + takes, moved, line, left,
            self.fills.source_after(source, net, warm, moved + line), changed, warm,
        )  # fmt: skip

    def _warmed(self, at: Position, source: int, when: int) -> float:
        return self.fills.warmed(source, at.net_kg[source], at.temperature_k[source], when - at.source_free_s[source])

    def _sums(self, at: Position, filled: Filled) -> tuple[int, int, int, int, int, int]:
        broken, late, good, short, changes, minutes = at.sums
        number, until = filled.choice.bottle, filled.until_s
        promised, enough = self.day.bottles[number].promised_s, filled.final_kg >= self.good_kg[number] - 1e-6
        if promised is not None:
            broken += until > promised or not enough
            # What isn't good enough keeps no promise: it's as late as what isn't filled.
            late += lateness((until if enough else self.day.closes_s) - promised)
        short += 0 if enough else hectograms(self.good_kg[number] - filled.final_kg)
        return (
            broken, late, good + enough, short, changes + sum(draw.changed for draw in filled.draws), minutes + until // 60,
        )  # fmt: skip


def _after(at: Position, drawn: Drawn, day: Day) -> Position:
    source, station = drawn.source, drawn.station
    fresh = day.sources[source].net_kg == at.net_kg[source]
    return replace(
        at,
        net_kg=_put(at.net_kg, source, drawn.left_kg),
        temperature_k=_put(at.temperature_k, source, drawn.left_k),
        source_free_s=_put(at.source_free_s, source, drawn.until_s),
        source_at=_put(at.source_at, source, station),
        station_free_s=_put(at.station_free_s, station, drawn.until_s),
        connected=_put(at.connected, station, source),
        broached=at.broached | (1 << source if fresh else 0),
    )


def _rooms(
    slots: tuple[tuple[int, ...], ...], stands_in: int | None, place: int | None, chill_from: int | None, filled_from: int
) -> tuple[tuple[int, ...], ...]:
    """When each freezer's rooms are free after a bottle: it leaves where it stood, and where it was chilled.

    A room held by a bottle that stands there is free when that one leaves: until then, at the day's end.
    """
    rows = [list(row) for row in slots]
    if stands_in is not None:
        moves = place is not None and place != stands_in and chill_from is not None
        rows[stands_in][-1] = chill_from if moves and chill_from is not None else filled_from
    if place is not None and place != stands_in:
        rows[place][0] = filled_from
    return tuple(tuple(sorted(row)) for row in rows)


def _put(row: tuple[_T, ...], place: int, value: _T) -> tuple[_T, ...]:
    return (*row[:place], value, *row[place + 1 :])


def lateness(seconds: int) -> int:
    """What being late is worth: minutes begun, squared, so that nobody waits for hours to spare others a little."""
    minutes = max(0, -(-seconds // 60))
    return minutes * minutes


def hectograms(kilograms: float) -> int:
    """A mass in steps of 100 g."""
    return max(0, round(kilograms * 10.0))


def half_kilos(kilograms: float) -> int:
    """A mass in steps of 500 g: less left behind isn't worth another change of supply (common practice, no source)."""
    return max(0, round(kilograms * 2.0))


def _heel(day: Day, number: int) -> float:
    """What stays in a supply bottle at the room's temperature when its liquid is out, and below its tube [kg]."""
    one = day.sources[number]
    _, liquid, vapour, _, _ = engine().saturation(min(day.room_k, T_SATURATION_MAX))
    return vapour * (one.volume_m3 - one.below_tube_m3) + liquid * one.below_tube_m3
