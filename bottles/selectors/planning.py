"""What a day's plan asks the register: the latest plan, where bottles are chilled, the pace of recent weeks."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from math import ceil

from bottles.models import Custody, DayPlan, DayPlanResult, Line, Standing
from bottles.physics.chilling import FREEZER, ICED_WATER, Surroundings, temperature_after, time_to_reach
from bottles.physics.heating import room_loss, seconds_to_reach
from bottles.physics.vessel import COLDEST, Vessel
from bottles.rules.planning.problem import Start
from bottles.rules.planning.told import TOLD
from bottles.selectors.books import STANDS, day_start
from bottles.selectors.register import owner_words
from shop.base import clock
from shop.base.models import Job, Place, Shop
from shop.physics.errors import PhysicsError

WEEKS = 4  # that the pace is taken from
_NEARLY = 3.0  # K above the coldest: the last degrees take too long (common practice, no source)
_ICED_K = (270.15, 285.15)
_CHILLED_IN = 2  # places that a plan tells apart: more would differ little


@dataclass(frozen=True, slots=True)
class Cold:
    """A freezer or bath of the plan; `place_id` None where it was entered for the plan alone."""

    name: str
    kind: str
    coldest_k: float
    takes: int
    place_id: int | None = None

    def holds(self, place_id: int | None) -> bool:
        """Whether a bottle that stands at a place stands in it."""
        return self.place_id is not None and self.place_id == place_id

    @property
    def surroundings(self) -> Surroundings | None:
        """What a bottle stands in there; None for a bath that is neither ice nor near it."""
        if self.kind == "freezer":
            return Surroundings(FREEZER, self.coldest_k)
        if _ICED_K[0] <= self.coldest_k <= _ICED_K[1]:
            return Surroundings(ICED_WATER, self.coldest_k)
        return None


def plan_of_today(shop: Shop) -> DayPlan | None:
    """Return what today is planned with: the latest question."""
    return DayPlan.objects.filter(day=clock.today(shop)).select_related("act__person").order_by("-id").first()


def latest_question() -> DayPlan | None:
    """Return the latest question of any day: what the next form begins with."""
    return DayPlan.objects.order_by("-id").first()


def latest_result(plan: DayPlan) -> DayPlanResult | None:
    """Return the latest working out of today's plan: of this question, or of one before it until this one is done."""
    return DayPlanResult.objects.filter(plan__day=plan.day, result__told=TOLD).select_related("plan").order_by("-id").first()


def owners_of(codes: Collection[str]) -> dict[str, str]:
    """Return whose bottles are now, in words, by code."""
    rows = Standing.objects.filter(bottle__code__in=codes).select_related("bottle", "ownership__customer")
    return {row.bottle.code: owner_words(row.ownership) for row in rows}


def making(plan: DayPlan) -> Job | None:
    """Return the work that makes a day's plan anew, where some is going on or was just cancelled or failed."""
    last = Job.objects.filter(kind="plan.make", args__day=plan.day.isoformat()).order_by("-id").first()
    return last if last is not None and last.state != "done" else None


def places_written_down() -> list[Cold]:
    """Return the shop's freezers and baths whose temperature and room are written down, the coldest first."""
    rows = Place.objects.filter(
        active=True, kind__in=("freezer", "bath"), coldest_mk__isnull=False, takes_at_once__gt=0
    ).order_by("coldest_mk", "code")[:_CHILLED_IN]
    return [
        Cold(row.name, row.kind, max((row.coldest_mk or 0) / 1000, COLDEST), row.takes_at_once or 0, row.pk) for row in rows
    ]


def temperature_now(vessel: Vessel, custody: Custody | None, colds: list[Cold], now: datetime) -> float:
    """Return how cold a bottle is by where it stands since when: the room's, or on its way to a freezer's [K]."""
    for cold in colds:
        surroundings = cold.surroundings
        if custody is not None and cold.holds(custody.place_id) and surroundings:
            return temperature_after(vessel, max(0.0, (now - custody.happened_at).total_seconds()), surroundings)[1]
    return vessel.temperature_k


def starts_of(vessel: Vessel, colds: list[Cold]) -> tuple[Start, ...]:
    """Return the temperatures at which a bottle can be filled: as it stands, chilled, chilled half as far in the coldest."""
    found = [Start(vessel.temperature_k)]
    for number, cold in enumerate(colds):
        nearly = cold.coldest_k + (_NEARLY if cold.kind == "freezer" else _NEARLY / 2)
        targets = [nearly] if number else [nearly, (nearly + vessel.temperature_k) / 2]
        for target in targets:
            seconds = _seconds(vessel, target, cold) if target < vessel.temperature_k - 1.0 else None
            if seconds is not None:
                found.append(Start(target, number, seconds))
    return tuple(found)


def _seconds(vessel: Vessel, target_k: float, cold: Cold) -> int | None:
    """How long a bottle takes to a temperature there, to the minute above."""
    try:
        surroundings = cold.surroundings
        if surroundings is not None:
            seconds = time_to_reach(vessel, target_k, surroundings).likely_s
        else:
            loss = room_loss(vessel.volume_m3)
            seconds = seconds_to_reach(vessel, target_k, ambient_k=cold.coldest_k, loss_w_k=loss)
    except PhysicsError:
        return None
    return None if seconds is None else ceil(seconds / 60.0) * 60


def use_by_day(shop: Shop, today: date) -> tuple[list[int], frozenset[int]]:
    """Return what went out of supply bottles on each open day of recent weeks, and which weekdays are open: one query.

    Open is a weekday on which anything was filled; days before the first refill in these weeks don't count.
    """
    first = today - timedelta(weeks=WEEKS)
    zone = clock.zone(shop)
    rows = Line.objects.filter(
        STANDS, movement__kind="refill", source__bottle__use="supply", movement__happened_at__gte=day_start(first, shop),
        movement__happened_at__lt=day_start(today, shop),
    ).values_list("movement__happened_at", "grams")  # fmt: skip
    used: dict[date, int] = defaultdict(int)
    for happened_at, grams in rows:
        used[happened_at.astimezone(zone).date()] += grams
    if not used:
        return [], frozenset()
    weekdays = frozenset(day.weekday() for day in used)
    begun = min(used)
    days = [begun + timedelta(days=number) for number in range((today - begun).days)]
    return [used.get(day, 0) for day in days if day.weekday() in weekdays], weekdays
