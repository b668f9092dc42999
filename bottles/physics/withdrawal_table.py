"""How a two-phase bottle cools while it gives nitrous, as functions of temperature alone.

A bottle of volume V with a wall of heat capacity C and contents M in both phases has the
energy ``M a(T) + V k(T) + C T``, linear in M, V and C, with ``q = T dp/dT``,
``k = q - p`` and ``a = h_liquid - v_liquid q``. Drawing one phase of enthalpy h takes
``dU = h dM``, so that ``dM/dT = (M a' + V k' + C) / (v q)``, v being the volume of a
kilogram of the phase drawn: linear too. Three integrals over temperature that belong to
nitrous oxide alone therefore answer for every bottle:

    M(T) = exp(L(T) - L(T0)) M0 + exp(L(T)) (V (G(T) - G(T0)) + C (H(T) - H(T0)))

They are tabulated once a process, at the knots of the saturated states (`saturation_table`),
and read by cubic Hermite pieces.
"""

from __future__ import annotations

import threading
from math import exp

import numpy as np
from numpy.typing import NDArray

from shop.physics.saturation_table import KNOTS, TC, cubics, saturation_table, slopes, to_s, to_t

_NEAR = 2e-6  # in s: a thousandth of a kelvin at most, where the next step is about its square
_Array = NDArray[np.float64]


class WithdrawalTable:
    """The three integrals for drawing saturated liquid, or saturated vapour."""

    __slots__ = ("_first", "_per", "_rows", "s_cold")

    def __init__(self, s: _Array, integrand: tuple[_Array, _Array, _Array]) -> None:
        """Integrate the slopes of L, V- and C-parts over the knots."""
        step = float(s[1] - s[0])
        l_slope, v_slope, c_slope = integrand
        exponent = _cumulate(l_slope, step)
        exponent -= np.interp(0.35, s, exponent)
        scale = np.exp(-exponent)
        g_slope, h_slope = v_slope * scale, c_slope * scale
        pieces = (
            cubics(exponent, l_slope, step),
            cubics(_cumulate(g_slope, step), g_slope, step),
            cubics(_cumulate(h_slope, step), h_slope, step),
        )
        self._rows = [tuple(row) for row in np.concatenate(pieces).T.tolist()]
        self._first, self._per = float(s[0]), 1.0 / step
        self.s_cold = float(s[-1])

    def integrals(self, s: float) -> tuple[float, float, float, float, float, float]:
        """L, G, H and their slopes in s."""
        per = self._per
        place = (s - self._first) * per
        index = int(place)
        if index < 0:
            index = 0
        elif index > KNOTS - 2:
            index = KNOTS - 2
        x = place - index
        l0, l1, l2, l3, g0, g1, g2, g3, h0, h1, h2, h3 = self._rows[index]
        return (
            l0 + x * (l1 + x * (l2 + x * l3)),
            g0 + x * (g1 + x * (g2 + x * g3)),
            h0 + x * (h1 + x * (h2 + x * h3)),
            (l1 + x * (2.0 * l2 + 3.0 * x * l3)) * per,
            (g1 + x * (2.0 * g2 + 3.0 * x * g3)) * per,
            (h1 + x * (2.0 * h2 + 3.0 * x * h3)) * per,
        )


class Drain:
    """One bottle giving one saturated phase: mass left against temperature, both ways."""

    __slots__ = ("_c", "_g0", "_h0", "_m0", "_met", "_s0", "_share", "_table", "_v")

    def __init__(self, table: WithdrawalTable, volume: float, wall: float, mass: float, temperature: float) -> None:
        """Fix the start."""
        self._table = table
        self._v, self._c = volume, wall
        self._s0 = s = to_s(temperature)
        exponent, self._g0, self._h0, d_exponent, d_g, d_h = table.integrals(s)
        scale = exp(exponent)
        self._m0, self._share = mass / scale, 1.0 / scale
        # A place on the path that was met before, its mass and its slope: where the next search begins.
        self._met = s, mass, d_exponent * mass + scale * (volume * d_g + wall * d_h)

    def mass_at(self, temperature: float) -> float:
        """Mass left when the bottle has cooled to a temperature [kg]."""
        return self.mass_and_slope(to_s(temperature))[0]

    def temperature_at(self, mass: float) -> float:
        """Temperature when a mass is left [K]."""
        return to_t(self.s_at(mass))

    def s_at(self, mass: float) -> float:
        """The table's variable when a mass is left."""
        s0, m0, slope0 = self._met
        s = s0 + (mass - m0) / slope0 if slope0 < 0.0 else s0
        if abs(mass - m0) <= 1e-9 * m0 and slope0 < 0.0:
            return s
        for _ in range(3):
            if not self._s0 < s < self._table.s_cold:
                break
            m, slope = self.mass_and_slope(s)
            span = m - m0
            if not slope < 0.0 or span == 0.0:
                break
            newton = s + (mass - m) / slope
            # Both places give a cubic of s in mass, whose error is far below the tangent's.
            x = (mass - m0) / span
            best = (
                s0 + x * x * (3.0 - 2.0 * x) * (s - s0) + span * x * ((1.0 - x) ** 2 / slope0 + x * (x - 1.0) / slope)
            )
            if abs(best - newton) < _NEAR:
                self._met = s, m, slope
                return best
            s0, m0, slope0, s = s, m, slope, best
        return self._s_between(mass)

    def _s_between(self, mass: float) -> float:
        """The same by Newton's steps in a bracket that shrinks: mass falls with rising s all the way."""
        low, high = self._s0, self._table.s_cold
        if mass >= self.mass_and_slope(low)[0] * (1.0 - 1e-14):
            return low  # the start itself: halving would stop a hair beside it
        if mass <= self.mass_and_slope(high)[0]:
            return high
        s = 0.5 * (low + high)
        for _ in range(60):
            value, slope = self.mass_and_slope(s)
            gap = value - mass
            if gap > 0.0:
                low = s
            else:
                high = s
            new = s - gap / slope if slope < 0.0 else high
            if low < new < high:
                if abs(new - s) < _NEAR:
                    return new
            else:
                new = 0.5 * (low + high)
            s = new
        return s

    def parts(self, s: float) -> tuple[float, float]:
        """Mass left at s as a share of the mass at the start, and what comes to it whatever that was."""
        exponent, g, h, _, _, _ = self._table.integrals(s)
        scale = exp(exponent)
        return scale * self._share, scale * (self._v * (g - self._g0) + self._c * (h - self._h0))

    def mass_and_slope(self, s: float) -> tuple[float, float]:
        """Mass left and its slope in s."""
        exponent, g, h, d_exponent, d_g, d_h = self._table.integrals(s)
        scale = exp(exponent)
        mass = scale * (self._m0 + self._v * (g - self._g0) + self._c * (h - self._h0))
        return mass, d_exponent * mass + scale * (self._v * d_g + self._c * d_h)


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
    """Tabulate the slopes of what drawing each phase needs."""
    table = saturation_table()
    s, q = table.s, table.q
    _, rho_l, rho_v, _, _ = table.sides
    da, dk, dt = slopes(table.a, table.step), slopes(table.k, table.step), -3.0 * TC * s * s
    gain_l, gain_v = q / rho_l, q / rho_v
    return (
        WithdrawalTable(s, (da / gain_l, dk / gain_l, dt / gain_l)),
        WithdrawalTable(s, (da / gain_v, dk / gain_v, dt / gain_v)),
    )


def _cumulate(y: _Array, step: float) -> _Array:
    """Running integral, of fourth order."""
    inner = (13.0 * (y[1:-2] + y[2:-1]) - y[:-3] - y[3:]) / 24.0
    first = (5.0 * y[0] + 8.0 * y[1] - y[2]) / 12.0
    last = (5.0 * y[-1] + 8.0 * y[-2] - y[-3]) / 12.0
    return np.concatenate(([0.0], np.cumsum(np.concatenate(([first], inner, [last]))))) * step
