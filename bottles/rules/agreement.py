"""How well forecasts agree with the scale: bias, spread and how many fell inside, each with its interval.

All intervals are for 19 in 20.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

_Z = 1.959964  # normal bell, 97.5 % below
_LEAST = 3  # refills before a spread has an interval worth writing


@dataclass(frozen=True, slots=True)
class Compared:
    """One refill: what came less what was likely; whether it fell inside its band."""

    off_g: float
    inside: bool


@dataclass(frozen=True, slots=True)
class Agreement:
    """Of a group of refills: mean and spread of what came less what was likely, share inside."""

    count: int
    bias_g: float
    bias_error_g: float | None  # None: one refill has no spread
    spread_g: float | None
    spread_low_g: float | None
    spread_high_g: float | None
    inside: int
    inside_low: float  # share of refills to come
    inside_high: float


def agreement(rows: Sequence[Compared]) -> Agreement | None:
    """Sum up a group of refills; None where it is empty."""
    count = len(rows)
    if not count:
        return None
    bias = math.fsum(row.off_g for row in rows) / count
    inside = sum(row.inside for row in rows)
    low, high = share_interval(inside, count)
    if count == 1:
        return Agreement(1, bias, None, None, None, None, inside, low, high)
    free = count - 1
    spread = math.sqrt(math.fsum((row.off_g - bias) ** 2 for row in rows) / free)
    error = student(free) * spread / math.sqrt(count)
    lowest = highest = None
    if count > _LEAST:
        lowest = spread * math.sqrt(free / _chi_square(free, _Z))
        highest = spread * math.sqrt(free / _chi_square(free, -_Z))
    return Agreement(count, bias, error, spread, lowest, highest, inside, low, high)


def share_interval(inside: int, count: int) -> tuple[float, float]:
    """Return the interval of a share by Wilson's score: J. Amer. Stat. Assoc. 22 (1927) 209."""
    share, square = inside / count, _Z * _Z
    middle = (share + square / (2 * count)) / (1 + square / count)
    reach = _Z / (1 + square / count) * math.sqrt(share * (1 - share) / count + square / (4 * count * count))
    return max(0.0, middle - reach), min(1.0, middle + reach)


def student(free: int) -> float:
    """Return Student's t that 97.5 % lie below: exact for one and two degrees of freedom, else by series.

    Abramowitz and Stegun, Handbook of Mathematical Functions (1964), 26.7.5.
    """
    if free == 1:
        return math.tan(0.475 * math.pi)
    if free == 2:
        return 0.95 * math.sqrt(2 / (1 - 0.95 * 0.95))
    z = _Z
    terms = (
        (z**3 + z) / 4,
        (5 * z**5 + 16 * z**3 + 3 * z) / 96,
        (3 * z**7 + 19 * z**5 + 17 * z**3 - 15 * z) / 384,
        (79 * z**9 + 776 * z**7 + 1482 * z**5 - 1920 * z**3 - 945 * z) / 92_160,
    )
    return z + math.fsum(term / float(free) ** power for power, term in enumerate(terms, start=1))


def _chi_square(free: int, z: float) -> float:
    """The chi-square below which a share lies: Wilson and Hilferty, Proc. Nat. Acad. Sci. 17 (1931) 684."""
    part = 2 / (9 * free)
    return free * (1 - part + z * math.sqrt(part)) ** 3
