"""Stored whole numbers as people read them: rounded to a step, with a unit and a ±.

>>> format_pressure(6_651_344, "psi", 101_325)
'950 psi'
>>> format_temperature(261_150, "°C", plus_minus_mk=1_500)
'−12 ±2 °C'

What can be typed again without loss is `shop.physics.units.in_own_unit`; here a figure
is shown no finer than it is known. A minus is the true one (−), which can be typed back.
Weights have a module of their own, weights.py; its functions can be had from here too.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from shop.physics.decimals import joined, written
from shop.physics.unit_table import UNITS
from shop.physics.units import value_in
from shop.physics.weights import MassStyle, format_mass, grams_not_above, reading_not_above

__all__ = [
    "MassStyle",
    "UnitSystem",
    "format_length",
    "format_mass",
    "format_pressure",
    "format_temperature",
    "format_volume",
    "grams_not_above",
    "reading_not_above",
    "unit_system",
]

# Shown where no gauge says how fine (common practice, no source).
_USUAL_STEP: dict[str, Fraction] = {
    unit: Fraction(step)
    for unit, step in {
        "psi": "1", "psia": "1", "bar": "0.1", "bara": "0.1",
        "kPa": "10", "kPa abs": "10", "MPa": "0.01", "MPa abs": "0.01",
        "°C": "1", "°F": "1", "K": "1",
        "mL": "1", "L": "0.01", "cm3": "1", "in3": "1", "gal": "0.01",
        "µm": "1", "mm": "0.01", "cm": "0.1", "m": "0.01", "in": "0.001", "ft": "0.1", "thou": "1",
    }.items()
}  # fmt: skip
_SHOWN = {"in3": "in³", "cm3": "cm³"}


@dataclass(frozen=True, slots=True)
class UnitSystem:
    """The units that a person chose to read in, one for each kind of quantity."""

    name: Literal["us", "metric"]
    mass: MassStyle
    pressure: str
    temperature: str
    volume: str
    bore: str
    length: str


def unit_system(name: str, *, ounces: bool = False) -> UnitSystem:
    """Give the units that belong to a person's choice.

    Parameters
    ----------
    name : str [-]
        ``us`` or ``metric``.
    ounces : bool [-]
        Weights of the US system as pounds and ounces instead of decimal pounds.

    Returns
    -------
    UnitSystem [-]
        Names of units, as the functions of this module take them.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    The two names.

    Raises
    ------
    ValueError
        Another name.

    References
    ----------
    None: what US and other shops read their scales and gauges in (common practice).
    """
    if name == "us":
        return UnitSystem("us", "lb oz" if ounces else "lb", "psi", "°F", "in3", "in", "ft")
    if name == "metric":
        return UnitSystem("metric", "kg", "bar", "°C", "L", "mm", "m")
    raise ValueError(f"no such system of units: {name}")


def format_pressure(
    pa_abs: int,
    unit: str,
    ambient_pa: float,
    *,
    step: str | None = None,
    plus_minus_pa: int | None = None,
) -> str:
    """Write a pressure; as a gauge shows it unless the unit is an absolute one.

    Parameters
    ----------
    pa_abs : int [Pa]
        Absolute pressure.
    unit : str [-]
        ``psi``, ``bar``, ``kPa``, ``MPa`` (gauge), ``psia``, ``bara``, ``kPa abs``, ``MPa abs``.
    ambient_pa : float [Pa]
        Pressure of the air around the gauge, absolute.
    step : str or None [the unit]
        Round to this, as a decimal; None for the usual one.
    plus_minus_pa : int or None [Pa]
        Its ±, which is rounded up.

    Returns
    -------
    str [-]
        Rounded to the nearest step, half to even.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any whole number.

    Raises
    ------
    ValueError
        An unknown unit or step.

    References
    ----------
    NIST SP 811 (2008), section 7.4: gauge pressure is told by its context.
    """
    return _with_unit(value_in(pa_abs, unit, ambient_pa=ambient_pa), unit, step, plus_minus_pa)


def format_temperature(
    millikelvin: int, unit: str, *, step: str | None = None, plus_minus_mk: int | None = None
) -> str:
    """Write a temperature.

    Parameters
    ----------
    millikelvin : int [mK]
        Thermodynamic temperature.
    unit : str [-]
        ``°C``, ``°F`` or ``K``.
    step : str or None [the unit]
        Round to this, as a decimal; None for whole degrees.
    plus_minus_mk : int or None [mK]
        Its ±, which is rounded up.

    Returns
    -------
    str [-]
        Rounded to the nearest step, half to even.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any whole number.

    Raises
    ------
    ValueError
        An unknown unit or step.

    References
    ----------
    NIST SP 811 (2008), section 7.2: a space between number and °C.
    """
    return _with_unit(value_in(millikelvin, unit), unit, step, plus_minus_mk)


def format_volume(millilitres: int, unit: str, *, step: str | None = None, plus_minus_ml: int | None = None) -> str:
    """Write a volume.

    Parameters
    ----------
    millilitres : int [mL]
        The volume.
    unit : str [-]
        ``L``, ``mL``, ``cm3``, ``in3`` or ``gal``.
    step : str or None [the unit]
        Round to this, as a decimal; None for the usual one.
    plus_minus_ml : int or None [mL]
        Its ±, which is rounded up.

    Returns
    -------
    str [-]
        Rounded to the nearest step, half to even.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any whole number.

    Raises
    ------
    ValueError
        An unknown unit or step.

    References
    ----------
    NIST SP 811 (2008), section 7.2.
    """
    return _with_unit(value_in(millilitres, unit), unit, step, plus_minus_ml)


def format_length(micrometres: int, unit: str, *, step: str | None = None, plus_minus_um: int | None = None) -> str:
    """Write a length; decimal inches below one without their leading zero (.036 in).

    Parameters
    ----------
    micrometres : int [µm]
        The length.
    unit : str [-]
        ``µm``, ``mm``, ``cm``, ``m``, ``in``, ``ft`` or ``thou``.
    step : str or None [the unit]
        Round to this, as a decimal; None for the usual one.
    plus_minus_um : int or None [µm]
        Its ±, which is rounded up.

    Returns
    -------
    str [-]
        Rounded to the nearest step, half to even.

    Assumptions
    -----------
    Bores in inches are written .036 (common practice, no source).

    Valid for
    ---------
    Any whole number.

    Raises
    ------
    ValueError
        An unknown unit or step.

    References
    ----------
    NIST SP 811 (2008), section 7.2.
    """
    return _with_unit(value_in(micrometres, unit), unit, step, plus_minus_um)


def _with_unit(value: Fraction, unit: str, step: str | None, plus_minus: int | None) -> str:
    by = _USUAL_STEP[unit] if step is None else Fraction(step)
    if by <= 0:
        raise ValueError("a step must be above zero")
    text = written(round(value / by) * by, by)
    spread = None
    if plus_minus is not None:
        spread = written(math.ceil(plus_minus / UNITS[unit].factor / by) * by, by)
    if unit == "in":
        text, spread = _bare(text), None if spread is None else _bare(spread)
    return joined(text, spread, _SHOWN.get(unit, unit))


def _bare(text: str) -> str:
    return text.replace("0.", ".", 1) if text.lstrip("−").startswith("0.") else text
