"""A fraction written as a decimal, and joined with its ± and its unit."""

from __future__ import annotations

from fractions import Fraction


def written(value: Fraction, step: Fraction) -> str:
    """Write a multiple of a decimal step with as many decimals as the step has.

    Parameters
    ----------
    value : Fraction [any unit]
        A whole multiple of the step.
    step : Fraction [the same unit]
        What it was rounded to.

    Returns
    -------
    str [-]
        With the true minus (−) where it is negative.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Steps of at most twelve decimals.

    Raises
    ------
    ValueError
        The step is no such decimal, or isn't above zero.

    References
    ----------
    NIST SP 811 (2008), section 10.5: decimal point, zero before it.
    """
    if step <= 0:
        raise ValueError("a step must be above zero")
    decimals = 0
    while (step * 10**decimals).denominator != 1:
        decimals += 1
        if decimals > 12:
            raise ValueError("a step must be a decimal")
    scaled = int(abs(value) * 10**decimals)
    sign = "−" if value < 0 else ""
    if not decimals:
        return f"{sign}{scaled}"
    whole, part = divmod(scaled, 10**decimals)
    return f"{sign}{whole}.{part:0{decimals}d}"


def joined(text: str, spread: str | None, unit: str) -> str:
    """Join a written number with its ± and its unit.

    Parameters
    ----------
    text : str [-]
        The number.
    spread : str or None [-]
        Its ±, written.
    unit : str [-]
        The unit.

    Returns
    -------
    str [-]
        ``11.06 ±0.05 kg``.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any text.

    Raises
    ------
    Nothing
        Always answers.

    References
    ----------
    NIST SP 811 (2008), section 7.2: a space between number and unit.
    """
    return f"{text} {unit}" if spread is None else f"{text} ±{spread} {unit}"
