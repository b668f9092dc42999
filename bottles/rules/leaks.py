"""Leak watch: whether a bottle that is only stored keeps its weight.

Readings of one scale, with one tare, while nothing went in or out. The scale's constant error is in
every one of them and cancels; what is left is its step and its repeatability. A straight line by
least squares gives the grams a week, Student's t how sure that is.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from statistics import NormalDist
from typing import Literal

Verdict = Literal["leaks", "grew", "steady"]

# One bottle in forty that keeps its weight may be raised by noise alone, and no more.
BY_CHANCE = 0.025

# How well a scale's noise is known from its plate: to a quarter, which is worth eight degrees of
# freedom (JCGM 100:2008, G.4.2, example).
PLATE_DEGREES = 8


@dataclass(frozen=True, slots=True)
class Reading:
    """A dry weighing: weeks since any fixed moment, and the net then."""

    weeks: float
    net_g: int


@dataclass(frozen=True, slots=True)
class Noise:
    """What a scale's plate says of its step and of its error, in grams."""

    step_g: int
    error_g: int

    @property
    def deviation_g(self) -> float:
        """Standard deviation of one reading about the scale's own constant error.

        Step and repeatability are rectangles. Several weighings of one load differ by no more than
        the error that is allowed for it (OIML R 76-1:2006, 3.6.1, from memory).
        """
        return max(0.5, math.sqrt((self.step_g**2 + self.error_g**2) / 12))

    @property
    def most_g(self) -> int:
        """The most by which two readings of one load may differ: the scale can't lie further."""
        return self.step_g + self.error_g


@dataclass(frozen=True, slots=True)
class Drift:
    """Grams a week over some readings, below nothing where weight is lost."""

    readings: int
    weeks: float  # from the first to the last
    rate_g: float
    low_g: float  # the interval's ends: 95 %
    high_g: float
    certainty: float  # that it isn't noise: the chance that noise alone shows less, to this side
    verdict: Verdict

    @property
    def loss_g(self) -> float:
        """Grams lost a week."""
        return -self.rate_g


@dataclass(frozen=True, slots=True)
class Lasts:
    """Weeks until nothing is left: at the fastest, the likely and the slowest loss; None: it may never end."""

    least: float
    likely: float
    most: float | None


def drift_of(readings: Sequence[Reading], noise: Noise, *, looks: int = 1) -> Drift | None:
    """Return the drift of readings of one scale; None where they are fewer than two, or of one moment.

    It's raised where it's beyond noise and the readings differ by more than the scale can lie. Where
    a bottle is looked at on several scales, `looks` keeps all of them together to the chance of one.
    """
    found = _line(readings, noise)
    if found is None:
        return None
    slope, error, degrees = found.slope, found.error, found.degrees
    certainty = student(abs(slope) / error, degrees)
    nets = [reading.net_g for reading in readings]
    raised = certainty > 1 - BY_CHANCE / looks and max(nets) - min(nets) > noise.most_g
    wide = student_reaches(1 - BY_CHANCE, degrees) * error
    return Drift(
        readings=len(readings), weeks=found.last - found.first, rate_g=slope, low_g=slope - wide, high_g=slope + wide,
        certainty=certainty, verdict=("leaks" if slope < 0 else "grew") if raised else "steady",
    )  # fmt: skip


def weeks_to_show(leak_g: float, noise: Noise, readings: Sequence[Reading] = ()) -> float:
    """Return after how many weeks a leak of so many grams a week shows, nearly always (39 of 40).

    Without readings: between two weighings. With them: from the first of them to one more weighing,
    for a leak that was there from the first on.
    """
    if leak_g <= 0:
        raise ValueError("a leak loses something")
    times = [reading.weeks for reading in readings] or [0.0]
    count, first = len(times), min(times)
    middle = math.fsum(times) / count
    spread = math.fsum((time - middle) ** 2 for time in times)
    line = _line(readings, noise)
    deviation = line.deviation if line else noise.deviation_g
    degrees = line.degrees + 1 if line else PLATE_DEGREES
    reach = student_reaches(1 - BY_CHANCE, degrees)
    needed = (2 * reach * deviation / leak_g) ** 2 - spread  # that one more weighing must add to the spread of times
    by_noise = middle + math.sqrt(needed * (count + 1) / count) if needed > 0 else max(times)
    # A scale counts in steps: more than it can lie begins half a step further on.
    by_scale = first + (noise.most_g + noise.step_g / 2 + reach * math.sqrt(2) * deviation) / leak_g
    return max(by_noise, by_scale, max(times)) - first


def lasts(net_g: int, drift: Drift) -> Lasts | None:
    """Return how long the contents last at a drift's loss; None where nothing is lost or nothing is in it."""
    if drift.rate_g >= 0 or net_g <= 0:
        return None
    slowest = -drift.high_g
    return Lasts(net_g / -drift.low_g, net_g / -drift.rate_g, net_g / slowest if slowest > 0 else None)


def certainty_words(certainty: float) -> str:
    """Return a certainty in a word and in percent, never rounded up to it."""
    if certainty >= 0.999:
        return "almost certain (99.9 % or more)"
    word = "very likely" if certainty >= 0.99 else "likely" if certainty >= 1 - BY_CHANCE else "not told apart from noise"
    return f"{word} ({math.floor(certainty * 1000) / 10:g} %)"


@dataclass(frozen=True, slots=True)
class _Line:
    """A straight line through readings."""

    slope: float
    error: float  # standard error of the slope
    deviation: float  # of one reading
    degrees: int
    first: float
    last: float


def _line(readings: Sequence[Reading], noise: Noise) -> _Line | None:
    """Least squares; every reading is of one scale, so they weigh alike.

    Their scatter counts pooled with the plate's by degrees of freedom, and never as less than the
    plate says: a handful can agree by luck. Where they scatter more than a true plate lets them, the
    plate is wrong, or something was left on the bottle: then their scatter counts alone.
    """
    times = sorted(reading.weeks for reading in readings)
    if len(times) < 2 or times[-1] == times[0]:
        return None
    count = len(readings)
    middle = math.fsum(times) / count
    level = math.fsum(reading.net_g for reading in readings) / count
    spread = math.fsum((time - middle) ** 2 for time in times)
    slope = math.fsum((reading.weeks - middle) * (reading.net_g - level) for reading in readings) / spread
    left = math.fsum((reading.net_g - level - slope * (reading.weeks - middle)) ** 2 for reading in readings)
    plate, own = noise.deviation_g**2, count - 2
    degrees = PLATE_DEGREES + own
    variance = max(plate, (PLATE_DEGREES * plate + left) / degrees)
    if own and left > plate * _scatters(own):
        variance, degrees = left / own, own
    return _Line(slope, math.sqrt(variance / spread), math.sqrt(variance), degrees, times[0], times[-1])


def _scatters(degrees: int) -> float:
    """The sum of squares that a true plate is below 39 times of 40: chi-square by Wilson and Hilferty
    (Abramowitz and Stegun 26.4.17)."""
    share = 2 / (9 * degrees)
    return degrees * (1 - share + NormalDist().inv_cdf(1 - BY_CHANCE) * math.sqrt(share)) ** 3


def student(t: float, degrees: int) -> float:
    """Return the chance that Student's t stays below a value (Abramowitz and Stegun 26.7.3 and 26.7.4)."""
    angle = math.atan(t / math.sqrt(degrees))
    cosine = math.cos(angle)
    odd = degrees % 2
    term = cosine if odd else 1.0
    total = term if degrees > 1 else 0.0
    for at in range(3 if odd else 2, degrees - 1, 2):
        term *= cosine * cosine * (at - 1) / at
        total += term
    within = (2 / math.pi) * (angle + math.sin(angle) * total) if odd else math.sin(angle) * total
    return 0.5 + within / 2


@lru_cache(maxsize=1024)
def student_reaches(chance: float, degrees: int) -> float:
    """Return the value below which Student's t stays with a chance of one half or more."""
    low, high = 0.0, 1000.0
    while high - low > 1e-9 * (1 + low):
        middle = (low + high) / 2
        low, high = (middle, high) if student(middle, degrees) < chance else (low, middle)
    return high
