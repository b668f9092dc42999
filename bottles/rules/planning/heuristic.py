"""A good plan for a day of many bottles: several beginnings, each mended step by step.

The orders to begin with are first come first served, the soonest promise first, and the easiest to
fill first. A plan is then mended: a bottle is filled another way, moved, or changes place with
another, whatever helps first is kept, until nothing helps or enough was looked at. Everything is
tried in a fixed order, so that the same day gives the same plan.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence

from bottles.rules.planning.bound import bound_of, earliest
from bottles.rules.planning.problem import Choice, Day, Plan, Score
from bottles.rules.planning.schedule import Position, Rehearsal

Watch = Callable[[int, int], None]  # how many partial plans were looked at, of how many at most
LOOKED_AT = 14_000  # partial plans
TRANSFERS = 2_500  # transfers worked out anew
_WATCHED_EVERY = 100
_NEARLY_EMPTY = 1.5  # times what vapour alone holds


class Search:
    """A rehearsal that counts what is looked at, and stops in time."""

    def __init__(self, rehearsal: Rehearsal, *, most: int, transfers: int, watch: Watch | None) -> None:
        self.rehearsal, self.most, self.watch = rehearsal, most, watch
        # What the bound took counts too, as long as some remain.
        self.transfers = max(transfers, rehearsal.fills.calls + transfers // 2)
        self.looked_at = 0

    @property
    def over(self) -> bool:
        """Whether so much was looked at that the best plan so far is taken."""
        return self.looked_at >= self.most or self.rehearsal.fills.calls >= self.transfers

    def place(self, at: Position, choice: Choice) -> Position | None:
        """Where a choice leads; None where it can't be, or where it's time to stop."""
        if self.over:
            return None
        self.looked_at += 1
        if self.watch is not None and self.looked_at % _WATCHED_EVERY == 1:
            self.watch(self.looked_at, self.most)
        placed = self.rehearsal.place(at, choice)
        return placed[0] if placed else None


def first_come_first_served(rehearsal: Rehearsal) -> list[Choice]:
    """What a shop does that doesn't plan: in order, from the fullest supply bottle, as cold as it gets."""
    at, done = rehearsal.beginning(), []
    for number, bottle in enumerate(rehearsal.day.bottles):
        coldest = min(range(len(bottle.starts)), key=lambda each: bottle.starts[each].temperature_k)
        for source in sorted(range(len(at.net_kg)), key=lambda each: (-at.net_kg[each], each)):
            placed = rehearsal.place(at, Choice(number, coldest, (source,)))
            if placed is not None:
                at = placed[0]
                done.append(placed[1].choice)
                break
    return done


def good_plan(
    day: Day, watch: Watch | None = None, *, most: int = LOOKED_AT, transfers: int = TRANSFERS, rehearsal: Rehearsal | None = None
) -> Plan:
    """Return the best plan that was found within what may be looked at; `watch` may raise to stop it."""
    rehearsal = rehearsal or Rehearsal(day)
    bound = bound_of(rehearsal)
    best = first_come_first_served(rehearsal)
    score = rehearsal.score(rehearsal.follow(best)[0])
    search = Search(rehearsal, most=most, transfers=transfers, watch=watch)
    for order in _orders(rehearsal):
        plan = _greedy(search, order)
        found = rehearsal.score(rehearsal.follow(plan)[0])
        if found < score:
            best, score = plan, found
    mended = _Mending(search, best, score)
    mended.run()
    at, fills = rehearsal.follow(mended.plan)
    return Plan(fills, rehearsal.score(at), bound, False, search.looked_at)


def _orders(rehearsal: Rehearsal) -> Iterator[list[int]]:
    day = rehearsal.day
    every = range(len(day.bottles))
    ready = earliest(rehearsal)

    def promised(one: int) -> int:
        when = day.bottles[one].promised_s
        return day.closes_s * 2 if when is None else when

    def need(one: int) -> float:
        return rehearsal.good_kg[one] - day.bottles[one].net_kg

    def lost(one: int) -> bool:
        return ready[one] + day.fill_s > promised(one)

    yield sorted(every, key=lambda one: (promised(one), need(one), one))
    # A promise that can't be kept any more gives way to those that can.
    yield sorted(every, key=lambda one: (lost(one), promised(one), need(one), one))
    yield sorted(every, key=lambda one: (day.bottles[one].promised_s is None, need(one), one))
    yield sorted(every, key=lambda one: (need(one), one))
    yield sorted(every, key=lambda one: (promised(one) - ready[one], one))


def _greedy(search: Search, order: Sequence[int]) -> list[Choice]:
    """Place bottles in an order, each in the way that is best for the plan so far.

    What can't be filled well enough comes last: it takes what is left then.
    """
    at, plan, rest = search.rehearsal.beginning(), [], []
    for turn, number in [*((0, one) for one in order), *((1, one) for one in order)]:
        if turn and number not in rest:
            continue
        way = _best_of(search, at, (choice for choice in search.rehearsal.choices(at, number) if len(choice.sources) == 1))
        enough = way is not None and way[1].sums[2] > at.sums[2] and way[1].sums[0] == at.sums[0]
        several = _best_of(search, at, _in_turn(search.rehearsal, at, number, enough=enough))
        if way is None or (several is not None and several[0] < way[0]):
            way = several
        if way is not None and (turn or way[1].sums[2] > at.sums[2]):
            at = way[1]
            plan.append(way[2])
        else:
            rest.append(number)
    return plan


def _best_of(search: Search, at: Position, choices: Iterable[Choice]) -> tuple[Score, Position, Choice] | None:
    best: tuple[Score, Position, Choice] | None = None
    for choice in choices:
        now = search.place(at, choice)
        if now is not None:
            score = search.rehearsal.score(now)
            if best is None or score < best[0]:
                best = (score, now, choice)
    return best


def _in_turn(rehearsal: Rehearsal, at: Position, number: int, *, enough: bool) -> Iterator[Choice]:
    """Two supply bottles in turn: any two where one alone isn't enough, else one that is all but empty first."""
    for choice in rehearsal.choices(at, number):
        first = choice.sources[0]
        if len(choice.sources) == 2 and (not enough or at.net_kg[first] <= _NEARLY_EMPTY * rehearsal.heel_kg[first]):
            yield choice


def _ways(rehearsal: Rehearsal, at: Position, number: int, *, enough: bool) -> Iterator[Choice]:
    yield from (choice for choice in rehearsal.choices(at, number) if len(choice.sources) == 1)
    yield from _in_turn(rehearsal, at, number, enough=enough)


class _Mending:
    """A plan and the changes that better it."""

    def __init__(self, search: Search, plan: list[Choice], score: Score) -> None:
        self.search, self.plan, self.score = search, plan, score
        self._positions: list[Position] = []

    def run(self) -> None:
        """Mend until nothing helps."""
        self._rehearse()
        while not self.search.over and any(step() for step in (self._add, self._another_way, self._elsewhere)):
            continue

    def _rehearse(self) -> None:
        rehearsal = self.search.rehearsal
        self._positions = [rehearsal.beginning()]
        kept = []
        for choice in self.plan:
            placed = rehearsal.place(self._positions[-1], choice)
            if placed is not None:
                kept.append(choice)
                self._positions.append(placed[0])
        self.plan = kept

    def _try(self, plan: list[Choice], since: int) -> bool:
        """Take a changed plan if it's better; it's the same up to a place."""
        at = self._positions[since]
        kept = plan[:since]
        for choice in plan[since:]:
            now = self.search.place(at, choice)
            if now is None:
                if self.search.over:
                    return False
                continue
            at = now
            kept.append(choice)
            if (at.sums[0], at.sums[1]) > self.score[:2]:
                return False  # what is broken by now stays broken
        score = self.search.rehearsal.score(at)
        if self.search.over or score >= self.score:
            return False
        self.plan, self.score = kept, score
        self._rehearse()
        return True

    def _add(self) -> bool:
        """Fill a bottle that the plan leaves out, as late as that is possible."""
        missing = [one for one in range(len(self.search.rehearsal.day.bottles)) if one not in self._positions[-1].done]
        for number in missing:
            for place in range(len(self.plan), -1, -1):
                for choice in _ways(self.search.rehearsal, self._positions[place], number, enough=False):
                    if self._try([*self.plan[:place], choice, *self.plan[place:]], place):
                        return True
        return False

    def _another_way(self) -> bool:
        for place, now in enumerate(self.plan):
            for choice in _ways(self.search.rehearsal, self._positions[place], now.bottle, enough=True):
                if choice != now and self._try([*self.plan[:place], choice, *self.plan[place + 1 :]], place):
                    return True
        return False

    def _elsewhere(self) -> bool:
        many = len(self.plan)
        for first in range(many):
            for second in range(first + 1, many):
                swapped = list(self.plan)
                swapped[first], swapped[second] = swapped[second], swapped[first]
                if self._try(swapped, first):
                    return True
        for start in range(many):
            for end in range(many):
                if abs(start - end) > 1:
                    moved = list(self.plan)
                    moved.insert(end, moved.pop(start))
                    if self._try(moved, min(start, end)):
                        return True
        return False
