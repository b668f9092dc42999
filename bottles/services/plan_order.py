"""Until when the supply bottles on hand last, and the last day to order."""

from __future__ import annotations

from math import hypot
from typing import Any

from bottles.rules.planning.ordering import order_by, pace_of
from bottles.rules.planning.problem import Day
from bottles.rules.planning.schedule import Rehearsal
from bottles.selectors.planning import use_by_day
from shop.base import clock
from shop.base.models import Shop


def order_told(day: Day, shop: Shop, lead_days: int) -> dict[str, Any]:
    """Until when the stock lasts at the pace of recent weeks, and the last day to order."""
    heels = Rehearsal(day).heel_kg
    usable = round(sum(max(0.0, one.net_kg - heel) for one, heel in zip(day.sources, heels, strict=True)) * 1000)
    today = clock.today(shop)
    used, weekdays = use_by_day(shop, today)
    pace = pace_of(used)
    error = round(hypot(*(one.unsure_kg for one in day.sources)) * 1000)
    found, sooner = (
        order_by(stock, pace, today=today, weekdays=weekdays, lead_days=lead_days) for stock in (usable, max(0, usable - error))
    )
    return {
        "usable_g": usable, "error_g": error, "lead_days": lead_days,
        "pace": {"grams": pace.grams, "error_g": pace.error_g, "days": pace.days} if pace else None,
        "lasts_until": found.lasts_until.isoformat() if found else None,
        "soonest": found.soonest.isoformat() if found else None,
        "latest": found.latest.isoformat() if found and found.latest else None,
        "order_by": found.order_by.isoformat() if found else None,
        "order_by_if_less": sooner.order_by.isoformat() if sooner else None,
    }  # fmt: skip
