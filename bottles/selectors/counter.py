"""What the Counter shows: bottles in the shop, supply bottles on the stations.

Each in a fixed number of queries.
"""

from __future__ import annotations

from collections.abc import Sequence

from django.db.models import F, QuerySet

from bottles.models import Custody, Standing, Station, Supply

SHOWN = 100  # bottles on the counter's own list; more are on the bottles page


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
    """Return the supply bottles on the stations in use, each with its books and what was last weighed of it."""
    weighing = "bottle__standing__weighing"
    return list(
        Supply.objects.filter(station__active=True)
        .annotate(
            code=F("bottle__code"), station_name=F("station__name"), books_g=F("bottle__account__balance_g"),
            net_g=F(f"{weighing}__net_g"), error_g=F(f"{weighing}__error_g"),
        )
        .order_by("station__name", "bottle__code")
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
