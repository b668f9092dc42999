"""What a bottle held over time: levels by the books, weighings that stand, the lines that moved."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from django.db.models import Q

from bottles.models import Bottle, Line, Weighing

MOST = 400  # lines and weighings that a chart takes, the latest of each


@dataclass(frozen=True, slots=True)
class Course:
    """Oldest first; a level stands just after its moment."""

    levels: Sequence[tuple[datetime, int]]
    weighings: Sequence[Weighing]
    lines: Sequence[Line]


def course_over_time(bottle: Bottle) -> Course:
    """Return the course of a bottle's contents: two queries, three for a long one."""
    weighings = list(
        Weighing.objects.filter(bottle=bottle, strike__isnull=True)
        .select_related("scale", "act__person")
        .order_by("-happened_at", "-id")[:MOST]
    )[::-1]
    lines = list(
        Line.objects.filter(Q(source__bottle=bottle) | Q(target__bottle=bottle))
        .select_related(
            "movement__act__person", "movement__reversal", "source__bottle", "source__customer", "source__car",
            "target__bottle", "target__customer", "target__car",
        )
        .order_by("-movement__happened_at", "-id")[:MOST]
    )[::-1]
    level = _before(bottle, lines)
    levels: list[tuple[datetime, int]] = []
    for line in lines:
        movement = line.movement
        if movement.reverses_id or hasattr(movement, "reversal"):
            continue  # both cancel each other
        level += line.grams if line.target.bottle_id == bottle.pk else -line.grams
        if levels and levels[-1][0] == movement.happened_at:
            levels.pop()
        levels.append((movement.happened_at, level))
    return Course(levels, weighings, lines)


def _before(bottle: Bottle, lines: Sequence[Line]) -> int:
    """What the books held before the oldest of these lines: nothing, unless there are more."""
    if len(lines) < MOST:
        return 0
    balance: int = bottle.account.balance_g
    for line in lines:
        if not (line.movement.reverses_id or hasattr(line.movement, "reversal")):
            balance -= line.grams if line.target.bottle_id == bottle.pk else -line.grams
    return balance
