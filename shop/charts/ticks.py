"""Where an axis is divided, and how a number on it is written."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date

_DAYS = (1, 2, 7, 14)
_MONTHS = (1, 2, 3, 6, 12, 24, 60, 120, 240, 600)
_MONTH_DAYS = 30.44


@dataclass(frozen=True)
class Scale:
    """The ends of an axis, and its divisions with their labels."""

    low: float
    high: float
    ticks: tuple[tuple[float, str], ...]

    def part(self, value: float) -> float:
        """How far along the axis a value lies: 0 at its low end, 1 at its high end."""
        return (value - self.low) / (self.high - self.low)


def number_scale(low: float, high: float, count: int, *, keep_low: bool = False, keep_high: bool = False) -> Scale:
    """Divide an axis of numbers in steps of 1, 2 or 5; ends move out to a step unless kept."""
    if low == high:
        spread = abs(low) * 0.1 or 1.0
        low = low if keep_low else low - spread
        high = high if keep_high else high + spread
        if low == high:
            high = low + spread
    step = _nice((high - low) / max(1, count))
    # The small part of a step keeps 0.30000000000000004 from opening another one.
    first = math.floor(low / step + 1e-9)
    last = math.ceil(high / step - 1e-9)
    if keep_low:
        first = math.ceil(low / step - 1e-9)
    if keep_high:
        last = math.floor(high / step + 1e-9)
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    ticks = tuple((index * step, write_number(index * step, decimals)) for index in range(first, last + 1))
    return Scale(low if keep_low else first * step, high if keep_high else last * step, ticks)


def day_scale(low: float, high: float, count: int) -> Scale:
    """Divide an axis of days at days, weeks or firsts of months, labelled by ISO 8601."""
    last = date.max.toordinal()
    low, high = min(max(low, 1), last - 1), min(max(high, 1), last)
    if low == high:
        low, high = max(low - 1, 1), high + 1
    wanted = (high - low) / max(1, count)
    for days in _DAYS:
        if days >= wanted:
            first = math.ceil(low / days) * days
            values = range(first, math.floor(high) + 1, days)
            return Scale(low, high, tuple((each, write_day(each)) for each in values))
    months = next((each for each in _MONTHS if each * _MONTH_DAYS >= wanted), _MONTHS[-1])
    begun = date.fromordinal(math.floor(low))
    month = math.ceil((begun.year * 12 + begun.month - 1) / months) * months
    ticks: list[tuple[float, str]] = []
    while month // 12 <= date.max.year:
        first_day = date(month // 12, month % 12 + 1, 1)
        if first_day.toordinal() > high:
            break
        if first_day.toordinal() >= low:
            ticks.append((first_day.toordinal(), f"{first_day:%Y-%m}"))
        month += months
    return Scale(low, high, tuple(ticks))


def write_number(value: float, decimals: int) -> str:
    """Write a number with a true minus, and without a minus where it rounds to zero."""
    text = f"{abs(value):.{decimals}f}"
    return f"−{text}" if value < 0 and float(text) != 0 else text


def write_day(value: float) -> str:
    """Write a day by ISO 8601."""
    return date.fromordinal(math.floor(value)).isoformat()


def decimals_for(low: float, high: float) -> int:
    """Give the decimals that tell places apart which an eye can tell apart on a chart."""
    if low == high:
        return 2
    return max(0, min(9, math.ceil(-math.log10((high - low) / 150))))


def _nice(step: float) -> float:
    power = 10.0 ** math.floor(math.log10(step))
    for digit in (1, 2, 5):
        if step <= digit * power * (1 + 1e-9):
            return digit * power
    return 10 * power
