"""How much may go into a bottle by its water capacity. No temperature comes into it.

>>> filling_limit_g(6_800, "0.68", US_WATER)
4614

A filling density or ratio is a mass of nitrous over a mass of water that would fill the
bottle. Each rule set defines that water for itself; the two differ by 0.1 %.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction

from shop.physics.errors import OutOfRange
from shop.physics.unit_table import IN3_ML, LB_G


@dataclass(frozen=True, slots=True)
class WaterDefinition:
    """What a rule set means by the mass of water that a bottle holds."""

    code: str
    g_per_ml: Fraction
    citation: str


# 27.737 in³ is a pound of water at 60 °F weighed in air, against brass; from memory.
US_WATER = WaterDefinition(
    "us",
    LB_G / (Fraction("27.737") * IN3_ML),
    "49 CFR 173.304a(a)(2), note 1: water at 60 °F, one pound of it being 27.737 cubic inches",
)
# P200 names the temperature only; the density is the physical one.
P200_WATER = WaterDefinition(
    "p200",
    Fraction("0.9991"),
    "ADR 4.1.4.1, P200: mass of water at 15 °C that would fill the receptacle (0.9991 kg/L)",
)


def filling_limit_g(capacity_ml: int, ratio: Fraction | str, water: WaterDefinition) -> int:
    """Give the most nitrous that a bottle may hold by its water capacity.

    Parameters
    ----------
    capacity_ml : int [mL]
        Water capacity.
    ratio : Fraction or str [-]
        Filling ratio or density as a fraction of one: ``"0.68"`` for 68 %.
    water : WaterDefinition [-]
        The rule set's own.

    Returns
    -------
    int [g]
        Rounded down to the gram.

    Assumptions
    -----------
    The capacity is that of the bottle as it is used, its dip tube in place.

    Valid for
    ---------
    Ratios above zero, up to one.

    Raises
    ------
    OutOfRange
        ``capacity`` or ``ratio``.

    References
    ----------
    49 CFR 173.304a(a)(2), table and note 1; ADR 4.1.4.1, P200, table 2.
    """
    return math.floor(_positive(capacity_ml) * water.g_per_ml * _ratio(ratio))


def inferred_capacity_ml(charge_g: int, ratio: Fraction | str, water: WaterDefinition) -> int:
    """Infer the water capacity from the charge on a label.

    Parameters
    ----------
    charge_g : int [g]
        The labelled charge (a "10 lb" bottle).
    ratio : Fraction or str [-]
        Filling ratio that the label was made for.
    water : WaterDefinition [-]
        The rule set's own.

    Returns
    -------
    int [mL]
        Such that `filling_limit_g` gives the labelled charge again, to the gram.

    Assumptions
    -----------
    The label states the most that the rule allows. Nobody measured this figure: show
    that it was inferred.

    Valid for
    ---------
    Ratios above zero, up to one.

    Raises
    ------
    OutOfRange
        ``charge`` or ``ratio``.

    References
    ----------
    As `filling_limit_g`, turned round.
    """
    if charge_g <= 0:
        raise OutOfRange("charge", "The labelled charge must be above zero. Check the label.")
    # Up: a whole millilitre more than needed is worth less than a gram, so the limit
    # rounds down to the very charge.
    return math.ceil(charge_g / (water.g_per_ml * _ratio(ratio)))


def capacity_of_water_ml(water_g: int, water: WaterDefinition) -> int:
    """Give the water capacity from a stamped mass of water.

    Parameters
    ----------
    water_g : int [g]
        Stamped as so many pounds or kilograms of water.
    water : WaterDefinition [-]
        The rule set's own.

    Returns
    -------
    int [mL]
        Rounded down.

    Assumptions
    -----------
    The stamp uses the rule set's definition.

    Valid for
    ---------
    Above zero.

    Raises
    ------
    OutOfRange
        ``capacity``.

    References
    ----------
    As `filling_limit_g`.
    """
    return math.floor(_positive(water_g) / water.g_per_ml)


def percent_of_limit(net_g: int, limit_g: int) -> int:
    """Give the contents as whole percent of the limit.

    Parameters
    ----------
    net_g : int [g]
        Contents; below zero (within a scale's ±) counts as nothing.
    limit_g : int [g]
        The limit.

    Returns
    -------
    int [%]
        Down when at or below the limit, up when above: 100 means exactly full, and one
        gram too many is never called 100.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    A limit above zero.

    Raises
    ------
    OutOfRange
        ``limit``.

    References
    ----------
    None: arithmetic.
    """
    if limit_g <= 0:
        raise OutOfRange("limit", "This bottle has no fill limit. Complete its record first.")
    percent = Fraction(100 * max(0, net_g), limit_g)
    return math.ceil(percent) if net_g > limit_g else math.floor(percent)


def _positive(capacity: int) -> int:
    if capacity <= 0:
        raise OutOfRange("capacity", "The water capacity must be above zero. Check the bottle.")
    return capacity


def _ratio(ratio: Fraction | str) -> Fraction:
    if isinstance(ratio, float):
        raise TypeError("a filling ratio is given exactly, as text or a fraction")
    exact = Fraction(ratio)
    if not 0 < exact <= 1:
        raise OutOfRange("ratio", "The filling ratio must lie above 0 and not above 1. Check it.")
    return exact
