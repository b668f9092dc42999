"""What is unaccounted for, bottle by bottle, with who moved its contents between the two weighings."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date, datetime, timedelta

from django.db.models import Q

from bottles.models import Line, Weighing
from bottles.selectors.books import day_start
from shop.base.models import Shop


@dataclass(frozen=True, slots=True)
class Missing:
    """One gap: its bottle, grams short (below nothing: over), ±, when and why, and who moved what was in it."""

    bottle: str
    movement_id: int
    grams: int
    error_g: int
    happened_at: datetime
    since: datetime | None  # the weighing before
    reason: str
    persons: tuple[str, ...]


def unaccounted_between(first: date, last: date, *, shop: Shop) -> list[Missing]:
    """Return each bottle's gaps, those that were reversed left out: three queries."""
    start, end = day_start(first, shop), day_start(last + timedelta(days=1), shop)
    gaps = list(
        Line.objects.filter(
            Q(source__kind="unaccounted") | Q(target__kind="unaccounted"),
            movement__happened_at__gte=start, movement__happened_at__lt=end, movement__reverses__isnull=True,
            movement__reversal__isnull=True,
        )
        .select_related("movement", "source__bottle", "target__bottle")
        .order_by("movement__happened_at", "id")
    )
    bottles = {gap.source.bottle_id or gap.target.bottle_id for gap in gaps}
    weighed = _weighings(bottles)
    moved = _movers(bottles)
    return [_missing(gap, weighed, moved) for gap in gaps if gap.source.bottle_id or gap.target.bottle_id]


def _weighings(bottles: Iterable[int | None]) -> dict[int, list[tuple[datetime, int]]]:
    found: dict[int, list[tuple[datetime, int]]] = defaultdict(list)
    rows = Weighing.objects.filter(bottle__in=bottles, strike__isnull=True).order_by("happened_at", "id")
    for bottle, happened_at, key in rows.values_list("bottle_id", "happened_at", "id"):
        found[bottle].append((happened_at, key))
    return found


def _movers(bottles: Iterable[int | None]) -> dict[int, list[tuple[datetime, str]]]:
    """Who moved the contents of each bottle, and when; what was reversed, and what a gap itself posted, left out."""
    found: dict[int, list[tuple[datetime, str]]] = defaultdict(list)
    rows = (
        Line.objects.filter(Q(source__bottle__in=bottles) | Q(target__bottle__in=bottles))
        .filter(movement__reversal__isnull=True, movement__reverses__isnull=True)
        .exclude(movement__kind__in=("adjust", "opening"))
        .order_by("movement__happened_at", "id")
        .values_list("source__bottle_id", "target__bottle_id", "movement__happened_at", "movement__act__person__name")
    )
    for source, target, happened_at, name in rows:
        for bottle in (source, target):
            if bottle is not None:
                found[bottle].append((happened_at, name or "Tarebook"))
    return found


def _missing(
    gap: Line, weighed: dict[int, list[tuple[datetime, int]]], moved: dict[int, list[tuple[datetime, str]]]
) -> Missing:
    movement = gap.movement
    bottle = gap.source.bottle or gap.target.bottle
    assert bottle is not None
    until = movement.happened_at
    since = next(
        (at for at, key in reversed(weighed[bottle.pk]) if at <= until and key != movement.weighing_id), None
    )
    persons = dict.fromkeys(name for at, name in moved[bottle.pk] if at <= until and (since is None or at >= since))
    short = gap.grams if gap.target.kind == "unaccounted" else -gap.grams
    return Missing(
        bottle.code, movement.pk, short, gap.error_g, until, since, movement.note, tuple(persons)
    )
