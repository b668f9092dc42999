"""Bottles that are only stored, and whether they keep their weight.

What counts: dry weighings that stand, of a bottle that is in, since nitrous last went in or out by
the books and since the bottle last came. Books brought to the scale don't break the row: a slow leak
is a row of them. A fixed number of queries, however many bottles.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any
from uuid import UUID

from django.db.models import Exists, F, Max, Min, OuterRef, Q, QuerySet

from bottles.models import Bottle, Custody, Draw, Line, Refill, Standing, Weighing
from bottles.rules.leaks import Drift, Noise, Reading, drift_of
from shop.base.composed import composed
from shop.base.models import Act

WEEK = timedelta(weeks=1)
_MOST_G = F("scale__resolution_g") + F("scale__error_g")  # as Noise.most_g
MOVES = ("delivery", "returned", "refill", "use", "vent")  # the others only bring the books to the scale


@dataclass(frozen=True, slots=True)
class Watch:
    """A stored bottle's readings on one scale, oldest first."""

    bottle: int
    code: str
    scale: str
    noise: Noise
    readings: Sequence[Reading]
    first_at: datetime
    last_at: datetime
    drift: Drift | None  # None: one reading can't tell

    @property
    def net_g(self) -> int:
        """What it held by the last of them."""
        return self.readings[-1].net_g

    @property
    def raised(self) -> bool:
        """Whether it leaks or grew."""
        return self.drift is not None and self.drift.verdict != "steady"


@dataclass(frozen=True, slots=True)
class Overview:
    """The stored bottles with a weighing that counts, both by code; and how many each scale can tell of."""

    raised: Sequence[Watch]
    others: Sequence[int]  # keys
    looked: Mapping[str, int]


def watch_of(bottle: Bottle) -> Watch | None:
    """Return what the leak watch knows of one bottle, or None where no weighing of it counts: one query."""
    return next(iter(_watched(_of_one(bottle.pk))), None)


def overview() -> Overview:
    """Return what the leak watch knows of all stored bottles: two queries.

    Fitted are only those that may be raised, or that several scales tell of.
    """
    codes: dict[int, str] = {}
    scales: dict[int, list[str]] = defaultdict(list)  # those that tell anything, of each bottle
    doubtful: set[int] = set()
    for bottle, code, scale, first, last, apart, most in _series():
        codes[bottle] = code
        if last > first:
            scales[bottle].append(scale)
            if apart > most or len(scales[bottle]) > 1:
                doubtful.add(bottle)
    looked = Counter(found[0] for bottle, found in scales.items() if bottle not in doubtful)
    fitted = _fitted(doubtful)
    looked.update(watch.scale for watch in fitted if watch.drift)
    raised = sorted((watch for watch in fitted if watch.raised), key=lambda watch: watch.code)
    others = codes.keys() - {watch.bottle for watch in raised}
    return Overview(raised, sorted(others, key=lambda bottle: codes[bottle]), looked)


def watches_of(bottles: Collection[int]) -> list[Watch]:
    """Return what the leak watch knows of bottles, by code: one query."""
    return sorted(_fitted(bottles), key=lambda watch: watch.code)


def not_watched(watched: int) -> int:
    """Return how many bottles are in beside those that have a weighing that counts."""
    return Standing.objects.filter(is_in=True, bottle__retired_at__isnull=True).count() - watched


def leaking() -> tuple[str, ...]:
    """Return the codes of bottles that leak.

    For pages that only mention them: worked out anew once anything was recorded since, with only
    those fitted whose readings differ by more than their scale can lie. One query where nothing was.
    """
    global _known
    latest = next(iter(_latest_act()), None)
    kept = _known
    if kept is not None and latest is not None and kept[0] == latest:
        return kept[1]
    found = _fitted(set(_may_be_raised()))
    codes = tuple(sorted(watch.code for watch in found if watch.drift and watch.drift.verdict == "leaks"))
    if latest is not None:
        _known = (latest, codes)
    return codes


_known: tuple[UUID, tuple[str, ...]] | None = None  # as of an act, by its key


@composed
def _latest_act() -> QuerySet[Any]:
    return Act.objects.order_by("-id").values_list("key", flat=True)[:1]


@composed
def _of_one(bottle: int) -> QuerySet[Any]:
    return _columns(_stored().filter(bottle=bottle))


def _columns(weighings: QuerySet[Weighing]) -> QuerySet[Any]:
    return weighings.order_by("bottle", "happened_at", "id").values_list(
        "bottle", "bottle__code", "scale", "tare", "scale__name", "scale__resolution_g", "scale__error_g", "happened_at", "net_g"
    )


def _stored() -> QuerySet[Weighing]:
    """Weighings that count, of bottles that are in and stored."""
    of_it = OuterRef("bottle")
    later = Q(movement__happened_at__gt=OuterRef("happened_at")) | Q(
        movement__happened_at=OuterRef("happened_at"), movement__act__gt=OuterRef("act")
    )
    moved = Line.objects.filter(later, movement__kind__in=MOVES, movement__reversal__isnull=True)
    # With the line on, the hose pulls at the reading; a supply bottle is weighed with it on.
    line_off = Q(refill__isnull=True) | Q(refill__bottle=F("bottle"), step__in=("before", "disconnected"))
    return _dry().filter(line_off).exclude(
        Exists(Refill.objects.filter(bottle=of_it, closed_at__isnull=True))
        | Exists(Draw.objects.filter(source=of_it, refill__closed_at__isnull=True))
        | Exists(Custody.objects.filter(bottle=of_it, happened_at__gt=OuterRef("happened_at")).exclude(kind="moved"))
        | Exists(moved.filter(source__bottle=of_it))
        | Exists(moved.filter(target__bottle=of_it))
    )


def _dry() -> QuerySet[Weighing]:
    """Dry weighings of bottles that are in, since they last came: more than count, but found at once."""
    came = Q(happened_at__gte=F("bottle__standing__custody__happened_at")) | Q(bottle__standing__custody__kind="moved")
    return Weighing.objects.filter(
        came, bottle__standing__is_in=True, bottle__retired_at__isnull=True, strike__isnull=True, wet=False
    )


def _wide(weighings: QuerySet[Weighing]) -> QuerySet[Any]:
    """Bottles whose readings on one scale with one tare differ by more than the scale can lie."""
    series = weighings.order_by().values("bottle", "scale", "tare").annotate(apart=Max("net_g") - Min("net_g"))
    return series.filter(apart__gt=_MOST_G).values_list("bottle", flat=True)


@composed
def _may_be_raised() -> QuerySet[Any]:
    return _wide(_stored().filter(bottle__in=_wide(_dry())))


@composed
def _of_these(bottles: Iterable[int]) -> QuerySet[Any]:
    return _columns(_stored().filter(bottle__in=bottles))


@composed
def _series() -> QuerySet[Any]:
    series = _stored().order_by().values("bottle", "bottle__code", "scale", "tare", "scale__name")
    found = series.annotate(first=Min("happened_at"), last=Max("happened_at"), apart=Max("net_g") - Min("net_g"))
    return found.values_list("bottle", "bottle__code", "scale__name", "first", "last", "apart", _MOST_G)


def _fitted(bottles: Collection[int]) -> list[Watch]:
    return list(_watched(_of_these(bottles))) if bottles else []


def _watched(rows: Iterable[tuple[Any, ...]]) -> Iterable[Watch]:
    """Fit each bottle's readings, scale by scale; the one that is raised speaks, else the one that tells most."""
    bottles: dict[int, dict[tuple[int, int], list[tuple[datetime, int]]]] = defaultdict(lambda: defaultdict(list))
    codes: dict[int, str] = {}
    scales: dict[int, tuple[str, Noise]] = {}
    for bottle, code, scale, tare, name, step, error, at, net in rows:
        codes[bottle] = code
        scales.setdefault(scale, (name, Noise(step, error)))
        bottles[bottle][scale, tare].append((at, net))
    for bottle, series in bottles.items():
        looks = max(1, sum(len(readings) > 1 for readings in series.values()))
        found = [_watch(bottle, codes[bottle], *scales[scale], series[scale, tare], looks) for scale, tare in series]
        yield max(found, key=_tells)


def _watch(
    bottle: int, code: str, scale: str, noise: Noise, weighed: Sequence[tuple[datetime, int]], looks: int
) -> Watch:
    first, last = weighed[0][0], weighed[-1][0]
    readings = [Reading((at - first) / WEEK, net) for at, net in weighed]
    return Watch(bottle, code, scale, noise, readings, first, last, drift_of(readings, noise, looks=looks))


def _tells(watch: Watch) -> tuple[bool, float, datetime]:
    """What is raised before what isn't, then the finest look, then the latest."""
    drift = watch.drift
    return watch.raised, (drift.low_g - drift.high_g) if drift else float("-inf"), watch.last_at
