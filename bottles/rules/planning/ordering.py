"""The last day to order: what can still be used, at the pace of recent weeks.

Common practice, no source: the pace is the mean use of an open day, its interval two standard errors.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from datetime import date, timedelta
from math import sqrt

LEAST_DAYS = 5  # open days that a pace rests on
_FURTHEST = 366


@dataclass(frozen=True, slots=True)
class Pace:
    """What a shop uses on an open day, and how surely."""

    grams: int
    error_g: int
    days: int


@dataclass(frozen=True, slots=True)
class OrderBy:
    """Until when the stock lasts, and the last day on which an order still comes in time."""

    lasts_until: date
    soonest: date  # at the upper end of the pace
    latest: date | None  # at the lower end; None: beyond a year
    order_by: date


def pace_of(used_g: Sequence[int]) -> Pace | None:
    """Return the pace from the use of each open day, days without any included; None from too few, or from none."""
    many = len(used_g)
    if many < LEAST_DAYS or not any(used_g):
        return None
    mean = sum(used_g) / many
    spread = sqrt(sum((one - mean) ** 2 for one in used_g) / (many - 1))
    return Pace(round(mean), round(2.0 * spread / sqrt(many)), many)


def order_by(
    usable_g: int, pace: Pace | None, *, today: date, weekdays: Collection[int], lead_days: int
) -> OrderBy | None:  # fmt: skip
    """Return the last day to order; None without a pace, or where the stock lasts for longer than a year.

    The day counts back from the soonest end of the stock by the supplier's days, to a day that is open.
    """
    if pace is None or not weekdays:
        return None
    likely = _lasts(usable_g, pace.grams, today, weekdays)
    soonest = _lasts(usable_g, pace.grams + pace.error_g, today, weekdays)
    if likely is None or soonest is None:
        return None
    latest = _lasts(usable_g, pace.grams - pace.error_g, today, weekdays)
    last = soonest - timedelta(days=lead_days)
    while last > today and last.weekday() not in weekdays:
        last -= timedelta(days=1)
    return OrderBy(likely, soonest, latest, max(last, today))


def _lasts(usable_g: int, a_day_g: int, today: date, weekdays: Collection[int]) -> date | None:
    """The open day on which the stock no longer lasts; beyond a year there's none."""
    if a_day_g <= 0:
        return None
    left, day = usable_g, today
    for _ in range(_FURTHEST):
        if day.weekday() in weekdays:
            left -= a_day_g
            if left < 0:
                return day
        day += timedelta(days=1)
    return None
