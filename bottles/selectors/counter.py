"""What the Counter shows: refills going on, bottles in the shop, supply bottles on the stations.

Each in a fixed number of queries.
"""

from __future__ import annotations

from collections.abc import Sequence

from django.db.models import F, QuerySet

from bottles.models import Custody, Refill, Standing, Station, Supply

SHOWN = 100  # bottles on the counter's own list; more are on the bottles page


def open_refills() -> QuerySet[Refill]:
    """Return the refills that are open, the oldest first."""
    return (
        Refill.objects.filter(closed_at__isnull=True)
        .select_related("bottle", "station__scale")
        .prefetch_related("draws__source")
        .order_by("station__name", "opened_at")
    )


def waiting() -> Sequence[Standing]:
    """Return the standings of bottles in the shop that wait for something, the soonest promise first."""
    return list(
        _standings()
        .filter(is_in=True, waits=True, bottle__retired_at__isnull=True)
        .order_by(F("custody__promised_at").asc(nulls_last=True), "custody__happened_at", "bottle__code")[:SHOWN]
    )


def at_the_counter() -> Sequence[Standing]:
    """Return the standings of bottles that stand at the counter and wait for nothing: to label, to go."""
    return list(
        _standings()
        .filter(is_in=True, waits=False, custody__place__kind="counter", bottle__retired_at__isnull=True)
        .order_by("bottle__code")[:SHOWN]
    )


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
    """Return the supply bottles on the stations in use, with what was last weighed of them."""
    return list(
        Supply.objects.filter(station__active=True)
        .select_related("station", "bottle__standing__weighing", "bottle__account")
        .order_by("station__name", "bottle__code")
    )


def stations() -> Sequence[Station]:
    """Return the stations in use."""
    return list(Station.objects.filter(active=True).order_by("name"))


def _standings() -> QuerySet[Standing]:
    return Standing.objects.select_related(
        "bottle", "ownership__customer", "custody__place", "custody__car", "weighing"
    )
