"""Read refills as they went: their weighings and draws in order, the draw in force."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime

from django.db.models import Q

from bottles.models import Draw, Refill, Weighing
from bottles.selectors.scales import scale_uncertainty


@dataclass(frozen=True, slots=True)
class Course:
    """A refill's weighings and draws, in the order in which they happened."""

    refill: Refill
    before: Weighing | None
    reads: tuple[Weighing, ...]  # of the bottle to fill, after the first
    draws: tuple[Draw, ...]
    supply_reads: tuple[Weighing, ...]  # of the supply bottles, made for it

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

    @property
    def proves_full(self) -> bool:
        """Whether the latest weighing proves a full fill: dry, line off, the target reached within the scale's ±.

        Twice the ±, and one step: the reading to stop at is the target less the scale's ±, rounded
        down, and the scale may be that much out once more.
        """
        last, scale = self.closable, self.refill.station.scale
        if last is None or last.wet:
            return False
        slack = 2 * scale_uncertainty(scale) + scale.resolution_g if scale else last.error_g
        return last.net_g >= self.refill.target_g - slack


def net_without_hose(refill: Refill, weighing: Weighing) -> int:
    """Return a weighing's net with the hose's pull taken out where the line was still connected."""
    return weighing.net_g - (refill.station.hose_pull_g if weighing.step == "after" else 0)


def draws_of(refill: Refill) -> tuple[Draw, ...]:
    """Return a refill's draws in the order in which they happened, with supply bottles and forecasts."""
    return tuple(_draws([refill]))


def in_force(draws: Sequence[Draw]) -> Draw:
    """Return the draw that a refill goes on from now: the one recorded last."""
    return max(draws, key=lambda draw: draw.pk)


def course_of(refill: Refill, draws: Sequence[Draw] | None = None) -> Course:
    """Return a refill's course; whoever has just read its draws hands them over."""
    return courses_of([refill], draws)[0]


def courses_of(refills: Sequence[Refill], draws: Sequence[Draw] | None = None) -> list[Course]:
    """Return the courses of refills: three queries, four where one of them is closed."""
    if not refills:
        return []
    of_refill: dict[int, list[Draw]] = defaultdict(list)
    for draw in _draws(refills) if draws is None else draws:
        of_refill[draw.refill_id].append(draw)
    of_bottle: dict[int, list[Weighing]] = defaultdict(list)
    for row in _weighings_since(refills):
        of_bottle[row.bottle_id].append(row)
    supply_reads = _supply_reads(of_refill)
    opened_later = _opened_later(refills)
    return [
        _course(
            refill, tuple(of_refill[refill.pk]), tuple(supply_reads.get(refill.pk, ())),
            [row for row in of_bottle[refill.bottle_id] if _counts(row, refill) and row.act_id not in opened_later[refill.pk]],
        )
        for refill in refills
    ]  # fmt: skip


def _draws(refills: Sequence[Refill]) -> Iterable[Draw]:
    return Draw.objects.filter(refill__in=refills).select_related("source", "forecast").order_by("happened_at", "id")


def _course(refill: Refill, draws: tuple[Draw, ...], supply_reads: tuple[Weighing, ...], rows: list[Weighing]) -> Course:
    firsts = [row for row in rows if row.step == "before"]
    reads = tuple(row for row in rows if row.step in ("after", "disconnected"))
    return Course(refill, firsts[-1] if firsts else None, reads, draws, supply_reads)


def _weighings_since(refills: Sequence[Refill]) -> Sequence[Weighing]:
    """The weighings of the bottles filled that may count for one of these refills, in order."""
    rows = Weighing.objects.filter(
        bottle__in={refill.bottle_id for refill in refills}, strike__isnull=True, act_id__gte=min(one.act_id for one in refills)
    )
    ends = [refill.closed_at for refill in refills]
    if None not in ends:
        rows = rows.filter(happened_at__lte=max(end for end in ends if end))
    return list(rows.select_related("scale", "tare").order_by("happened_at", "act_id", "id"))


def _counts(row: Weighing, refill: Refill) -> bool:
    """Whether a weighing was made for a refill, or took the place of one that was struck."""
    if row.bottle_id != refill.bottle_id or (refill.closed_at is not None and row.happened_at > refill.closed_at):
        return False
    since = row.act_id > refill.act_id and row.happened_at >= refill.opened_at
    return row.refill_id == refill.pk or row.act_id == refill.act_id or since


def _opened_later(refills: Sequence[Refill]) -> dict[int, set[int]]:
    """For each refill the acts that opened later ones of its bottle: their first weighings aren't its own."""
    found: dict[int, set[int]] = {refill.pk: set() for refill in refills}
    closed = [refill for refill in refills if refill.closed_at is not None]  # while one is open there is no later one
    if not closed:
        return found
    of_bottle: dict[int, list[int]] = defaultdict(list)
    for refill in closed:
        of_bottle[refill.bottle_id].append(refill.pk)
    later = Refill.objects.filter(bottle__in=of_bottle.keys(), id__gt=min(one.pk for one in closed))
    for key, bottle, act in later.values_list("id", "bottle_id", "act_id"):
        for earlier in of_bottle[bottle]:
            if earlier < key:
                found[earlier].add(act)
    return found


def _supply_reads(of_refill: Mapping[int, Sequence[Draw]]) -> dict[int, list[Weighing]]:
    """For each refill the weighings of its supply bottles that came with a draw or were made for it."""
    draws = [draw for each in of_refill.values() for draw in each]
    came_with: dict[tuple[int, int], int] = {(draw.act_id, draw.source_id): draw.refill_id for draw in draws}
    rows = Weighing.objects.filter(
        Q(act_id__in=[draw.act_id for draw in draws]) | Q(refill__in=of_refill.keys()),
        bottle__in={draw.source_id for draw in draws}, strike__isnull=True,
    )
    found: dict[int, list[Weighing]] = defaultdict(list)
    for row in rows.order_by("happened_at", "act_id", "id"):
        refill = row.refill_id or came_with.get((row.act_id, row.bottle_id))
        if refill is not None:
            found[refill].append(row)
    return found


def source_weighings(course: Course, number: int) -> list[Weighing]:
    """Return the weighings of one draw's supply bottle, from its start on."""
    draw = course.draws[number]
    end = course.draws[number + 1].act_id if number + 1 < len(course.draws) else None
    mine = [
        row for row in course.supply_reads
        if row.bottle_id == draw.source_id and (row.act_id == draw.act_id or row.refill_id == course.refill.pk)
    ]  # fmt: skip
    return [row for row in mine if row.act_id >= draw.act_id and (end is None or row.act_id <= end)]
