"""What the Counter shows: bottles in the shop, supply bottles on the stations.

Each in a fixed number of queries.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from django.db.models import F, OuterRef, QuerySet, Subquery

from bottles.models import Custody, Forecast, Standing, Station, Supply
from bottles.rules.fills_left import Counted, fills_left
from shop.base import clock
from shop.base.composed import composed

FORECAST_HOLDS = timedelta(days=7)  # an older one was made at other temperatures
SHOWN = 100  # bottles on the counter's own list; more are on the bottles page


def waiting() -> Sequence[Standing]:
    """Return the standings of bottles in the shop that wait for something, the soonest promise first."""
    return _waiting()


def at_the_counter() -> Sequence[Standing]:
    """Return the standings of bottles that stand at the counter and wait for nothing: to label, to go."""
    return _at_the_counter()


@composed
def _waiting() -> QuerySet[Standing]:
    found = _standings().filter(is_in=True, waits=True, bottle__retired_at__isnull=True)
    promised = F("custody__promised_at").asc(nulls_last=True)
    return found.order_by(promised, "custody__happened_at", "bottle__code")[:SHOWN]


@composed
def _at_the_counter() -> QuerySet[Standing]:
    found = _standings().filter(is_in=True, waits=False, custody__place__kind="counter", bottle__retired_at__isnull=True)
    return found.order_by("bottle__code")[:SHOWN]


def came_in_unweighed(standing: Standing) -> bool:
    """Whether the bottle is in and hasn't been weighed since it came."""
    custody, weighing = standing.custody, standing.weighing
    if custody is None or not custody.is_in:
        return False
    if weighing is None:
        return True
    came: Custody | None = custody
    if custody.kind != "in":  # moved about since
        came = Custody.objects.filter(bottle=standing.bottle_id, kind="in").order_by("happened_at", "id").last()
    return came is not None and weighing.happened_at < came.happened_at


def supplies() -> Sequence[Supply]:
    """Return the supply bottles on the stations in use, each with its books and what was last weighed of it."""
    return _supplies()


@composed
def _supplies() -> QuerySet[Any]:
    weighing = "bottle__standing__weighing"
    latest = Forecast.objects.filter(source=OuterRef("bottle")).order_by("-id").values("id")
    found = Supply.objects.filter(station__active=True).annotate(
        code=F("bottle__code"), station_name=F("station__name"), books_g=F("bottle__account__balance_g"),
        net_g=F(f"{weighing}__net_g"), error_g=F(f"{weighing}__error_g"), latest_forecast=Subquery(latest[:1]),
    )  # fmt: skip
    return found.order_by("station__name", "bottle__code")


@dataclass(frozen=True, slots=True)
class FillsLeft:
    """Full fills that a supply bottle still gives, by a forecast that was kept."""

    count: int
    target_g: int
    bottle_mk: int
    forecast_at: datetime


def fills_left_of(found: Sequence[Supply]) -> dict[int, FillsLeft]:
    """Return what the latest forecast from each supply bottle says of it now, by key of the supply.

    Nothing is computed anew; where no late forecast knew what the bottle held, there is no figure.
    One query, none where nothing was forecast.
    """
    of = {supply.latest_forecast: supply for supply in found if supply.latest_forecast and supply.books_g is not None}  # type: ignore[attr-defined]
    if not of:
        return {}
    told = {}
    for row in _forecasts(of, clock.now() - FORECAST_HOLDS):
        key, at, bottle_mk, fills, least, room, line_g, held_g, error_g, target_g = row
        if None in (fills, room, held_g, target_g):
            continue
        counted = Counted(fills, held_g, error_g or 0, round(room * 1000) + (line_g or 0), round((least or 0) * 1000))
        count = fills_left(counted, of[key].books_g)  # type: ignore[attr-defined]
        if count is not None:
            told[of[key].pk] = FillsLeft(count, target_g, bottle_mk, at)
    return told


@composed
def _forecasts(keys: Iterable[int], since: datetime) -> QuerySet[Any]:
    return Forecast.objects.filter(pk__in=keys, act__recorded_at__gte=since).values_list(
        "id", "act__recorded_at", "readings__bottle_temperature__stored", "result__full_fills", "result__least_source_kg",
        "result__room_kg", "result__line_g", "result__source_g", "result__source_error_g", "result__target_g",
    )  # fmt: skip


def has_stations() -> bool:
    """Return whether any station is in use."""
    return Station.objects.filter(active=True).exists()


def _standings() -> QuerySet[Standing]:
    """Standings with what is judged, and by name what is shown beside that: a row for each, no more objects."""
    return Standing.objects.select_related("bottle", "ownership", "weighing").annotate(
        customer=F("ownership__customer__name"), place=F("custody__place__name"), wanted=F("custody__wanted"),
        promised_at=F("custody__promised_at"),
    )  # fmt: skip
