"""Refills as pages list them, with the last weighing and the supply bottle of each."""

from __future__ import annotations

from collections.abc import Iterable

from django.db.models import QuerySet

from bottles.models import Bottle, Draw, Refill, Weighing
from shop.base.composed import composed

LISTED = 5  # refills on a bottle's own page


@composed
def open_refills() -> QuerySet[Refill]:
    """Return the open refills, the oldest first."""
    return _listed().filter(closed_at__isnull=True).order_by("opened_at", "id")


def closed_refills() -> QuerySet[Refill]:
    """Return the closed refills, the latest first."""
    return _listed().filter(closed_at__isnull=False).order_by("-closed_at", "-id")


def latest_refills_of(bottle: Bottle) -> list[Refill]:
    """Return as many of a bottle's refills as its page lists and one more, the latest first."""
    found = _refills(bottle.pk)
    for refill in found:
        refill.bottle = bottle
    return found


def last_weighings(refills: Iterable[Refill]) -> dict[int, Weighing]:
    """Return each refill's last weighing of the bottle being filled, by the refill's key: one query."""
    found: dict[int, Weighing] = {}
    keys = {refill.pk: refill.bottle_id for refill in refills}
    for row in _weighings(keys):
        if row.refill_id and keys[row.refill_id] == row.bottle_id:
            found[row.refill_id] = row
    return found


def last_sources(refills: Iterable[Refill]) -> dict[int, Bottle]:
    """Return the supply bottle in force of each refill: one query."""
    return {row.refill_id: row.source for row in _draws([refill.pk for refill in refills])}


@composed
def _refills(bottle: int) -> QuerySet[Refill]:
    return Refill.objects.filter(bottle=bottle).select_related("station__scale").order_by("-opened_at", "-id")[: LISTED + 1]


@composed
def _weighings(refills: Iterable[int]) -> QuerySet[Weighing]:
    return Weighing.objects.filter(refill__in=refills, strike__isnull=True).order_by("happened_at", "act_id", "id")


@composed
def _draws(refills: Iterable[int]) -> QuerySet[Draw]:
    return Draw.objects.filter(refill__in=refills).select_related("source").order_by("id")


def _listed() -> QuerySet[Refill]:
    return Refill.objects.select_related("bottle", "station__scale")
