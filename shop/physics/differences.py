"""Differences of temperatures: a degree more is a step on the scale, not a place on it.

>>> parse_temperature_difference("2 °F", default_unit="°C").stored
1111
"""

from __future__ import annotations

from fractions import Fraction

from shop.physics import reading
from shop.physics.errors import QuantityError
from shop.physics.unit_table import NAMES, UNITS
from shop.physics.units import Entry, parse_temperature

_WIDEST_MK = 250_000  # the whole of what can be meant, from −100 to 150 °C


def parse_temperature_difference(text: str, *, default_unit: str) -> Entry:
    """Understand a tolerance or a change of temperature as a person writes it.

    Parameters
    ----------
    text : str [-]
        ``1 K``, ``1 °C``, ``2 F``.
    default_unit : str [-]
        Meant where none is written: °C, °F or K.

    Returns
    -------
    Entry [mK]
        Thousandths of a kelvin, rounded once, half to even.

    Assumptions
    -----------
    A kelvin and a degree Celsius are the same step.

    Valid for
    ---------
    0 to 250 K.

    Raises
    ------
    QuantityError
        As `parse_mass` of units.py (without the two about ounces).

    References
    ----------
    NIST SP 811 (2008), appendix B.8: an interval of 1 °F is 1/1.8 K.
    """
    number, word = reading.number_and_word(reading.cleaned(text))
    if NAMES.get(word.lower().strip(" .") or default_unit.lower()) == "K":
        unit = "K"
    else:
        # Zero of either other scale is a temperature that can be meant, so that only the unit can be refused.
        unit = parse_temperature(f"0 {word}", default_unit=default_unit).unit
    if number < 0:
        raise QuantityError("negative", "A difference of temperatures can't be below zero. Check the sign.")
    stored = round(Fraction(number) * UNITS[unit].factor)
    if stored > _WIDEST_MK:
        raise QuantityError("too_large", "A difference of temperatures lies between 0 and 250 K. Check the figure.")
    return Entry(stored, text, unit)
