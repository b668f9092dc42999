"""The best plan of a small day: every order and every way of filling, cut where nothing better can follow.

Branch and bound: a partial plan is given up when even its best ending couldn't beat the best plan
known, or when another partial plan left the day in the same state at no more cost.
"""

from __future__ import annotations

from dataclasses import replace

from bottles.rules.planning.bound import NEVER, best_kg, bound_of, earliest, slack_kg, thinnest
from bottles.rules.planning.heuristic import Watch, good_plan
from bottles.rules.planning.problem import MOST_DRAWS, Choice, Day, Plan, Score
from bottles.rules.planning.schedule import Position, Rehearsal, half_kilos, hectograms, lateness

SMALL_BOTTLES, SMALL_SOURCES = 7, 3
NODES = 30_000  # partial plans looked at before it's given up
_BEFORE = 3_000  # for a good plan to begin with
_WATCHED_EVERY = 200


def is_small(day: Day) -> bool:
    """Whether a day is worth trying to plan exactly."""
    return len(day.bottles) <= SMALL_BOTTLES and len(day.sources) <= SMALL_SOURCES


def best_plan(day: Day, watch: Watch | None = None, *, nodes: int = NODES) -> Plan:
    """Return the best plan there is, or the best found within so many partial plans: `exact` says which."""
    rehearsal = Rehearsal(day)
    good = good_plan(day, watch, most=_BEFORE, rehearsal=rehearsal)
    tree = _Tree(rehearsal, good, nodes, watch)
    tree.grow(rehearsal.beginning(), ())
    at, fills = rehearsal.follow(tree.best)
    return Plan(fills, rehearsal.score(at), bound_of(rehearsal), not tree.over, good.looked_at + tree.nodes)


class _Tree:
    """The search with its best plan so far."""

    def __init__(self, rehearsal: Rehearsal, good: Plan, most: int, watch: Watch | None) -> None:
        self.rehearsal, self.most, self.watch = rehearsal, most, watch
        self.best: tuple[Choice, ...] = tuple(filled.choice for filled in good.fills)
        self.score = good.score
        nothing = rehearsal.score(rehearsal.beginning())
        if nothing < self.score:
            self.best, self.score = (), nothing
        self.nodes = 0
        day = rehearsal.day
        self._ready = earliest(rehearsal)
        self._able = [when < NEVER for when in self._ready]
        self._short = [0 if able else self._least_short(number) for number, able in enumerate(self._able)]
        thin = thinnest(rehearsal)[1]
        self._floor = [thin * one.volume_m3 for one in day.sources]
        self._seen: dict[tuple[object, ...], tuple[int, ...]] = {}

    @property
    def over(self) -> bool:
        """Whether so much was looked at that it isn't proven."""
        return self.nodes >= self.most

    def grow(self, at: Position, plan: tuple[Choice, ...]) -> None:
        """Look at everything that can follow a partial plan."""
        ways: list[tuple[Score, int, Position, Choice]] = []
        for number in range(len(self.rehearsal.day.bottles)):
            if number in at.done:
                continue
            for choice in self.rehearsal.choices(at, number):
                if self.over:
                    return
                self.nodes += 1
                if self.watch is not None and self.nodes % _WATCHED_EVERY == 1:
                    self.watch(self.nodes, self.most)
                placed = self.rehearsal.place(at, choice)
                if placed is not None and self._may_lead_on(placed[0]):
                    ways.append((self.rehearsal.score(placed[0]), len(ways), placed[0], choice))
        ways.sort(key=lambda way: way[:2])
        for score, _, now, choice in ways:
            longer = (*plan, choice)
            if score < self.score:
                self.best, self.score = longer, score
            if self._least(now) < self.score:
                self.grow(now, longer)

    def _may_lead_on(self, at: Position) -> bool:
        """Whether a position may lead to a better plan, and wasn't met at no more cost."""
        if self._least(at) >= self.score:
            return False
        state = replace(at, sums=(0, 0, 0, 0, 0, 0))
        key = (
            state.done, state.net_kg, state.temperature_k, state.source_free_s, state.source_at, state.station_free_s,
            state.connected, state.person_free_s, state.slot_free_s, state.broached,
        )  # fmt: skip
        broken, late, good, short, changes, minutes = at.sums
        cost = (broken, late, -good, short, changes, minutes)
        seen = self._seen.get(key)
        if seen is not None and seen <= cost:
            return False
        self._seen[key] = cost
        return True

    def _least(self, at: Position) -> Score:
        """A score that no plan which begins so can fall below."""
        day = self.rehearsal.day
        broken, late, good, short, changes, minutes = at.sums
        hoses = sorted(at.station_free_s)[: day.people]
        free = max(hoses[0] if hoses else day.closes_s, at.person_free_s[0])
        room, ends = 0.0, []
        for number, one in enumerate(day.bottles):
            if number in at.done:
                continue
            room += one.target_kg - one.net_kg
            until = max(free, self._ready[number]) + day.fill_s
            if self._able[number] and until <= day.closes_s:
                good += 1
                ends.append(until)
            short += self._short[number]
            if one.promised_s is not None:
                broken += not self._able[number] or until > min(one.promised_s, day.closes_s)
                ends_s = min(until, day.closes_s) if self._able[number] else day.closes_s
                late += lateness(ends_s - one.promised_s)
        # Each hose fills one bottle after another, whichever they are.
        turns = sorted(max(hose, free) + day.fill_s * (turn + 1) for hose in hoses for turn in range(len(ends)))
        minutes += sum(max(pair) // 60 for pair in zip(sorted(ends), turns, strict=False))
        left = sum(
            min(heel, max(floor, net - room)) if net > floor else min(heel, net)
            for net, heel, floor in zip(at.net_kg, self.rehearsal.heel_kg, self._floor, strict=True)
        )
        # What the draws lose besides, at its densest.
        lines = sum(each.line_m3 for each in day.sources) * 1_000.0 * MOST_DRAWS * (len(day.bottles) - len(at.done))
        return (broken, late, -good, short, half_kilos(left - lines), changes, at.broached.bit_count(), minutes)

    def _least_short(self, number: int) -> int:
        starts = range(len(self.rehearsal.day.bottles[number].starts))
        best = max(best_kg(self.rehearsal, number, start) for start in starts)
        return hectograms(self.rehearsal.good_kg[number] - slack_kg(self.rehearsal, number) - best)
