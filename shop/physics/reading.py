"""Takes apart what a person typed: a number, and the word written behind it.

Knows nothing of conversions (see units.py). Whatever can't be read for certain is
refused with a code of its own rather than guessed: a wrong guess here is a wrong fill.
"""

from __future__ import annotations

import re
from decimal import Decimal

from shop.physics.errors import QuantityError

# Longest entry looked at. The longest honest one ("1000.25 lb 12.75 oz", with spaces)
# is far shorter; a pasted file is refused before any of it is read.
LONGEST = 64

_SIGNS = dict.fromkeys(map(ord, "\u2212\u2010\u2011\u2012\u2013\u2014\ufe63\uff0d"), "-")
_SPACES = dict.fromkeys(map(ord, "\u00a0\u2007\u2009\u200a\u202f\u2002\u2003\t"), " ")
_TRANSLATE = {**_SIGNS, **_SPACES}

_HEAD = re.compile(r"([+-]?) *([0-9.,]*[0-9][0-9.,]*) *(.*)", re.DOTALL)
_EXPONENT = re.compile(r"(e *[+-]?[0-9]|[x×*] *10 *\^|\^)", re.IGNORECASE)
_NOT_FINITE = re.compile(r"[+-]? *(nan|inf|infinity|∞)\b", re.IGNORECASE)
_PLAIN = re.compile(r"[0-9]+(\.[0-9]*)?|\.[0-9]+")
_POUNDS_OUNCES = re.compile(
    r"([+-]?) *([0-9.,]+) *(?:-|(?:lbs?|pounds?|#)\.? *) *([0-9.,]+)"
    r" *(?:(?:oz|ozs|ounces?)\.?)?",
    re.IGNORECASE,
)


def cleaned(text: str) -> str:
    """Give the text with one kind of minus and space, or refuse it.

    Parameters
    ----------
    text : str [-]
        As typed.

    Returns
    -------
    str [-]
        Stripped; every sort of minus and dash is "-", every sort of space is " ".

    Assumptions
    -----------
    None beyond the two tables of characters above.

    Valid for
    ---------
    Any text.

    Raises
    ------
    QuantityError
        ``too_long`` or ``empty``.

    References
    ----------
    The Unicode Standard, general categories Pd (dashes) and Zs (spaces).
    """
    if len(text) > LONGEST:
        raise QuantityError(
            "too_long",
            f"That is longer than {LONGEST} characters. Write one number and its unit.",
        )
    plain = text.translate(_TRANSLATE).strip()
    if not plain:
        raise QuantityError("empty", "Nothing was written. Write a number and its unit.")
    return plain


def number_and_word(plain: str) -> tuple[Decimal, str]:
    """Split a cleaned entry into its number and the word behind it.

    Parameters
    ----------
    plain : str [-]
        From `cleaned`.

    Returns
    -------
    tuple of Decimal and str [-]
        The number exactly as written, with its sign; the word, possibly empty.

    Assumptions
    -----------
    A point is a decimal point. A comma is a decimal comma unless exactly three digits
    follow it, for then it might separate thousands.

    Valid for
    ---------
    Plain decimal notation; no powers of ten.

    Raises
    ------
    QuantityError
        ``not_a_number``, ``not_finite``, ``exponent``, ``ambiguous_comma`` or ``grouped``.

    References
    ----------
    NIST SP 811 (2008), section 10.5.2 and 10.5.3: decimal marker; no comma as separator.
    """
    head = _HEAD.fullmatch(plain)
    if head is None:
        if _NOT_FINITE.match(plain):
            raise QuantityError("not_finite", "That is no finite number. Write what the scale or gauge shows.")
        raise QuantityError("not_a_number", f"“{plain}” doesn't begin with a number. Write a number and its unit.")
    sign, digits, word = head.groups()
    if _EXPONENT.match(word):
        raise QuantityError("exponent", "Powers of ten aren't taken. Write the number out in full, with its unit.")
    value = _number(digits)
    return (-value if sign == "-" else value), word.strip()


def pounds_and_ounces(plain: str) -> tuple[Decimal, Decimal] | None:
    """Read pounds and ounces from a cleaned entry, if it is written so.

    Parameters
    ----------
    plain : str [-]
        From `cleaned`: ``24-6``, ``24 lb 6``, ``24 lb 6.5 oz``.

    Returns
    -------
    tuple of Decimal and Decimal [lb, oz], or None
        None where the entry is written in another way.

    Assumptions
    -----------
    A dash between two numbers separates pounds and ounces: the way that platform scales
    are read out (common practice, no source).

    Valid for
    ---------
    Whole pounds, ounces below sixteen.

    Raises
    ------
    QuantityError
        ``negative``, ``pounds_not_whole``, ``ounces`` and those of `number_and_word`.

    References
    ----------
    NIST Handbook 44, appendix C: 16 avoirdupois ounces are 1 pound.
    """
    match = _POUNDS_OUNCES.fullmatch(plain)
    if match is None:
        return None
    sign, first, second = match.groups()
    pounds, ounces = _number(first), _number(second)
    if sign == "-":
        raise QuantityError("negative", "A weight can't be below zero. Zero the scale and weigh again.")
    if pounds != pounds.to_integral_value():
        raise QuantityError(
            "pounds_not_whole",
            "With ounces written, the pounds must be whole. Write 12.4 lb or 12 lb 6 oz.",
        )
    if ounces >= 16:
        raise QuantityError(
            "ounces",
            "Sixteen ounces are a pound: the ounces must be below 16. Read the scale again.",
        )
    return pounds, ounces


def _number(digits: str) -> Decimal:
    commas = digits.count(",")
    if commas > 1 or (commas and "." in digits):
        raise QuantityError("grouped", f"Write {digits} without marks between the thousands, and one decimal point.")
    if commas:
        before, after = digits.split(",")
        if len(after) == 3:
            raise QuantityError(
                "ambiguous_comma",
                f"{digits} can mean {before}{after} or {before or '0'}.{after}."
                " Write it with a point, or without the comma.",
            )
        digits = f"{before}.{after}"
    if not _PLAIN.fullmatch(digits):
        raise QuantityError("not_a_number", f"“{digits}” isn't one number. Write a number and its unit.")
    return Decimal(digits)
