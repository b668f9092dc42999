"""Roots in a bracket, without any library.

Everything that the physics looks for is bracketed by what a bottle can do, so a
method that never leaves its bracket always ends: no guess, no divergence.
"""

from __future__ import annotations

from collections.abc import Callable

from shop.physics.errors import NoSolution

MAX_STEPS = 200


def find_root(
    function: Callable[[float], float],
    low: float,
    high: float,
    *,
    tolerance: float,
    at_low: float | None = None,
    at_high: float | None = None,
    first: float | None = None,
) -> float:
    """Find where a continuous function changes sign, by Chandrupatla's method.

    Parameters
    ----------
    function : callable, what should become nothing [-]
    low, high : float, the bracket [-]
    tolerance : float, half of the width at which the search ends [-]
    at_low, at_high : float or None, the function there where it's known already [-]
    first : float or None, a likely place to look at first; the middle without [-]

    Returns
    -------
    float, the root [-]

    Assumptions
    -----------
    Continuous; one sign change in the bracket (of several, one is found).

    Valid for
    ---------
    Any finite bracket.

    Raises
    ------
    NoSolution
        `no_sign_change` where both ends have one sign.

    References
    ----------
    Chandrupatla, T. R., Advances in Engineering Software 28 (1997) 145-149.
    """
    x1, f1 = high, function(high) if at_high is None else at_high
    x2, f2 = low, function(low) if at_low is None else at_low
    if f1 == 0.0:
        return x1
    if f2 == 0.0:
        return x2
    if not (f1 < 0.0) != (f2 < 0.0) or f1 != f1 or f2 != f2:
        raise NoSolution("no_sign_change")
    portion = 0.5
    if first is not None and min(x1, x2) < first < max(x1, x2):
        portion = (first - x1) / (x2 - x1)
    for _ in range(MAX_STEPS):
        x = x1 + portion * (x2 - x1)
        f = function(x)
        if (f < 0.0) == (f1 < 0.0):
            x3, f3 = x1, f1
        else:
            x3, f3 = x2, f2
            x2, f2 = x1, f1
        x1, f1 = x, f
        best = x1 if abs(f1) < abs(f2) else x2
        width = abs(x2 - x1)
        if f1 == 0.0 or width <= 2.0 * tolerance or width <= 4e-16 * abs(best):
            return best
        # Inverse quadratic steps only where the three points say they are safe.
        xi = (x1 - x2) / (x3 - x2)
        phi = (f1 - f2) / (f3 - f2)
        if phi * phi < xi and (1.0 - phi) ** 2 < 1.0 - xi:
            portion = f1 / (f2 - f1) * f3 / (f2 - f3) + (x3 - x1) / (x2 - x1) * f1 / (f3 - f1) * f2 / (f3 - f2)
        else:
            portion = 0.5
        edge = tolerance / width
        portion = min(max(portion, edge), 1.0 - edge)
    return 0.5 * (x1 + x2)


def first_true(predicate: Callable[[float], bool], low: float, high: float, *, tolerance: float) -> float:
    """Find where a predicate turns true, by halving: right on plateaus too.

    Parameters
    ----------
    predicate : callable, false at `low`, true at `high`, turning once [-]
    low, high : float, the bracket [-]
    tolerance : float, width at which the search ends [-]

    Returns
    -------
    float, the last place known where it's true [-]

    Assumptions
    -----------
    It turns once; two pressures that lie on a plateau together are a question of
    yes or no, for which a difference of zero would mislead a root finder.

    Valid for
    ---------
    Any finite bracket.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Bisection: any text on numerical methods.
    """
    for _ in range(MAX_STEPS):
        if high - low <= tolerance:
            break
        middle = 0.5 * (low + high)
        if predicate(middle):
            high = middle
        else:
            low = middle
    return high
