"""The pressure of the air around a gauge, from the height of the shop above the sea."""

from __future__ import annotations

from shop.physics.errors import OutOfRange


def ambient_pressure(height_m: float) -> float:
    """Give the standard atmosphere's pressure at a height above the sea.

    Parameters
    ----------
    height_m : float [m]
        Height above mean sea level, geopotential.

    Returns
    -------
    float [Pa]
        Absolute pressure.

    Assumptions
    -----------
    The standard day: 15 °C and 101,325 Pa at sea level, 6.5 K less for each kilometre.
    Weather moves the truth by 3 % or so.

    Valid for
    ---------
    −2,000 to 11,000 m.

    Raises
    ------
    OutOfRange
        ``height``: outside these.

    References
    ----------
    ISO 2533:1975, Standard Atmosphere, section 2; U.S. Standard Atmosphere, 1976
    (NOAA-S/T 76-1562), equation 33a.
    """
    if not -2_000 <= height_m <= 11_000:
        raise OutOfRange("height", "The height above the sea must lie between −2 000 and 11 000 m. Check it.")
    # g0 M / (R* L) with the constants of the 1976 standard, whose R* is 8314.32 J/(kmol K).
    exponent = 9.80665 * 28.9644 / (8314.32 * 0.0065)
    return float(101_325.0 * (1.0 - 0.0065 * height_m / 288.15) ** exponent)
