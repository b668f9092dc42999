"""What is offered when a refill begins: supply bottles, the weakest first, and readings with their age."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import timedelta

from django.db.models import F, QuerySet

from bottles.models import Bottle, Forecast, Station, Supply
from shop.base import clock
from shop.physics.units import in_own_unit

# Older readings are told with their age and not filled in (common practice, no source).
FRESH = timedelta(hours=4)


@dataclass(frozen=True, slots=True)
class Offered:
    """Readings to start from, each with words for its age; whether any supply stands on a scale."""

    values: dict[str, str] = field(default_factory=dict)
    ages: dict[str, str] = field(default_factory=dict)
    supply_scales: bool = False


def supplies_offered(
    bottle: Bottle, station: Station | None = None, but: Bottle | None = None
) -> QuerySet[Supply]:  # fmt: skip
    """Return the supply bottles on the stations in use, the weakest first: it's drawn on first."""
    found = Supply.objects.filter(station__active=True, bottle__retired_at__isnull=True).exclude(bottle=bottle)
    if but is not None:
        found = found.exclude(bottle=but)
    if station is not None:
        found = found.filter(station=station)
    return found.select_related("station__scale", "station__supply_scale", "bottle__account").order_by(
        F("bottle__account__balance_g").asc(nulls_last=True), "bottle__code"
    )


def readings_offered(station: Station | None) -> Offered:
    """Return the temperatures last read at a station, with how long ago that was."""
    if station is None:
        return Offered()
    scales = station.supply_scale_id is not None
    last = Forecast.objects.filter(station=station).select_related("act__person").order_by("-id").first()
    if last is None:
        return Offered(supply_scales=scales)
    age = clock.now() - last.act.recorded_at
    by = f" by {last.act.person}" if last.act.person else ""
    values: dict[str, str] = {}
    ages: dict[str, str] = {}
    for name in ("supply_temperature", "bottle_temperature"):
        reading = last.readings.get(name)
        if not reading:
            continue
        words = in_own_unit(reading["stored"], reading["unit"])
        if age <= FRESH:
            values[name] = words
            ages[name] = f"As read {age_words(age)} ago{by}: read it again if it may have changed."
        else:
            ages[name] = f"Last read {age_words(age)} ago{by}: {words}."
    if values:
        values |= {name: last.readings.get(name, "wall") for name in ("taken", "bottle_taken")}
    return Offered(values, ages, scales)


def age_words(age: timedelta) -> str:
    """An age in words, no finer than it matters."""
    minutes = max(0, int(age.total_seconds() // 60))
    if minutes < 90:
        return f"{minutes} min"
    if minutes < 48 * 60:
        return f"{round(minutes / 60)} h"
    return f"{minutes // 1440} days"
