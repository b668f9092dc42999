"""What a weighing says: the net, its ±, what it proves, and the reading to stop at.

Whole grams throughout. A ± is rounded up, a limit down: never to the side that hurts.
"""

from __future__ import annotations

import math

from shop.physics.errors import Contradiction, OutOfRange
from shop.physics.formatting import MassStyle, grams_not_above

# Water or frost held to stay on a wet bottle, as a layer (common practice, no source).
WET_LAYER_MM = 0.5


def net(gross_g: int, tare_g: int, uncertainty_g: int = 0) -> int:
    """Give the contents of a bottle from what the scale says.

    Parameters
    ----------
    gross_g : int [g]
        The scale's reading with everything of the tare list fitted.
    tare_g : int [g]
        The tare in force when it was weighed.
    uncertainty_g : int [g]
        The ± of the net: by so much an empty bottle may read below its tare.

    Returns
    -------
    int [g]
        Gross less tare, to the gram; slightly negative only within the ±.

    Assumptions
    -----------
    The tare list names what is on the bottle now. Buoyancy of the air is left out, as
    all weighings are made in the same air: less than 0.02 % of the contents.

    Valid for
    ---------
    Any bottle on one scale.

    Raises
    ------
    Contradiction
        ``tare_above_gross``: the bottle would hold less than nothing.

    References
    ----------
    49 CFR 173.304a(c): contents are checked by the use of an accurate scale.
    """
    if gross_g + uncertainty_g < tare_g:
        raise Contradiction(
            "tare_above_gross",
            "The bottle weighs less than its tare. Read the scale again, and check that what the"
            " tare list names is on the bottle.",
        )
    return gross_g - tare_g


def net_uncertainty(scale_g: int, tare_g: int) -> int:
    """Give the ± of a net, from that of the scale and that of the tare.

    Parameters
    ----------
    scale_g : int [g]
        ± of the scale at this weighing.
    tare_g : int [g]
        ± of the tare.

    Returns
    -------
    int [g]
        Root of the sum of squares, rounded up to the gram.

    Assumptions
    -----------
    The two errors are independent of each other.

    Valid for
    ---------
    Zero and above.

    Raises
    ------
    OutOfRange
        ``uncertainty``: a ± below zero.

    References
    ----------
    JCGM 100:2008 (GUM), 5.1.2, equation 10: combined uncertainty of uncorrelated inputs.
    """
    if scale_g < 0 or tare_g < 0:
        raise OutOfRange("uncertainty", "A ± can't be below zero. Check the scale's figures.")
    # In whole numbers, for a root of floats may fall just short of the next gram.
    squares = scale_g * scale_g + tare_g * tare_g
    root = math.isqrt(squares)
    return root if root * root == squares else root + 1


def difference(first_g: int, first_pm_g: int, second_g: int, second_pm_g: int) -> tuple[int, int]:
    """Give what came in between two weighings, with its ±.

    Parameters
    ----------
    first_g : int [g]
        The earlier net.
    first_pm_g : int [g]
        Its ±.
    second_g : int [g]
        The later net.
    second_pm_g : int [g]
        Its ±.

    Returns
    -------
    tuple of int and int [g]
        Second less first (negative: it went out), and the ± of that, rounded up.

    Assumptions
    -----------
    The two errors are independent. On one scale with one tare part of them cancels, so
    the ± is then rather too wide than too narrow.

    Valid for
    ---------
    Two nets of one bottle.

    Raises
    ------
    OutOfRange
        ``uncertainty``: a ± below zero.

    References
    ----------
    JCGM 100:2008 (GUM), 5.1.2, equation 10.
    """
    return second_g - first_g, net_uncertainty(first_pm_g, second_pm_g)


def wet_allowance(capacity_ml: int) -> int:
    """Estimate what water or frost on a bottle can weigh.

    Parameters
    ----------
    capacity_ml : int [mL]
        Water capacity.

    Returns
    -------
    int [g]
        By so much a wet weighing may be too heavy, rounded up.

    Assumptions
    -----------
    A cylinder four times as long as wide, all of it under half a millimetre of water
    (common practice, no source). Thick ice weighs more: wipe it off and weigh again.

    Valid for
    ---------
    Bottles of 0.3 to 150 L; an order of magnitude, not a measurement.

    Raises
    ------
    OutOfRange
        ``capacity``: not above zero.

    References
    ----------
    None: geometry, and the layer above.
    """
    if capacity_ml <= 0:
        raise OutOfRange("capacity", "The water capacity must be above zero. Check the bottle.")
    # Volume π d³ (length 4 d); side 4 π d² and two ends π d² / 4 each. In cm, cm² and g.
    diameter = math.cbrt(capacity_ml / math.pi)
    return math.ceil(4.5 * math.pi * diameter * diameter * WET_LAYER_MM / 10)


def wet_uncertainty(uncertainty_g: int, allowance_g: int) -> int:
    """Widen the ± of a net that was weighed wet or frosted.

    Parameters
    ----------
    uncertainty_g : int [g]
        ± of the net if it were dry.
    allowance_g : int [g]
        What the water or ice can weigh, from `wet_allowance`.

    Returns
    -------
    int [g]
        The sum of both.

    Assumptions
    -----------
    Ice only ever adds, so it isn't random and isn't added in squares. The net stays as
    read: it is then the most that can be inside.

    Valid for
    ---------
    Zero and above.

    Raises
    ------
    OutOfRange
        ``uncertainty``: a figure below zero.

    References
    ----------
    JCGM 100:2008 (GUM), F.2.4.5: a known effect left uncorrected is added (from memory).
    """
    if uncertainty_g < 0 or allowance_g < 0:
        raise OutOfRange("uncertainty", "A ± can't be below zero. Check the scale's figures.")
    return uncertainty_g + allowance_g


def proves_full(net_g: int, uncertainty_g: int, full_g: int, *, wet: bool) -> bool:
    """Tell whether a weighing proves that a bottle holds what counts as full.

    Parameters
    ----------
    net_g : int [g]
        The net as read.
    uncertainty_g : int [g]
        Its ±.
    full_g : int [g]
        From here on it counts as full: the shop's good-enough fill.
    wet : bool [-]
        Whether the bottle was wet or frosted.

    Returns
    -------
    bool [-]
        False for every wet weighing: part of the grams may be ice.

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Says nothing about too much: that is net above limit, and there a wet weighing does
    speak, for ice makes it read high.

    Raises
    ------
    Nothing
        Always answers.

    References
    ----------
    None: the shop's rule (common practice, no source).
    """
    return not wet and net_g - uncertainty_g >= full_g


def stop_reading(
    tare_g: int,
    target_g: int,
    *,
    scale_pm_g: int,
    resolution_g: int,
    style: MassStyle = "kg",
    hose_pull_g: int = 0,
) -> int:
    """Give the scale reading at which to close the valve.

    Parameters
    ----------
    tare_g : int [g]
        Tare of the bottle as fitted now.
    target_g : int [g]
        What it shall hold at most.
    scale_pm_g : int [g]
        ± of the scale, taken off so that the true weight can't pass the target.
    resolution_g : int [g]
        The scale's resolution.
    style : str [-]
        The scale's way of writing (``shop.physics.formatting``).
    hose_pull_g : int [g]
        Reading with the line connected less reading without it, at the same contents.
        Positive: the hose bears down and the scale reads too much, so the reading to
        stop at is higher by it. Negative: the hose lifts.

    Returns
    -------
    int [g]
        Tare + target − ± + pull, then down to what the scale can show. Write it with
        ``reading_not_above``.

    Assumptions
    -----------
    The pull stays as it was measured: the hose isn't moved while nitrous goes over.

    Valid for
    ---------
    A bottle that stands on the scale while it is filled. It is weighed again after the
    line is off, and that weighing counts.

    Raises
    ------
    Contradiction
        ``no_room``: nothing is left of the target once the scale's ± is off it.
    OutOfRange
        ``uncertainty``: a ± below zero.

    References
    ----------
    49 CFR 173.304a(c): checked on a scale after disconnecting from the filling line.
    """
    if scale_pm_g < 0:
        raise OutOfRange("uncertainty", "A ± can't be below zero. Check the scale's figures.")
    stop = grams_not_above(max(0, tare_g + target_g - scale_pm_g + hose_pull_g), style, resolution_g)
    if stop - hose_pull_g <= tare_g:
        raise Contradiction(
            "no_room",
            "This scale is too coarse for this fill: its ± is as much as the fill itself. Use a finer scale.",
        )
    return stop
