"""How the text of an option is understood: quantities as on the screens, but never without a unit.

A page knows which unit its reader means by a bare number; whoever reads a script doesn't, so
that a bare number other than nothing is refused.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from decimal import Decimal

from shop.base.errors import Refusal
from shop.physics import reading, units
from shop.physics.differences import parse_temperature_difference
from shop.physics.fluid import ATMOSPHERE

Reader = Callable[[str], float | str]

_WALLS = {"aluminium": "aluminium", "aluminum": "aluminium", "steel": "steel"}


class OptionRefused(Refusal):
    """This option can't be taken. Run the command with --help for its options."""

    code = "option"


def mass(text: str) -> float:
    """A weight in kilograms: `19.72kg`, `43.5lb`, `24 lb 6 oz`."""
    _need_unit(text, "kg, g, lb, oz or lb oz", nothing=True)
    return units.parse_mass(text, default_unit="kg").stored / 1e3


def volume(text: str) -> float:
    """A volume in cubic metres: `29L`, `50mL`, `415in3`."""
    _need_unit(text, "L, mL, cc, in3 or gal", nothing=True)
    return units.parse_volume(text, default_unit="L").stored / 1e6


def pressure(text: str) -> float:
    """A pressure in pascal absolute, at sea level: `49.5bar` and `720psi` are gauge, `62bara` isn't."""
    _need_unit(text, "bar or psi for a gauge reading, bara or psia for an absolute pressure")
    return float(units.parse_pressure(text, default_unit="bar", ambient_pa=ATMOSPHERE).stored)


def temperature(text: str) -> float:
    """A temperature in kelvin: `20C`, `-10 °C`, `68F`, `293.15K`."""
    _need_unit(text, "C, F or K")
    return units.parse_temperature(text, default_unit="°C").stored / 1e3


def pressure_difference(text: str) -> float:
    """A tolerance in pascal: `2.07bar`, `30psi`."""
    _need_unit(text, "bar or psi", nothing=True)
    return float(units.parse_pressure(text, default_unit="bar", ambient_pa=0.0).stored)


def temperature_difference(text: str) -> float:
    """A tolerance in kelvin: `1K`, `1C`, `2F`."""
    _need_unit(text, "K, C or F", nothing=True)
    return parse_temperature_difference(text, default_unit="K").stored / 1e3


def number(most: float, *words: str) -> Reader:
    """Make a reader of a plain number from nothing to `most`, with or without one of the words behind it."""

    def read(text: str) -> float:
        value, word = reading.number_and_word(reading.cleaned(text))
        if word.lower().replace(" ", "") not in ("", *words):
            raise OptionRefused(f"“{text}” isn't a plain number. Write it with a decimal point and without a unit.")
        if not 0 <= value <= Decimal(most):
            raise OptionRefused(f"The number must lie between 0 and {most:g}.", code="out_of_range")
        return float(value)

    return read


def word_of(meanings: Mapping[str, str]) -> Reader:
    """Make a reader of one of some words, in either case."""

    def read(text: str) -> str:
        meant = meanings.get(reading.cleaned(text).lower())
        if meant is None:
            raise OptionRefused(f"“{text}” isn't one of {', '.join(meanings)}.", code="unknown_word")
        return meant

    return read


wall = word_of(_WALLS)


def _need_unit(text: str, known: str, *, nothing: bool = False) -> None:
    """Refuse a bare number, unless it's nothing, which is the same in every unit."""
    value, word = reading.number_and_word(reading.cleaned(text))
    if word.lower().strip(" .°º") in ("", "deg", "degrees") and not (nothing and value == 0):
        raise OptionRefused(f"“{text}” has no unit. Write one of {known}.", code="no_unit")
