"""What a bottle held over time: levels by the books, weighings that stand, the lines that moved."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any, NamedTuple

from django.db.models import Q, QuerySet

from bottles.models import Account, Bottle, Line, Weighing
from shop.base.composed import composed

MOST = 400  # lines and weighings that a chart takes, the latest of each


class Moved(NamedTuple):
    """A line, by its columns: a chart takes hundreds of them, and a page names a few."""

    happened_at: datetime
    grams: int
    origin: str
    source: int  # key of the account
    target: int
    own: int | None  # the bottle whose account the target is
    movement: int
    kind: str
    note: str
    reverses: int | None
    reversed_by: int | None
    person: str | None

    @property
    def cancelled(self) -> bool:
        """Whether it's a reversal, or was reversed: both cancel each other."""
        return bool(self.reverses or self.reversed_by)


class Weighed(NamedTuple):
    """A weighing that stands, by its columns."""

    key: int
    happened_at: datetime
    net_g: int
    error_g: int
    typed: str
    scale: str
    step: str
    wet: bool
    person: str | None


@dataclass(frozen=True, slots=True)
class Course:
    """Oldest first; a level stands just after its moment."""

    levels: Sequence[tuple[datetime, int]]
    weighings: Sequence[Weighed]
    lines: Sequence[Moved]


def course_over_time(bottle: Bottle) -> Course:
    """Return the course of a bottle's contents: two queries, three for a long one."""
    weighings = [Weighed(*row) for row in reversed(_weighings(bottle.pk))]
    lines = [Moved(*row) for row in reversed(_lines(bottle.pk))]
    level = _before(bottle, lines)
    levels: list[tuple[datetime, int]] = []
    for line in lines:
        if line.cancelled:
            continue
        level += _change(bottle, line)
        if levels and levels[-1][0] == line.happened_at:
            levels.pop()
        levels.append((line.happened_at, level))
    return Course(levels, weighings, lines)


def others_of(bottle: Bottle, lines: Sequence[Moved]) -> Mapping[int, Account]:
    """Return the accounts on the other side of some lines, by key: one query."""
    keys = {line.source if line.own == bottle.pk else line.target for line in lines}
    return {account.pk: account for account in _accounts(keys)} if keys else {}


@composed
def _weighings(bottle: int) -> QuerySet[Any]:
    rows = Weighing.objects.filter(bottle=bottle, strike__isnull=True).order_by("-happened_at", "-id")
    return rows.values_list(
        "id", "happened_at", "net_g", "error_g", "typed", "scale__name", "step", "wet", "act__person__name"
    )[:MOST]


@composed
def _lines(bottle: int) -> QuerySet[Any]:
    rows = Line.objects.filter(Q(source__bottle=bottle) | Q(target__bottle=bottle))
    return rows.order_by("-movement__happened_at", "-id").values_list(
        "movement__happened_at", "grams", "origin", "source_id", "target_id", "target__bottle_id", "movement_id",
        "movement__kind", "movement__note", "movement__reverses_id", "movement__reversal__id", "movement__act__person__name",
    )[:MOST]  # fmt: skip


@composed
def _accounts(keys: Iterable[int]) -> QuerySet[Account]:
    return Account.objects.filter(pk__in=keys).select_related("bottle", "customer", "car")


def _change(bottle: Bottle, line: Moved) -> int:
    return line.grams if line.own == bottle.pk else -line.grams


def _before(bottle: Bottle, lines: Sequence[Moved]) -> int:
    """What the books held before the oldest of these lines: nothing, unless there are more."""
    if len(lines) < MOST:
        return 0
    balance: int = bottle.account.balance_g
    return balance - sum(_change(bottle, line) for line in lines if not line.cancelled)
