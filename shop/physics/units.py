"""The only conversions: from what people write to the whole numbers that are stored.

>>> parse_mass("24-6", default_unit="kg")
Entry(stored=11056, typed='24-6', unit='lb oz')
>>> parse_pressure("950 psi", default_unit="bar", ambient_pa=101325)
Entry(stored=6651344, typed='950 psi', unit='psi')
>>> in_own_unit(11056, "lb oz")
'24 lb 6 oz'

Stored are grams, pascal absolute, millikelvin, millilitres and micrometres. Factors are
exact; an entry is rounded once, half to even. Pressure is gauge unless it says absolute.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from shop.physics import reading
from shop.physics.atmosphere import ambient_pressure
from shop.physics.errors import QuantityError
from shop.physics.unit_table import LIMITS, NAMES, UNITS, WORDS, Unit

__all__ = [
    "Entry",
    "ambient_pressure",
    "in_own_unit",
    "parse_length",
    "parse_mass",
    "parse_pressure",
    "parse_temperature",
    "parse_volume",
    "value_in",
]
_LIKE = str.maketrans("³²º", "32°")  # told apart by no one who types them


@dataclass(frozen=True, slots=True)
class Entry:
    """What was understood (``stored``, a whole number) beside what was ``typed``.

    ``unit`` names the unit that was understood.
    """

    stored: int
    typed: str
    unit: str


def parse_mass(text: str, *, default_unit: str) -> Entry:
    """Understand a weight as a person writes it.

    Parameters
    ----------
    text : str [-]
        ``12.4 lb``, ``5.62 kg``, ``850 g``, ``12 lb 6 oz``, ``24 lb 6``, ``24-6``.
    default_unit : str [-]
        Meant where none is written: g, kg, lb, oz or lb oz (a bare number is then pounds).

    Returns
    -------
    Entry [g]
        Grams, rounded once, half to even.

    Assumptions
    -----------
    Two numbers with a dash between them are pounds and ounces, whatever the default.

    Valid for
    ---------
    0 to 1,000 kg.

    Raises
    ------
    QuantityError
        Its code says what is wrong: too_long, empty, not_a_number, not_finite, exponent,
        ambiguous_comma, grouped, more_than_one, unknown_unit, other_kind, negative,
        too_large, ounces, pounds_not_whole.

    References
    ----------
    NIST SP 811 (2008), appendix B.8: pound (avoirdupois) 0.453 592 37 kg, exact.
    """
    plain = reading.cleaned(text)
    both = reading.pounds_and_ounces(plain)
    if both is not None:
        pounds, ounces = both
        stored = round((16 * Fraction(pounds) + Fraction(ounces)) * UNITS["lb oz"].factor)
        return Entry(_within("mass", stored), text, "lb oz")
    return _parse(text, plain, "mass", "lb" if default_unit == "lb oz" else default_unit)


def parse_pressure(text: str, *, default_unit: str, ambient_pa: float) -> Entry:
    """Understand a pressure as a person reads it off a gauge.

    Parameters
    ----------
    text : str [-]
        ``950 psi``, ``65.5 bar``, ``6.5 MPa``; ``965 psia``, ``66.5 bara``, ``66.5 bar abs``.
    default_unit : str [-]
        Meant where none is written.
    ambient_pa : float [Pa]
        Pressure of the air around the gauge, absolute.

    Returns
    -------
    Entry [Pa]
        Pascal absolute, rounded once, half to even.

    Assumptions
    -----------
    A pressure is gauge unless its unit says that it is absolute.

    Valid for
    ---------
    0 to 1,000 bar absolute.

    Raises
    ------
    QuantityError
        As `parse_mass` (without the two about ounces).

    References
    ----------
    NIST SP 811 (2008), appendix B.8: psi from the pound, the inch and standard gravity.
    """
    return _parse(text, reading.cleaned(text), "pressure", default_unit, ambient_pa)


def parse_temperature(text: str, *, default_unit: str) -> Entry:
    """Understand a temperature as a person writes it.

    Parameters
    ----------
    text : str [-]
        ``68F``, ``20 °C``, ``-12 C``, ``293.15 K``.
    default_unit : str [-]
        Meant where none is written: °C, °F or K.

    Returns
    -------
    Entry [mK]
        Millikelvin, rounded once, half to even.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    −100 to 150 °C.

    Raises
    ------
    QuantityError
        As `parse_mass`, with too_cold and too_hot in place of negative and too_large.

    References
    ----------
    NIST SP 811 (2008), appendix B.8: T/K = (t/°F + 459.67)/1.8; t/°C + 273.15.
    """
    return _parse(text, reading.cleaned(text), "temperature", default_unit)


def parse_volume(text: str, *, default_unit: str) -> Entry:
    """Understand a volume as a person writes it.

    Parameters
    ----------
    text : str [-]
        ``6.8 L``, ``6800 mL``, ``6800 cc``, ``415 in3``, ``1.8 gal`` (US gallon).
    default_unit : str [-]
        Meant where none is written: mL, L, cm3, in3 or gal.

    Returns
    -------
    Entry [mL]
        Millilitres, rounded once, half to even.

    Assumptions
    -----------
    A gallon is the US gallon.

    Valid for
    ---------
    0 to 1,000 L.

    Raises
    ------
    QuantityError
        As `parse_mass` (without the two about ounces).

    References
    ----------
    NIST SP 811 (2008), appendix B.8: cubic inch 1.638 706 4 E−05 m3; gallon (US) 231 in3.
    """
    return _parse(text, reading.cleaned(text), "volume", default_unit)


def parse_length(text: str, *, default_unit: str, below_zero: bool = False) -> Entry:
    """Understand a length, a bore or a height as a person writes it.

    Parameters
    ----------
    text : str [-]
        ``.036 in``, ``36 thou``, ``0.91 mm``, ``4 ft``, ``1.2 m``.
    default_unit : str [-]
        Meant where none is written: µm, mm, cm, m, in, ft or thou.
    below_zero : bool [-]
        Whether a negative length is taken: a shop may lie below the sea.

    Returns
    -------
    Entry [µm]
        Micrometres, rounded once, half to even.

    Assumptions
    -----------
    The foot is the international one, 0.3048 m.

    Valid for
    ---------
    0 (or −10 km) to 10 km.

    Raises
    ------
    QuantityError
        As `parse_mass` (without the two about ounces).

    References
    ----------
    NIST SP 811 (2008), appendix B.8: inch 2.54 E−02 m, foot 3.048 E−01 m, exact.
    """
    return _parse(text, reading.cleaned(text), "length", default_unit, below_zero=below_zero)


def value_in(stored: int, unit: str, *, ambient_pa: float | None = None) -> Fraction:
    """Convert a stored whole number to a unit, exactly.

    Parameters
    ----------
    stored : int [g, Pa, mK, mL or µm]
        The stored number; which of them follows from the unit.
    unit : str [-]
        A unit of this module; for ``lb oz`` the answer is in ounces.
    ambient_pa : float or None [Pa]
        Pressure of the air around, absolute; needed for gauge units only.

    Returns
    -------
    Fraction [the unit asked for]
        Exact.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any stored number.

    Raises
    ------
    ValueError
        The unit doesn't exist, or is a gauge unit and the air's pressure wasn't given.

    References
    ----------
    NIST SP 811 (2008), appendix B.8.
    """
    return (stored - _zero(_unit(unit), unit, ambient_pa)) / UNITS[unit].factor


def in_own_unit(stored: int, unit: str, *, ambient_pa: float | None = None) -> str:
    """Write a stored number so that typing it again stores the same number.

    Parameters
    ----------
    stored : int [g, Pa, mK, mL or µm]
        The stored number.
    unit : str [-]
        The unit that it was understood in (``Entry.unit``).
    ambient_pa : float or None [Pa]
        Pressure of the air around, absolute; needed for gauge units only.

    Returns
    -------
    str [-]
        With as few decimals as will do, and its unit.

    Assumptions
    -----------
    The air's pressure is that with which the entry was understood.

    Valid for
    ---------
    Any number that an entry stored.

    Raises
    ------
    ValueError
        As `value_in`.

    References
    ----------
    None: the property is tested for every unit.
    """
    found = _unit(unit)
    zero = _zero(found, unit, ambient_pa)
    exact = (stored - zero) / found.factor
    for decimals in range(found.decimals + 1):
        scaled = round(exact * 10**decimals)
        if round(Fraction(scaled, 10**decimals) * found.factor + zero) == stored:
            break
    if unit == "lb oz":
        pounds, rest = divmod(scaled, 16 * 10**decimals)
        return f"{pounds} lb {_decimal(rest, decimals)} oz"
    return f"{_decimal(scaled, decimals)} {unit}"


def _parse(
    text: str,
    plain: str,
    kind: str,
    default_unit: str,
    ambient_pa: float | None = None,
    below_zero: bool = False,
) -> Entry:
    if _unit(default_unit).kind != kind:
        raise ValueError(f"{default_unit} is no unit of {kind}")
    number, word = reading.number_and_word(plain)
    unit = _named(word, kind) or default_unit
    if number < 0 and kind != "temperature" and not below_zero:
        raise QuantityError("negative", f"A {WORDS[kind]} can't be below zero. Read it again and check the sign.")
    found = UNITS[unit]
    stored = round(Fraction(number) * found.factor + _zero(found, unit, ambient_pa))
    return Entry(_within(kind, stored, below_zero=below_zero), text, unit)


def _named(word: str, kind: str) -> str | None:
    squeezed = re.sub(r"[ .]", "", word.lower()).translate(_LIKE)
    if kind == "temperature":
        squeezed = squeezed.removeprefix("°") if squeezed[1:] in ("f", "c") else squeezed
        if squeezed in ("°", "deg", "degrees"):
            return None
    if not squeezed:
        return None
    name = NAMES.get(squeezed)
    if name is not None and UNITS[name].kind == kind:
        return name
    known = ", ".join(each for each, unit in UNITS.items() if unit.kind == kind)
    if name is not None:
        raise QuantityError("other_kind", f"{name} is no unit of {WORDS[kind]}. Write one of {known}.")
    if re.search(r"[0-9]", word) and not re.search(r"[^\W\d_]", word[:1]):
        raise QuantityError("more_than_one", f"“{word}” follows the first number. Write one number and its unit.")
    raise QuantityError("unknown_unit", f"“{word}” isn't a unit known for a {WORDS[kind]}. Write one of {known}.")


def _within(kind: str, stored: int, *, below_zero: bool = False) -> int:
    low, high, between = LIMITS[kind]
    if stored < (-high if below_zero else low):
        code = "too_cold" if kind == "temperature" else "negative"
    elif stored > high:
        code = "too_hot" if kind == "temperature" else "too_large"
    else:
        return stored
    raise QuantityError(code, f"A {WORDS[kind]} must lie between {between}. Check the figure and its unit.")


def _unit(name: str) -> Unit:
    if name not in UNITS:
        raise ValueError(f"no such unit: {name}")
    return UNITS[name]


def _zero(unit: Unit, name: str, ambient_pa: float | None) -> Fraction:
    if not unit.gauge:
        return unit.zero
    if ambient_pa is None:
        raise ValueError(f"{name} is a gauge unit: the pressure of the air is needed")
    return Fraction(ambient_pa)


def _decimal(scaled: int, decimals: int) -> str:
    if decimals == 0:
        return str(scaled)
    whole, part = divmod(abs(scaled), 10**decimals)
    return f"{'-' if scaled < 0 else ''}{whole}.{part:0{decimals}d}"
