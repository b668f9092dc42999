"""A morning in the shop of `of_refill`, with a freezer and bottles that wait, to be planned."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from typing import Any

from bottles.models import DayPlan, DayPlanResult, Line, Movement, Standing, Supply
from bottles.services import planning
from bottles.services.posting import account_of
from shop.base import clock
from shop.base.models import Place, Shop
from tests import factories
from tests.bottles.of_refill import Works, key

NOW = datetime(2026, 3, 3, 15, 0, tzinfo=UTC)  # nine in the morning in Chicago
INPUTS: dict[str, Any] = {
    "people": 1, "fill_minutes": 15, "change_minutes": 5, "opens": "08:00", "closes": "18:00", "lead_days": 2,
    "room_mk": 293_150, "room_typed": "20 °C", "supply_mk": 293_150, "supply_typed": "20 °C", "freezer_mk": None,
    "freezer_typed": "", "freezer_takes": None,
}  # fmt: skip


def wants(bottle: Any, promised: datetime | None = None, wanted: str = "refill") -> None:
    factories.placed(bottle, "moved", wanted=wanted, promised_at=promised, happened_at=clock.now() - timedelta(minutes=30))
    Standing.objects.filter(bottle=bottle).update(waits=True)


def plan(works: Works, **changes: Any) -> DayPlan:
    return planning.ask_for_plan(key=key(), person=works.person, shop=works.shop, inputs=INPUTS | changes)


def told(plan: DayPlan) -> dict[str, Any]:
    found = DayPlanResult.objects.filter(plan=plan).order_by("-id").first()
    assert found is not None
    return found.result


def many(works: Works, count: int = 9) -> None:
    for number in range(count):
        wants(works.bottle_to_fill(f"T-{600 + number}"))


def used(works: Works, grams_a_day: int) -> None:
    """As much went out of the supply bottles on each weekday of the last two weeks, from another bottle that is gone."""
    gone = works.connected("S-01").bottle
    out, into = account_of(gone), account_of(works.bottle_to_fill("T-0001"))
    for days in range(1, 15):
        day = NOW - timedelta(days=days)
        if day.weekday() < 5:
            movement = Movement.objects.create(act=factories.ActFactory(), kind="refill", happened_at=day)
            Line.objects.create(movement=movement, act=movement.act, source=out, target=into, grams=grams_a_day, origin="weighed")
    Supply.objects.filter(bottle=gone).delete()
    Standing.objects.filter(bottle=gone).update(is_in=False)


def a_morning(shop: Shop, person: Any) -> Iterator[Works]:
    """Nine o'clock: one bottle waits, and there's a freezer; what a fixture yields."""
    with clock.pretend(NOW):
        made = Works(shop, person)
        Place.objects.create(code="FREEZER", name="Chest freezer", kind="freezer", coldest_mk=255_150, takes_at_once=3)
        wants(made.bottle)
        yield made
