"""Reading what several apps know of one customer or one car."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass

from django.db.models import QuerySet

from bottles.models import Standing
from shop.physics.formatting import format_mass, unit_system
from shop.rooms.finding import bottle_url


@dataclass(frozen=True, slots=True)
class BottleRow:
    """A bottle as a line of a page, in ready words."""

    url: str
    code: str
    mark: str
    where: str
    holds: str
    origin: str


def bottles_of_customer(customer_id: int, *, system: str) -> list[BottleRow]:
    """The bottles that a customer owns now."""
    owned = _standings().filter(ownership__customer_id=customer_id, bottle__retired_at__isnull=True)
    return [_row(one, system) for one in owned.order_by("bottle__code")]


def bottles_on_cars(car_ids: Iterable[int], *, system: str) -> dict[int, list[BottleRow]]:
    """The bottles that are on these cars now, by car: one query for all of them."""
    on = _standings().filter(custody__kind="car", custody__car_id__in=list(car_ids)).order_by("bottle__code")
    found: dict[int, list[BottleRow]] = defaultdict(list)
    for one in on:
        assert one.custody is not None and one.custody.car_id is not None
        found[one.custody.car_id].append(_row(one, system))
    return found


def _standings() -> QuerySet[Standing]:
    return Standing.objects.select_related("bottle", "custody__place", "custody__car", "weighing")


def _row(one: Standing, system: str) -> BottleRow:
    holds, origin = "unknown: never weighed", ""
    if one.weighing is not None:
        weighing = one.weighing
        holds = format_mass(weighing.net_g, unit_system(system).mass, plus_minus_g=weighing.error_g)
        origin = "weighed"
    return BottleRow(
        url=bottle_url(one.bottle.code),
        code=one.bottle.code,
        mark=one.bottle.mark or "mark not legible",
        where=where(one),
        holds=holds,
        origin=origin,
    )


def where(one: Standing) -> str:
    """Say where a bottle is, in words."""
    custody = one.custody
    if custody is None:
        return "not checked in yet"
    if custody.is_in and custody.place is not None:
        return f"here: {custody.place.name}"
    if custody.car is not None:
        return f"on {custody.car}"
    word = custody.get_kind_display()
    return f"{word} to {custody.with_whom}" if custody.with_whom and custody.kind in ("out", "loan") else word
