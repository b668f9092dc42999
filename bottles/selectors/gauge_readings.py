"""What supply bottles that nobody weighed hold at least, by the gauge that was read before a refill."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from bottles.models import Forecast, Line
from bottles.physics.contents import contents_from_reading
from bottles.selectors.books import STANDS
from shop.physics.errors import PhysicsError


@dataclass(frozen=True, slots=True)
class ByGauge:
    """The least that a gauge leaves possible, less what was drawn since; when it was read."""

    least_g: int
    read_at: datetime


def least_by_gauge(bottles: Collection[int]) -> dict[int, ByGauge]:
    """Return what bottles hold at least by their last gauge reading, by key; two queries, none without bottles.

    Vapour alone shows the same pressure as vapour over liquid, so it's what vapour alone would weigh.
    What was drawn since counts in full, also where it went out before the reading but was logged after.
    """
    if not bottles:
        return {}
    rows = Forecast.objects.filter(source__in=bottles, readings__gauge__isnull=False).select_related("source", "act", "station")
    latest = {row.source_id: row for row in rows.order_by("id")}
    drawn = Line.objects.filter(STANDS, source__bottle__in=latest).values_list("source__bottle_id", "movement__act_id", "grams")
    since: dict[int, int] = dict.fromkeys(latest, 0)
    for bottle, act, grams in drawn:
        since[bottle] += grams if act >= latest[bottle].act_id else 0
    found = {}
    for key, row in latest.items():
        least = _least_g(row) - since[key]
        if least > 0:
            found[key] = ByGauge(least, row.act.recorded_at)
    return found


def _least_g(row: Forecast) -> int:
    readings: dict[str, Any] = row.readings
    if row.source.capacity_ml is None or not readings["gauge"]:
        return 0
    try:
        contents = contents_from_reading(
            capacity_m3=row.source.capacity_ml / 1e6, temperature_k=readings["supply_temperature"]["stored"] / 1000,
            pressure_pa=float(readings["gauge"]["stored"]),
            gauge_tolerance_pa=float(row.station.gauge_tolerance_pa),
            thermometer_tolerance_k=row.station.thermometer_tolerance_mk / 1000,
        )  # fmt: skip
    except PhysicsError:
        return 0
    return int(contents.least_kg * 1000)
