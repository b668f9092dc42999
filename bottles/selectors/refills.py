"""Read refills: their weighings in order, the draw in force, what a page lists."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime

from django.db.models import Q, QuerySet

from bottles.models import Bottle, Draw, Refill, Weighing


@dataclass(frozen=True, slots=True)
class Course:
    """A refill's weighings and draws, in the order in which they happened."""

    refill: Refill
    before: Weighing | None
    reads: tuple[Weighing, ...]  # of the bottle to fill, after the first
    draws: tuple[Draw, ...]

    @property
    def last(self) -> Weighing | None:
        """The latest weighing of the bottle to fill."""
        return self.reads[-1] if self.reads else self.before

    def draw_at(self, happened_at: datetime, act_id: int) -> int:
        """The number of the draw in force at a weighing; a draw begins after the weighing it came with."""
        number = 0
        for place, draw in enumerate(self.draws):
            if (draw.happened_at, draw.act_id) < (happened_at, act_id):
                number = place
        return number

    @property
    def closable(self) -> Weighing | None:
        """The weighing that lets it close: the latest, line disconnected, at or below the limit."""
        last = self.reads[-1] if self.reads else None
        return last if last and last.step == "disconnected" and last.net_g <= self.refill.limit_g else None

    @property
    def overfull(self) -> Weighing | None:
        """The latest weighing where it shows more than the limit."""
        last = self.last
        return last if last and net_without_hose(self.refill, last) > self.refill.limit_g else None


def net_without_hose(refill: Refill, weighing: Weighing) -> int:
    """Return a weighing's net with the hose's pull taken out where the line was still connected."""
    return weighing.net_g - (refill.station.hose_pull_g if weighing.step == "after" else 0)


def draws_of(refill: Refill) -> tuple[Draw, ...]:
    """Return a refill's draws in the order in which they happened, with supply bottles and forecasts."""
    return tuple(refill.draws.select_related("source", "forecast").order_by("happened_at", "id"))


def in_force(draws: Sequence[Draw]) -> Draw:
    """Return the draw that a refill goes on from now: the one recorded last."""
    return max(draws, key=lambda draw: draw.pk)


def course_of(refill: Refill, draws: Sequence[Draw] | None = None) -> Course:
    """Return a refill's course: two queries, one for whoever has just read its draws.

    A weighing counts that was made for it, or that took the place of one that was struck.
    """
    draws = draws_of(refill) if draws is None else tuple(draws)
    mine = Q(refill=refill) | Q(act_id=refill.act_id) | Q(act_id__gt=refill.act_id, happened_at__gte=refill.opened_at)
    if refill.closed_at is not None:
        mine &= Q(happened_at__lte=refill.closed_at)
    rows = list(
        Weighing.objects.filter(mine, bottle_id=refill.bottle_id, strike__isnull=True)
        .exclude(act_id__in=Refill.objects.filter(bottle_id=refill.bottle_id, id__gt=refill.pk).values("act_id"))
        .select_related("scale", "tare")
        .order_by("happened_at", "act_id", "id")
    )
    firsts = [row for row in rows if row.step == "before"]
    before = firsts[-1] if firsts else None
    reads = tuple(row for row in rows if row.step in ("after", "disconnected"))
    return Course(refill, before, reads, draws)


def source_weighings(course: Course, number: int) -> list[Weighing]:
    """Return the weighings of one draw's supply bottle, from its start on."""
    draw = course.draws[number]
    following = course.draws[number + 1] if number + 1 < len(course.draws) else None
    rows = Weighing.objects.filter(bottle_id=draw.source_id, strike__isnull=True, act_id__gte=draw.act_id)
    rows = rows.filter(Q(act_id=draw.act_id) | Q(refill=course.refill))
    if following is not None:
        rows = rows.filter(act_id__lte=following.act_id)
    return list(rows.order_by("happened_at", "act_id", "id"))


def open_refills() -> QuerySet[Refill]:
    """Return the open refills, the oldest first."""
    return _listed().filter(closed_at__isnull=True).order_by("opened_at", "id")


def closed_refills() -> QuerySet[Refill]:
    """Return the closed refills, the latest first."""
    return _listed().filter(closed_at__isnull=False).order_by("-closed_at", "-id")


def refills_of(bottle: Bottle) -> QuerySet[Refill]:
    """Return a bottle's refills, the latest first."""
    return bottle.refills.select_related("station__scale").order_by("-opened_at", "-id")


def last_weighings(refills: Iterable[Refill]) -> dict[int, Weighing]:
    """Return each refill's last weighing of the bottle being filled, by the refill's key: one query."""
    found: dict[int, Weighing] = {}
    keys = {refill.pk: refill.bottle_id for refill in refills}
    rows = Weighing.objects.filter(refill__in=keys, strike__isnull=True).order_by("happened_at", "act_id", "id")
    for row in rows:
        if row.refill_id and keys[row.refill_id] == row.bottle_id:
            found[row.refill_id] = row
    return found


def last_sources(refills: Iterable[Refill]) -> dict[int, Bottle]:
    """Return the supply bottle in force of each refill: one query."""
    rows = Draw.objects.filter(refill__in=[refill.pk for refill in refills]).select_related("source").order_by("id")
    return {row.refill_id: row.source for row in rows}


def _listed() -> QuerySet[Refill]:
    return Refill.objects.select_related("bottle", "station__scale")
