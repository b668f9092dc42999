"""Refills as pages list them, with the last weighing and the supply bottle of each."""

from __future__ import annotations

from collections.abc import Iterable

from django.db.models import QuerySet

from bottles.models import Bottle, Draw, Refill, Weighing


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
