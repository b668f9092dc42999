"""Whose a bottle was and where it was, at a moment: what a gap in the books is asked by."""

from __future__ import annotations

from datetime import datetime

from bottles.models import Bottle, Custody, Ownership
from shop.base import clock


def owner_at(bottle: Bottle, at: datetime) -> Ownership | None:
    """Return the ownership in force at a moment; the first one, where it was registered later."""
    rows = list(Ownership.objects.filter(bottle=bottle).select_related("customer").order_by("since", "id"))
    day = clock.day_of(at)
    return next((row for row in reversed(rows) if row.since <= day), rows[0] if rows else None)


def last_out(bottle: Bottle, since: datetime | None, until: datetime) -> Custody | None:
    """Return the last custody outside the shop that lasted into the span, or None if it never left.

    A bottle that was already out when the span began was out in it.
    """
    rows = Custody.objects.filter(bottle=bottle, happened_at__lte=until).select_related("car").order_by("happened_at", "id")
    out: Custody | None = None
    for row in rows:
        if since is not None and row.happened_at <= since:
            out = None if row.is_in else row
        elif not row.is_in:
            out = row
    return out


def was_registered_in(bottle: Bottle, at: datetime) -> bool:
    """Whether it had ever been checked in by then; what never was can't be said not to have left."""
    return Custody.objects.filter(bottle=bottle, happened_at__lte=at).exists()
