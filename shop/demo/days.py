"""The invented shop's days: when it works, and local times as instants."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from zoneinfo import ZoneInfo

from shop.rules import month as months
from shop.rules.month import Month

DAYS_A_MONTH = 30.4375
HISTORY_MONTHS = 24
_CLOSED = {(12, 24), (12, 25), (12, 26), (12, 31), (1, 1)}


@dataclass(frozen=True, slots=True)
class Days:
    """Today in the shop, and everything counted back from it.

    Nothing lies on today itself: whoever opens the demo early in the morning would else find
    what is still to come. The newest things happened yesterday, towards closing.
    """

    today: date
    zone: ZoneInfo
    first: date

    @classmethod
    def until(cls, today: date, zone: ZoneInfo, history_months: float = HISTORY_MONTHS) -> Days:
        """Return the days of so many months until today."""
        return cls(today, zone, today - timedelta(days=round(history_months * DAYS_A_MONTH)))

    @property
    def month(self) -> Month:
        """This month."""
        return months.of_date(self.today)

    @property
    def beginning(self) -> date:
        """The day on which the books were set up, some days before anything in them."""
        return self.today - timedelta(days=round(HISTORY_MONTHS * DAYS_A_MONTH) + 14)

    def ago(self, days: int) -> date:
        """Return the day so many days ago."""
        return self.today - timedelta(days=days)

    def at(self, day: date, clock: str) -> datetime:
        """Return a local time of a day as an instant."""
        hour, minute = clock.split(":")
        return datetime.combine(day, time(int(hour), int(minute)), self.zone).astimezone(UTC)

    def workdays(self) -> Iterator[date]:
        """Give the days of the history on which the shop works, the oldest first; yesterday is the last."""
        day = self.first
        while day < self.ago(1):
            if is_workday(day):
                yield day
            day += timedelta(days=1)


def is_workday(day: date) -> bool:
    """Whether the shop works: Monday to Saturday, not on a few days of the year."""
    return day.weekday() < 6 and (day.month, day.day) not in _CLOSED


def founding(today: date, zone: ZoneInfo) -> datetime:
    """Return when the shop began to write its books: a little before anything in them."""
    return Days.until(today, zone).at(Days.until(today, zone).beginning, "07:00")
