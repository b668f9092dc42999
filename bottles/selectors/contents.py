"""What a bottle holds now: by the scale, or by the books since; never weighed is unknown, not zero."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from django.db.models import Q, QuerySet

from bottles.models import Account, Bottle, Line, Standing, Weighing
from bottles.physics.weighing import net_uncertainty
from shop.base.composed import composed


@dataclass(frozen=True, slots=True)
class Holding:
    """Contents with their ± and origin, and the books beside them; grams None: unknown."""

    grams: int | None
    error_g: int
    origin: str  # weighed; computed: weighed, and moved since by the books; entered: by a ticket; or empty
    weighing: Weighing | None
    books_g: int
    over_g: int = 0  # what the scale says beyond the books, within the ±
    moved_since: bool = False

    @property
    def known(self) -> bool:
        """Whether anything was weighed or delivered."""
        return self.grams is not None

    @property
    def weighed_at(self) -> datetime | None:
        """When it was last weighed."""
        return self.weighing.happened_at if self.weighing else None


def holding_of(bottle: Bottle, standing: Standing | None = None) -> Holding:
    """Return what one bottle holds now; whoever has just read its standing hands that over."""
    return holdings([bottle], [standing] if standing else None)[bottle.pk]


def holdings(bottles: Sequence[Bottle], standings: Iterable[Standing] | None = None) -> dict[int, Holding]:
    """Return what bottles hold now, by key: three queries, however many they are."""
    keys = [bottle.pk for bottle in bottles]
    if standings is None:
        standings = Standing.objects.filter(pk__in=keys).select_related("weighing__scale")
    weighings = {one.pk: one.weighing for one in standings if one.weighing}
    books = dict(_books(keys))
    since = _since(weighings, keys)
    return {key: _holding(weighings.get(key), books.get(key), since.get(key, (0, 0))) for key in keys}


def _since(weighings: Mapping[int, Weighing], keys: list[int]) -> dict[int, tuple[int, int]]:
    """What came and went after each bottle's last weighing, with its ±.

    A movement that the weighing itself caused is in it already; at the same instant what was
    recorded later came later.
    """
    if not keys:
        return {}
    oldest = min((row.happened_at for row in weighings.values()), default=None)
    rows = _moved_since(keys, oldest) if oldest is not None and len(weighings) == len(keys) else _moved(keys)
    found: dict[int, tuple[int, int]] = {}
    for source, target, grams, error, happened_at, act, weighing_act, undone_weighing, undone, reversed_by, reverses in rows:
        place = (happened_at, undone_weighing or undone or weighing_act or act)
        for bottle, sign in ((source, -1), (target, 1)):
            row = weighings.get(bottle) if bottle is not None else None
            if bottle is None or (row is not None and place <= (row.happened_at, row.act_id)):
                continue
            before = found.get(bottle, (0, 0))
            spread = before[1] if reversed_by or reverses else net_uncertainty(before[1], error)
            found[bottle] = (before[0] + sign * grams, spread)
    return found


@composed
def _books(keys: Iterable[int]) -> QuerySet[Any]:
    return Account.objects.filter(bottle__in=keys).values_list("bottle_id", "balance_g")


@composed
def _moved(keys: Iterable[int]) -> QuerySet[Any]:
    return _lines(keys)


@composed
def _moved_since(keys: Iterable[int], moment: datetime) -> QuerySet[Any]:
    return _lines(keys).filter(movement__happened_at__gte=moment)


def _lines(keys: Iterable[int]) -> QuerySet[Any]:
    return Line.objects.filter(Q(source__bottle__in=keys) | Q(target__bottle__in=keys)).values_list(
        "source__bottle_id", "target__bottle_id", "grams", "error_g", "movement__happened_at", "movement__act_id",
        "movement__weighing__act_id", "movement__reverses__weighing__act_id", "movement__reverses__act_id",
        "movement__reversal__id", "movement__reverses_id",
    )


def _holding(weighing: Weighing | None, books: int | None, since: tuple[int, int]) -> Holding:
    moved, spread = since
    if weighing is None:
        if not books:
            return Holding(None, 0, "", None, books or 0)
        return Holding(books, spread, "entered", None, books, moved_since=True)
    grams = max(0, weighing.net_g + moved)
    touched = bool(moved or spread)
    return Holding(
        grams, net_uncertainty(weighing.error_g, spread), "computed" if touched else "weighed", weighing, books or 0,
        over_g=grams - (books or 0), moved_since=touched,
    )
