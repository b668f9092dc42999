"""A month as one whole number: year × 12 + month − 1.

A stamp on metal has a month and a year, no day. Adding a test interval to it is adding
whole months; days × 365 would drift by a leap day every four years and end up in the
wrong month.

>>> june = from_ym(2021, 6)
>>> iso(add_years(june, 5))
'2026-06'
"""

from __future__ import annotations

import calendar
import datetime
import re

Month = int

MONTHS_A_YEAR = 12

_ISO = re.compile(r"(\d{4})-(\d{1,2})")
_SLASH = re.compile(r"(\d{1,2})/(\d{4})")


def from_ym(year: int, month: int) -> Month:
    """The number of a month given as year and month (1 to 12)."""
    if not 1 <= month <= MONTHS_A_YEAR:
        raise ValueError(f"no such month: {month}")
    return year * MONTHS_A_YEAR + month - 1


def ym(value: Month) -> tuple[int, int]:
    """Year and month (1 to 12) of a month's number."""
    return value // MONTHS_A_YEAR, value % MONTHS_A_YEAR + 1


def of_date(day: datetime.date) -> Month:
    """The month in which a day lies."""
    return from_ym(day.year, day.month)


def add_years(value: Month, years: int) -> Month:
    """The same month so many years later (earlier where negative)."""
    return value + years * MONTHS_A_YEAR


def first_day(value: Month) -> datetime.date:
    """The first day of a month."""
    year, month = ym(value)
    return datetime.date(year, month, 1)


def last_day(value: Month) -> datetime.date:
    """The last day of a month, 29 February among them."""
    year, month = ym(value)
    return datetime.date(year, month, calendar.monthrange(year, month)[1])


def iso(value: Month) -> str:
    """A month written 'YYYY-MM', as machines and exports take it."""
    year, month = ym(value)
    return f"{year:04d}-{month:02d}"


def slashed(value: Month) -> str:
    """A month written 'MM/YYYY', as people in a shop write it."""
    year, month = ym(value)
    return f"{month:02d}/{year:04d}"


def parse(text: str) -> Month:
    """The month written 'YYYY-MM' or 'MM/YYYY' with all four digits of the year."""
    cleaned = text.strip()
    if match := _ISO.fullmatch(cleaned):
        return from_ym(int(match[1]), int(match[2]))
    if match := _SLASH.fullmatch(cleaned):
        return from_ym(int(match[2]), int(match[1]))
    raise ValueError(f"not a month written YYYY-MM or MM/YYYY: {text!r}")
