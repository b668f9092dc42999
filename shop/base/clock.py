"""The only place that knows what time it is and which day the shop has."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from datetime import date, datetime
from zoneinfo import ZoneInfo

from django.utils import timezone

from shop.base.models import Shop

_pretended: ContextVar[datetime | None] = ContextVar("pretended", default=None)


def now() -> datetime:
    """Return the present instant, UTC."""
    return _pretended.get() or timezone.now()


@contextmanager
def pretend(instant: datetime) -> Iterator[None]:
    """Let the clock stand at an instant: for whoever writes an invented past."""
    token = _pretended.set(instant)
    try:
        yield
    finally:
        _pretended.reset(token)


def zone(shop: Shop | None = None) -> ZoneInfo:
    """Return the shop's time zone; UTC before there is a shop."""
    shop = shop or Shop.objects.first()
    return ZoneInfo(shop.time_zone) if shop else ZoneInfo("UTC")


def today(shop: Shop | None = None) -> date:
    """Return the shop's day: what a stamp, a due date or a policy is compared with."""
    return day_of(now(), shop)


def day_of(instant: datetime, shop: Shop | None = None) -> date:
    """Return the shop's day in which an instant falls."""
    return instant.astimezone(zone(shop)).date()
