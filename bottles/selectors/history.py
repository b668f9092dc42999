"""One bottle's grams in the order in which things happened: levels, the weighings that rule.

Order is that of happening, then that of recording. A movement that a weighing caused stands
where its weighing stands, a reversal where the movement that it reverses stands.

A weighing *rules* the books where no later one was known when it was recorded: a late entry of
an older weighing stays a statement, for the younger one has spoken already. A weighing with the
filling line on never rules: the hose pulls at the scale.
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass
from datetime import datetime

from django.db.models import Q

from bottles.models import Bottle, Line, Weighing
from bottles.physics.weighing import net_uncertainty

Key = tuple[datetime, int]
SETS_THE_BOOKS = ("opening", "adjust")


@dataclass(frozen=True, slots=True)
class Change:
    """What one line did to the bottle's grams."""

    key: Key
    movement_id: int
    kind: str
    grams: int  # below nothing: went out
    error_g: int
    weighing_id: int | None
    reversal: bool  # it is a reversal, or was reversed: both cancel each other


@dataclass(frozen=True, slots=True)
class Spoken:
    """What a scale said, where it stands in the order."""

    key: Key
    weighing_id: int
    net_g: int  # never below nothing
    error_g: int
    wet: bool


class History:
    """The changes and weighings of one bottle, oldest first."""

    def __init__(self, changes: list[Change], ruling: list[Spoken], latest: Spoken | None) -> None:
        self.changes = sorted(changes, key=lambda change: change.key)
        self.ruling = ruling
        self.latest = latest  # of all weighings that aren't struck, ruling or not
        self._keys = [change.key for change in self.changes]
        self._levels = [0]
        for change in self.changes:
            self._levels.append(self._levels[-1] + change.grams)

    def level_at(self, key: Key) -> int:
        """Return what the books say just after a place in the order."""
        return self._levels[bisect_right(self._keys, key)]

    def lowest(self, after: Key, before: Key | None = None) -> int:
        """Return the lowest level from a place on, until before another (or to the end)."""
        first = bisect_right(self._keys, after)
        low = self._levels[first]
        for number in range(first, len(self.changes)):
            if before is not None and self._keys[number] >= before:
                break
            # Lines of one movement stand together: only the level after all of them counts.
            if number + 1 == len(self.changes) or self._keys[number + 1] != self._keys[number]:
                low = min(low, self._levels[number + 1])
        return low

    def shortfalls(self, after: Key, before: Key | None, grams: int) -> tuple[int, list[tuple[datetime, int]]]:
        """Return what must have been in the bottle beyond its books, were so much added after a place.

        What is short there at once, and what is short when something later went out, until before
        another place: so that no level falls below nothing at any time.
        """
        first = bisect_right(self._keys, after)
        at_once = max(0, -(self._levels[first] + grams))
        shift = grams + at_once
        later: list[tuple[datetime, int]] = []
        for number in range(first, len(self.changes)):
            key = self._keys[number]
            if before is not None and key >= before:
                break
            last_of_its_place = number + 1 == len(self.changes) or self._keys[number + 1] != key
            short = -(self._levels[number + 1] + shift)
            if short <= 0 or not last_of_its_place:
                continue
            shift += short
            if key[0] == after[0]:
                at_once += short
            else:
                later.append((key[0], short))
        return at_once, later

    def next_ruling(self, after: Key) -> Spoken | None:
        """Return the first weighing that rules after a place in the order."""
        return next((one for one in self.ruling if one.key > after), None)

    def last_ruling(self, before: Key) -> Spoken | None:
        """Return the last weighing that rules before a place in the order."""
        return next((one for one in reversed(self.ruling) if one.key < before), None)

    def own_changes(self, weighing: Spoken) -> list[Change]:
        """Return the changes by which a weighing set the books, those reversed left out."""
        return [
            change for change in self.changes
            if change.weighing_id == weighing.weighing_id and change.kind in SETS_THE_BOOKS and not change.reversal
        ]  # fmt: skip

    def books_error(self, at: Spoken) -> int:
        """Return the ± of the books just before a weighing.

        That of the last weighing with which they agreed to the gram, and of what moved since;
        a weighing that left a gap within its ± doesn't make the books any surer.
        """
        earlier = [one for one in self.ruling if one.key < at.key]
        rest = next((one for one in reversed(earlier) if self.level_at(one.key) == one.net_g), None)
        if rest is None and earlier:
            rest = earlier[0]
        error = rest.error_g if rest else 0
        for change in self.changes:
            since = rest is None or change.key > rest.key
            if since and change.key <= at.key and change.weighing_id != at.weighing_id and not change.reversal:
                error = net_uncertainty(error, change.error_g)
        return error

    def known_before(self, at: Spoken) -> bool:
        """Whether anything was known of the contents before a weighing: a movement or a ruling weighing."""
        if self.last_ruling(at.key):
            return True
        return any(
            change.key <= at.key and change.weighing_id != at.weighing_id and not change.reversal
            for change in self.changes
        )

    def rests_on_ticket(self, at: Spoken) -> bool:
        """Whether the books before a weighing are a delivery's ticket, nothing drawn or weighed since."""
        real = [
            change for change in self.changes
            if change.key <= at.key and not change.reversal and change.weighing_id != at.weighing_id
        ]  # fmt: skip
        if not real or real[-1].kind != "delivery" or real[-1].weighing_id is not None:
            return False
        weighed = self.last_ruling(at.key)
        return weighed is None or weighed.key < real[-1].key


def history_of(bottle: Bottle) -> History:
    """Read one bottle's history: two queries."""
    lines = (
        Line.objects.filter(Q(source__bottle=bottle) | Q(target__bottle=bottle))
        .order_by("movement_id", "id")
        .values_list(
            "movement_id", "movement__kind", "movement__happened_at", "movement__act_id", "movement__weighing_id",
            "movement__weighing__act_id", "movement__reverses__act_id", "movement__reverses__weighing__act_id",
            "movement__reverses_id", "movement__reversal__id", "source__bottle_id", "grams", "error_g",
        )
    )
    changes = [
        Change(
            key=(happened_at, undone_weighing or undone or by_weighing or recorded),
            movement_id=movement, kind=kind, grams=-grams if source == bottle.pk else grams, error_g=error_g,
            weighing_id=weighing, reversal=bool(reverses or reversed_by),
        )
        for (movement, kind, happened_at, recorded, weighing, by_weighing, undone, undone_weighing,
             reverses, reversed_by, source, grams, error_g) in lines
    ]  # fmt: skip
    rows = Weighing.objects.filter(bottle=bottle, strike__isnull=True).order_by("act_id", "id")
    latest: Spoken | None = None
    ruling: list[Spoken] = []
    for row in rows:
        one = Spoken((row.happened_at, row.act_id), row.pk, max(0, row.net_g), row.error_g, row.wet)
        if row.step != "after" and (latest is None or one.key > latest.key):
            ruling.append(one)  # recorded in order, each later than all before it
        if latest is None or one.key > latest.key:
            latest = one
    return History(changes, ruling, latest)
