"""How many full fills a supply bottle still gives, by an earlier forecast and what left it since."""

from __future__ import annotations

import math
from dataclasses import dataclass

LEEWAY = 0.1  # of a fill: so much more or less drawn is still one fill (common practice, no source)


@dataclass(frozen=True, slots=True)
class Counted:
    """What a forecast counted: full fills, from so much in the supply bottle."""

    full_fills: int
    held_g: int  # in the supply bottle then
    held_error_g: int
    each_g: int  # what one such fill takes out, the line's loss with it
    least_g: int  # with less in it there is no full fill


def fills_left(counted: Counted, holds_g: int) -> int | None:
    """Return the full fills left now; None where more is in it than then: it was filled or weighed anew.

    >>> fills_left(Counted(4, 18_000, 50, 4_300, 6_000), 13_700)
    3
    """
    if counted.each_g <= 0 or holds_g > counted.held_g + counted.held_error_g:
        return None
    if holds_g < counted.least_g:
        return 0
    drawn = max(0, counted.held_g - holds_g) / counted.each_g
    return max(0, math.floor(counted.full_fills - drawn + LEEWAY))
