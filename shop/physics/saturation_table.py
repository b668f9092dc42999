"""Saturated nitrous oxide read from a table, for balances that ask for it again and again.

Cubic pieces between knots even in ``s = (1 - T/Tc)^(1/3)``, in which the coexistence curve
is smooth; the table is made once a process, at its first use. A bottle in two phases holds the
energy ``M a(T) + V k(T)``, with ``q = T dp/dT``, ``k = q - p`` and ``a = h_liquid - q v_liquid``:
both are in the table, so that such a bottle settles without asking the equation of state.
"""

from __future__ import annotations

import threading

import numpy as np
from numpy.typing import NDArray

from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.states import T_CRITICAL

KNOTS = 640
TC = T_CRITICAL + 2.5e-7  # K, a hair above, so that s never meets nothing
Side = tuple[float, float, float, float, float]  # pressure, densities, enthalpies: liquid before vapour
_Array = NDArray[np.float64]
# Slopes of sixth order: in the middle, and at the first three knots of an end.
_ENDS = np.array(
    [
        [-147.0, 360.0, -450.0, 400.0, -225.0, 72.0, -10.0],
        [-10.0, -77.0, 150.0, -100.0, 50.0, -15.0, 2.0],
        [2.0, -24.0, -35.0, 80.0, -30.0, 8.0, -1.0],
    ]
) / 60.0  # fmt: skip


class SaturationTable:
    """Saturated states by s, and the knots that they were taken from."""

    __slots__ = ("_energies", "_first", "_per", "_sides", "a", "k", "q", "s", "s_cold", "s_hot", "sides", "step")

    def __init__(self) -> None:
        """Ask the equation of state at every knot."""
        self.s = np.linspace(to_s(T_SATURATION_MAX), to_s(T_TRIPLE), KNOTS)
        self.step = float(self.s[1] - self.s[0])
        self._first, self._per = float(self.s[0]), 1.0 / self.step
        self.s_hot, self.s_cold = self._first, float(self.s[-1])
        fluid = engine()
        self.sides = np.array([fluid.saturation(to_t(float(s))) for s in self.s]).T
        p, rho_l, rho_v, h_l, h_v = self.sides
        self.q = (h_v - h_l) / (1.0 / rho_v - 1.0 / rho_l)
        self.a, self.k = h_l - self.q / rho_l, self.q - p
        self._sides = _pieces(*(cubics(y, slopes(y, self.step), self.step) for y in self.sides))
        self._energies = _pieces(*(cubics(y, slopes(y, self.step), self.step) for y in (self.a, self.k)))

    def side(self, s: float) -> Side:
        """Pressure, densities and enthalpies (liquid, vapour) at s, which isn't checked."""
        place = (s - self._first) * self._per
        index = int(place)
        if index > KNOTS - 2:
            index = KNOTS - 2
        x = place - index
        (
            p0, p1, p2, p3, l0, l1, l2, l3, v0, v1, v2, v3, f0, f1, f2, f3, g0, g1, g2, g3,
        ) = self._sides[index]  # fmt: skip
        return (
            p0 + x * (p1 + x * (p2 + x * p3)),
            l0 + x * (l1 + x * (l2 + x * l3)),
            v0 + x * (v1 + x * (v2 + x * v3)),
            f0 + x * (f1 + x * (f2 + x * f3)),
            g0 + x * (g1 + x * (g2 + x * g3)),
        )

    def settled(self, volume: float, wall: float, mass: float, energy: float, s: float) -> float | None:
        """s at which two phases and a wall hold an energy, from a guess; None where this table has none."""
        rows, first, per, cold = self._energies, self._first, self._per, self.s_cold
        wall *= TC
        for _ in range(8):
            place = (s - first) * per
            index = int(place)
            if index > KNOTS - 2:
                index = KNOTS - 2
            x = place - index
            a0, a1, a2, a3, k0, k1, k2, k3 = rows[index]
            gap = (
                mass * (a0 + x * (a1 + x * (a2 + x * a3)))
                + volume * (k0 + x * (k1 + x * (k2 + x * k3)))
                + wall * (1.0 - s * s * s)
                - energy
            )
            slope = (
                mass * (a1 + x * (2.0 * a2 + 3.0 * x * a3)) + volume * (k1 + x * (2.0 * k2 + 3.0 * x * k3))
            ) * per - 3.0 * wall * s * s
            if not slope < 0.0:
                return None
            step = gap / slope
            s -= step
            if not first < s < cold:
                return None
            if -2e-6 < step < 2e-6:  # the next step would be about its square
                return s
        return None


def saturated(temperature: float) -> Side:
    """Pressure, densities and enthalpies of saturated nitrous, by the table.

    Parameters
    ----------
    temperature : float, temperature, not checked [K]

    Returns
    -------
    tuple of float, pressure [Pa], densities of liquid and vapour [kg/m3], their enthalpies
    [J/kg]

    Assumptions
    -----------
    Cubic pieces between 640 knots.

    Valid for
    ---------
    182.33 K to 309.5206 K, to 1e-8 of each figure.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    return saturation_table().side(to_s(temperature))


def saturation_table() -> SaturationTable:
    """Hand out the table, made at the first call.

    Parameters
    ----------
    none

    Returns
    -------
    SaturationTable, one for the process [-]

    Assumptions
    -----------
    Read only once made, so that threads may share it.

    Valid for
    ---------
    182.33 K to 309.5206 K.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not _made:
        with _lock:
            if not _made:
                _made.append(SaturationTable())
    return _made[0]


def to_s(temperature: float) -> float:
    """Turn temperature into the table's variable.

    Parameters
    ----------
    temperature : float, temperature [K]

    Returns
    -------
    float, (1 - T/Tc)^(1/3) [-]

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Below the critical temperature.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    The power is that of the coexistence curve's width: Guggenheim, J. Chem. Phys. 13
    (1945) 253.
    """
    return float((1.0 - temperature / TC) ** (1.0 / 3.0))


def to_t(s: float) -> float:
    """Turn the table's variable into temperature.

    Parameters
    ----------
    s : float, (1 - T/Tc)^(1/3) [-]

    Returns
    -------
    float, temperature, inside the range of saturation [K]

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any s that is not below nothing.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    See `to_s`.
    """
    return min(max(TC * (1.0 - s * s * s), T_TRIPLE), T_SATURATION_MAX)


def slopes(y: _Array, step: float) -> _Array:
    """Slope of a function at even knots.

    Parameters
    ----------
    y : array, the function at its knots, seven or more [-]
    step : float, the knots' distance [-]

    Returns
    -------
    array, its slope there [-]

    Assumptions
    -----------
    Differences of sixth order, one-sided at the ends.

    Valid for
    ---------
    Smooth functions.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Finite differences, any text on numerical methods.
    """
    slope = np.empty_like(y)
    slope[3:-3] = ((y[6:] - y[:-6]) - 9.0 * (y[5:-1] - y[1:-5]) + 45.0 * (y[4:-2] - y[2:-4])) / 60.0
    slope[:3] = _ENDS @ y[:7]
    slope[-3:] = -(_ENDS @ y[:-8:-1])[::-1]
    return slope / step


def cubics(y: _Array, slope: _Array, step: float) -> _Array:
    """Coefficients of the cubic piece after each knot, by the share of the way to the next one.

    Parameters
    ----------
    y : array, a function at even knots [-]
    slope : array, its slope there [-]
    step : float, the knots' distance [-]

    Returns
    -------
    array, four rows: constant, linear, square and cubic part [-]

    Assumptions
    -----------
    Hermite: value and slope are met at both ends of a piece.

    Valid for
    ---------
    Any function.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Hermite interpolation, any text on numerical methods.
    """
    rise, left, right = y[1:] - y[:-1], step * slope[:-1], step * slope[1:]
    return np.array([y[:-1], left, 3.0 * rise - 2.0 * left - right, left + right - 2.0 * rise])


def _pieces(*functions: _Array) -> list[tuple[float, ...]]:
    """One tuple a piece: plain floats, which Python reads faster than arrays."""
    return [tuple(row) for row in np.concatenate(functions).T.tolist()]


_lock = threading.Lock()
_made: list[SaturationTable] = []
