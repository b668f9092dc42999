"""How a two-phase bottle cools while it gives nitrous, as functions of temperature alone.

A bottle of volume V with a wall of heat capacity C and contents M in both phases has the
energy ``M a(T) + V k(T) + C T``, linear in M, V and C, with ``q = T dp/dT``,
``k = q - p`` and ``a = h_liquid - v_liquid q``. Drawing one phase of enthalpy h takes
``dU = h dM``, so that ``dM/dT = (M a' + V k' + C) / (v q)``, v being the volume of a
kilogram of the phase drawn: linear too. Three integrals over temperature that belong to
nitrous oxide alone therefore answer for every bottle:

    M(T) = exp(L(T) - L(T0)) M0 + exp(L(T)) (V (G(T) - G(T0)) + C (H(T) - H(T0)))

They are tabulated once a process, at knots even in ``s = (1 - T/Tc)^(1/3)``, in which the
coexistence curve is smooth up to the critical point, and read by cubic Hermite pieces.
"""

from __future__ import annotations

import threading
from math import exp

import numpy as np
from numpy.typing import NDArray

from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.states import T_CRITICAL

_KNOTS = 640
_TC = T_CRITICAL + 2.5e-7  # K, a hair above, so that s never meets nothing
_Array = NDArray[np.float64]


class WithdrawalTable:
    """The three integrals for drawing saturated liquid, or saturated vapour."""

    __slots__ = ("_first", "_rows", "_step", "s_cold", "s_hot")

    def __init__(self, s: _Array, integrand: tuple[_Array, _Array, _Array]) -> None:
        """Integrate the slopes of L, V- and C-parts over the knots."""
        step = float(s[1] - s[0])
        l_slope, v_slope, c_slope = integrand
        exponent = _cumulate(l_slope, step)
        exponent -= np.interp(0.35, s, exponent)
        scale = np.exp(-exponent)
        g_slope, h_slope = v_slope * scale, c_slope * scale
        columns = (
            exponent, step * l_slope,
            _cumulate(g_slope, step), step * g_slope,
            _cumulate(h_slope, step), step * h_slope,
        )  # fmt: skip
        self._rows = [tuple(map(float, row)) for row in zip(*columns, strict=True)]
        self._step = step
        self._first = float(s[0])
        self.s_hot, self.s_cold = float(s[0]), float(s[-1])

    def integrals(self, s: float) -> tuple[float, float, float, float, float, float]:
        """L, G, H and their slopes in s."""
        step = self._step
        place = (s - self._first) / step
        index = int(place)
        if index < 0:
            index = 0
        elif index > _KNOTS - 2:
            index = _KNOTS - 2
        x = place - index
        l0, dl0, g0, dg0, h0, dh0 = self._rows[index]
        l1, dl1, g1, dg1, h1, dh1 = self._rows[index + 1]
        xx = x * x
        right = xx * (3.0 - 2.0 * x)
        first, last = x * (1.0 - x) ** 2, xx * (x - 1.0)
        slope = 6.0 * x * (1.0 - x)
        slope_first, slope_last = 1.0 - 4.0 * x + 3.0 * xx, 3.0 * xx - 2.0 * x
        return (
            l0 + right * (l1 - l0) + first * dl0 + last * dl1,
            g0 + right * (g1 - g0) + first * dg0 + last * dg1,
            h0 + right * (h1 - h0) + first * dh0 + last * dh1,
            (slope * (l1 - l0) + slope_first * dl0 + slope_last * dl1) / step,
            (slope * (g1 - g0) + slope_first * dg0 + slope_last * dg1) / step,
            (slope * (h1 - h0) + slope_first * dh0 + slope_last * dh1) / step,
        )


class Drain:
    """One bottle giving one saturated phase: mass left against temperature, both ways."""

    __slots__ = ("_c", "_g0", "_h0", "_m0", "_near", "_s0", "_table", "_v")

    def __init__(self, table: WithdrawalTable, volume: float, wall: float, mass: float, temperature: float) -> None:
        """Fix the start."""
        self._table = table
        self._v, self._c = volume, wall
        self._s0 = self._near = to_s(temperature)
        exponent, self._g0, self._h0, _, _, _ = table.integrals(self._s0)
        self._m0 = mass * exp(-exponent)

    def mass_at(self, temperature: float) -> float:
        """Mass left when the bottle has cooled to a temperature [kg]."""
        return self._mass(to_s(temperature))[0]

    def temperature_at(self, mass: float) -> float:
        """Temperature when a mass is left [K]."""
        # Newton's steps kept in a bracket that shrinks: mass falls with rising s all the way.
        low, high = self._s0, self._table.s_cold
        s = self._near
        for _ in range(60):
            value, slope = self._mass(s)
            gap = value - mass
            if gap > 0.0:
                low = s
            else:
                high = s
            step = gap / slope if slope < 0.0 else 1.0
            new = s - step
            if not low <= new <= high:
                new = 0.5 * (low + high)
            small = abs(new - s) < 3e-6  # the next step would be about its square
            s = new
            if small:
                break
        self._near = s
        return to_t(s)

    def _mass(self, s: float) -> tuple[float, float]:
        """Mass and its slope in s."""
        exponent, g, h, d_exponent, d_g, d_h = self._table.integrals(s)
        scale = exp(exponent)
        mass = scale * (self._m0 + self._v * (g - self._g0) + self._c * (h - self._h0))
        return mass, d_exponent * mass + scale * (self._v * d_g + self._c * d_h)


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
    return float((1.0 - temperature / _TC) ** (1.0 / 3.0))


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
    return min(max(_TC * (1.0 - s * s * s), T_TRIPLE), T_SATURATION_MAX)


_lock = threading.Lock()
_tables: list[WithdrawalTable] = []


def withdrawal_table(*, liquid: bool) -> WithdrawalTable:
    """Hand out the table for drawing liquid or vapour, built at the first call.

    Parameters
    ----------
    liquid : bool, saturated liquid is drawn, else saturated vapour [-]

    Returns
    -------
    WithdrawalTable, one for the process [-]

    Assumptions
    -----------
    Read only once built, so that threads may share it.

    Valid for
    ---------
    182.33 K to 309.5206 K.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850, for the saturated states.
    """
    if not _tables:
        with _lock:
            if not _tables:
                _tables.extend(_build())
    return _tables[0 if liquid else 1]


def _build() -> tuple[WithdrawalTable, WithdrawalTable]:
    """Tabulate the saturated states and their slopes."""
    s = np.linspace(to_s(T_SATURATION_MAX), to_s(T_TRIPLE), _KNOTS)
    fluid = engine()
    temperature = np.array([to_t(float(x)) for x in s])
    p, rho_l, rho_v, h_l, h_v = np.array([fluid.saturation(float(t)) for t in temperature]).T
    q = (h_v - h_l) / (1.0 / rho_v - 1.0 / rho_l)
    a, k = h_l - q / rho_l, q - p
    step = float(s[1] - s[0])
    da, dk, dt = _slope(a, step), _slope(k, step), -3.0 * _TC * s * s
    gain_l, gain_v = q / rho_l, q / rho_v
    return (
        WithdrawalTable(s, (da / gain_l, dk / gain_l, dt / gain_l)),
        WithdrawalTable(s, (da / gain_v, dk / gain_v, dt / gain_v)),
    )


def _slope(y: _Array, step: float) -> _Array:
    """Slope by differences of sixth order, of second at the ends."""
    slope = np.gradient(y, step, edge_order=2)
    slope[3:-3] = ((y[6:] - y[:-6]) - 9.0 * (y[5:-1] - y[1:-5]) + 45.0 * (y[4:-2] - y[2:-4])) / (60.0 * step)
    return slope


def _cumulate(y: _Array, step: float) -> _Array:
    """Running integral, of fourth order."""
    inner = (13.0 * (y[1:-2] + y[2:-1]) - y[:-3] - y[3:]) / 24.0
    first = (5.0 * y[0] + 8.0 * y[1] - y[2]) / 12.0
    last = (5.0 * y[-1] + 8.0 * y[-2] - y[-3]) / 12.0
    return np.concatenate(([0.0], np.cumsum(np.concatenate(([first], inner, [last]))))) * step
