"""How well a tare is known: no finer than its figures were written.

>>> error_of("6.42 kg", 6420, "kg")
10
>>> error_of("14.2 lb", 6441, "lb")
46
>>> together([30, 40])
50

A tare is a figure that somebody once read or stamped. Nobody knows its error, so each
figure counts as uncertain by one step of its last digit written, and by ten grams at
least (common practice, no source). A scale behind it says more, and may say worse.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from fractions import Fraction

LEAST_G = 10
_GRAMS = {"g": Fraction(1), "kg": Fraction(1000), "lb": Fraction(45359237, 100000)}
_GRAMS["oz"] = _GRAMS["lb oz"] = _GRAMS["lb"] / 16
_DECIMALS = re.compile(r"\d*[.,](\d+)")


def error_of(typed: str, grams: int, unit: str, *, scale_g: int = 0) -> int:
    """The ± of one figure, in grams, rounded up.

    ``typed`` is the figure as it was written and ``unit`` what it was understood in; a
    weight of nothing has no error. ``scale_g`` is the error of the scale that it was
    weighed on, 0 where none is known.
    """
    if grams == 0:
        return 0
    step = _GRAMS[unit]
    # In pounds and ounces the last digit is of the ounces, else of the only number.
    decimals = _DECIMALS.findall(typed)
    if decimals:
        step /= 10 ** len(decimals[-1])
    elif unit in ("lb", "kg"):
        # "14 lb" without decimals is rarely meant to the pound: a tenth (common practice).
        step /= 10
    return max(LEAST_G, scale_g, math.ceil(step))


def together(errors: Iterable[int]) -> int:
    """The ± of a sum of figures that don't depend on each other, rounded up."""
    squares = sum(error * error for error in errors)
    root = math.isqrt(squares)
    return root if root * root == squares else root + 1
