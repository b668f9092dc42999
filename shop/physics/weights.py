"""Weights as scales write them, no finer than they read; and the reading to stop at.

>>> format_mass(11060, "kg", resolution_g=10, plus_minus_g=50)
'11.06 ±0.05 kg'
>>> format_mass(11056, "lb oz")
'24 lb 6 oz'
>>> reading_not_above(11056, "kg", 50)
'11.05 kg'
"""

from __future__ import annotations

import math
from fractions import Fraction
from typing import Literal

from shop.physics.decimals import joined, written
from shop.physics.unit_table import UNITS
from shop.physics.units import value_in

MassStyle = Literal["g", "kg", "lb", "oz", "lb oz", "lb-oz"]

# Steps that scales count in. Ounces above one are halves of a pound, halved again.
_DECIMAL_STEPS = [Fraction(digit) * Fraction(10) ** power for power in range(-4, 4) for digit in (1, 2, 5)]
_OUNCE_STEPS = [*map(Fraction, ("1/10", "1/5", "1/2")), *map(Fraction, (1, 2, 4, 8, 16))]

# Shown where no scale says how fine (common practice, no source).
_USUAL_STEP: dict[str, Fraction] = {
    "g": Fraction(1),
    "kg": Fraction(1, 100),
    "lb": Fraction(1, 10),
    "oz": Fraction(1),
    "lb oz": Fraction(1),
    "lb-oz": Fraction(1),
}


def format_mass(
    grams: int,
    style: MassStyle,
    resolution_g: int | None = None,
    *,
    plus_minus_g: int | None = None,
) -> str:
    """Write a weight, no finer than the scale that it comes from.

    Parameters
    ----------
    grams : int [g]
        The weight; may be negative (a difference).
    style : str [-]
        ``g``, ``kg``, ``lb``, ``oz``, ``lb oz`` (24 lb 6 oz) or ``lb-oz`` (24-6).
    resolution_g : int or None [g]
        The scale's resolution; None where no scale is behind the figure.
    plus_minus_g : int or None [g]
        Its ±, which is rounded up.

    Returns
    -------
    str [-]
        Rounded to the nearest step, half to even.

    Assumptions
    -----------
    A resolution was itself rounded to the gram (0.1 lb is kept as 45 g).

    Valid for
    ---------
    Any whole number.

    Raises
    ------
    ValueError
        An unknown style or a resolution that isn't above zero.

    References
    ----------
    NIST Handbook 44, section 2.20, S.1.2: scales count in 1, 2 or 5 × 10^k (from memory).
    """
    unit = _mass_unit(style)
    step = _mass_step(style, resolution_g)
    count = round(value_in(grams, unit) / step)
    spread = None
    if plus_minus_g is not None:
        spread = written(math.ceil(value_in(plus_minus_g, unit) / step) * step, step)
    return _mass_text(count * step, step, style, spread)


def grams_not_above(grams: int, style: MassStyle, resolution_g: int) -> int:
    """Give the highest reading that the scale can show without passing a weight.

    Parameters
    ----------
    grams : int [g]
        The weight not to pass; not negative.
    style : str [-]
        As in `format_mass`: the way this scale writes.
    resolution_g : int [g]
        The scale's resolution.

    Returns
    -------
    int [g]
        Never above `grams`; giving it to this function again returns it unchanged.

    Assumptions
    -----------
    As `format_mass`.

    Valid for
    ---------
    Zero and above.

    Raises
    ------
    ValueError
        As `format_mass`.

    References
    ----------
    None: arithmetic.
    """
    unit = _mass_unit(style)
    reading = _floor(grams, unit, _mass_step(style, resolution_g))
    # A reading in pounds is no whole number of grams. Its next whole gram up is still
    # not above the limit (which is whole), and floors to the same reading.
    return math.ceil(reading * UNITS[unit].factor)


def reading_not_above(grams: int, style: MassStyle, resolution_g: int) -> str:
    """Write the highest reading that the scale can show without passing a weight.

    Parameters
    ----------
    grams : int [g]
        The weight not to pass; not negative.
    style : str [-]
        As in `format_mass`: the way this scale writes.
    resolution_g : int [g]
        The scale's resolution.

    Returns
    -------
    str [-]
        As the scale shows it.

    Assumptions
    -----------
    As `format_mass`.

    Valid for
    ---------
    Zero and above.

    Raises
    ------
    ValueError
        As `format_mass`.

    References
    ----------
    None: arithmetic.
    """
    step = _mass_step(style, resolution_g)
    return _mass_text(_floor(grams, _mass_unit(style), step), step, style, None)


def _mass_unit(style: MassStyle) -> str:
    unit = "lb oz" if style == "lb-oz" else style
    if unit not in UNITS or UNITS[unit].kind != "mass":
        raise ValueError(f"no such way to write a weight: {style}")
    return unit


def _mass_step(style: MassStyle, resolution_g: int | None) -> Fraction:
    if resolution_g is None:
        return _USUAL_STEP[style]
    if resolution_g <= 0:
        raise ValueError("a scale's resolution must be above zero")
    steps = _OUNCE_STEPS if style in ("lb oz", "lb-oz") else _DECIMAL_STEPS
    factor = UNITS[_mass_unit(style)].factor
    # Rounded, since resolutions are kept in whole grams: 0.05 lb is 22.68 g, kept as 23.
    return next((each for each in steps if round(each * factor) >= resolution_g), steps[-1])


def _floor(grams: int, unit: str, step: Fraction) -> Fraction:
    if grams < 0:
        raise ValueError("a reading can't be kept below a negative weight")
    return value_in(grams, unit) // step * step


def _mass_text(value: Fraction, step: Fraction, style: MassStyle, spread: str | None) -> str:
    if style not in ("lb oz", "lb-oz"):
        return joined(written(value, step), spread, style)
    pounds, ounces = divmod(abs(value), 16)
    sign = "−" if value < 0 else ""
    if style == "lb-oz" and not sign and spread is None:
        return f"{pounds}-{written(ounces, step)}"
    both = f"{sign}{pounds} lb {written(ounces, step)} oz"
    return both if spread is None else f"{both} ±{spread} oz"
