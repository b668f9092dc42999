"""Where a full fill just ends, from as few questions as it takes: each costs a whole filling."""

from __future__ import annotations

from collections.abc import Callable

from shop.physics.roots import find_root


def edge_by_pressure(spare_pa: Callable[[float], float], full: float, short: float, fine: float) -> float:
    """Nearest to what is short that fills in the quick case, by the pressure to spare.

    Parameters
    ----------
    spare_pa : callable, pressure that drives the last gram of a full fill [Pa]
    full, short : float, a temperature or mass that fills, and one that doesn't [K or kg]
    fine : float, how near to the edge the answer is [K or kg]

    Returns
    -------
    float, temperature or mass on the side that fills [K or kg]

    Assumptions
    -----------
    It changes from full to short once.

    Valid for
    ---------
    Any bracket; where its ends aren't full and short the full end is handed back.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    See `find_root`.
    """
    at_full, at_short = spare_pa(full), spare_pa(short)
    if at_full <= 0.0 or at_short >= 0.0:
        return full
    low, high = (full, short) if full < short else (short, full)
    ends = {full: at_full, short: at_short}
    edge = find_root(spare_pa, low, high, tolerance=0.5 * fine, at_low=ends[low], at_high=ends[high])
    for _ in range(4):  # to the side that is known to fill
        if spare_pa(edge) >= 0.0:
            return edge
        edge += fine if full > short else -fine
    return full if (edge > full) == (full > short) else edge


def edge_by_mass(
    beyond: Callable[[float], float], known: list[tuple[float, float]], aim: float, fine: float
) -> float:
    """Nearest to what is short that is known to be full, by a parabola through what is known.

    Parameters
    ----------
    beyond : callable, mass that would go in beyond a full fill [kg]
    known : list of tuple of float, places with what goes in beyond there [K or kg, kg]
    aim : float, mass beyond a full fill that is aimed at, twice it being near enough [kg]
    fine : float, width of the bracket that is narrow enough [K or kg]

    Returns
    -------
    float, temperature or mass on the side that fills [K or kg]

    Assumptions
    -----------
    It changes from full to short once. What goes in is all but a parabola of a temperature,
    so that two or three questions do.

    Valid for
    ---------
    Known places of which at least one is full and one short.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Inverse quadratic interpolation, kept in a bracket: any text on numerical methods.
    """
    points = list(known)
    for step in range(24):
        full = min((point for point in points if point[1] >= 0.0), key=lambda point: point[1])
        short = max((point for point in points if point[1] < 0.0), key=lambda point: point[1])
        if full[1] <= 2.0 * aim or abs(full[0] - short[0]) <= fine:
            break
        x = _guess(points, aim)
        low, high = sorted((full[0], short[0]))
        if step > 5 or x is None or not low < x < high:
            weight = 0.5 if step % 2 else (full[1] - min(aim, 0.5 * full[1])) / (full[1] - short[1])
            x = full[0] + min(max(weight, 0.02), 0.98) * (short[0] - full[0])
        points.append((x, beyond(x)))
    return min((point for point in points if point[1] >= 0.0), key=lambda point: point[1])[0]


def _guess(points: list[tuple[float, float]], aim: float) -> float | None:
    """Where a parabola through the three nearest points, lying on its side, meets the aim."""
    three = sorted(points, key=lambda point: abs(point[1] - aim))[:3]
    x = 0.0
    for i, (x_i, f_i) in enumerate(three):
        weight = 1.0
        for j, (_, f_j) in enumerate(three):
            if i != j:
                if f_i == f_j:
                    return None
                weight *= (aim - f_j) / (f_i - f_j)
        x += weight * x_i
    return x
