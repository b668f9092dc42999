"""Saturated states for many temperatures or pressures at once, in arrays.

The same cubic pieces as `saturation_table`, which answers for one state: a curve asks for
many together. Against the equation of state each figure is met to a
relative 1e-8 (an enthalpy to that of the latent heat at 0 °C), up to the critical point;
a temperature from a pressure to 1e-7 K.
"""

from __future__ import annotations

import threading
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_CRITICAL, T_SATURATION_MAX, T_TRIPLE
from shop.physics.saturation_table import KNOTS, TC, cubics, saturation_table, slopes
from shop.physics.states import NO_SATURATION

Array = NDArray[np.float64]

_ROUNDING = 1e-8  # of the pressure at the triple point


@dataclass(frozen=True, slots=True)
class SaturatedStates:
    """Liquid and vapour in equilibrium at many temperatures: arrays of one shape."""

    temperature_k: Array
    pressure_pa: Array
    liquid_density: Array
    vapour_density: Array
    liquid_enthalpy: Array
    vapour_enthalpy: Array


def saturated_states(temperatures_k: ArrayLike) -> SaturatedStates:
    """Liquid and vapour in equilibrium at many temperatures.

    Parameters
    ----------
    temperatures_k : array of float, of any shape [K]

    Returns
    -------
    SaturatedStates, pressures [Pa], densities [kg/m3], enthalpies [J/kg], of that shape

    Assumptions
    -----------
    Pure nitrous oxide. Cubic pieces between 640 of the equation's own states.

    Valid for
    ---------
    182.33 K to 309.5206 K, to 1e-8 of each figure.

    Raises
    ------
    OutOfRange
        `no_saturation` where any temperature lies outside of that.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850, for the states at the knots.
    """
    t = np.asarray(temperatures_k, dtype=np.float64)
    _refuse_unless(bool(np.all((t >= T_TRIPLE) & (t <= T_SATURATION_MAX))))
    table, pieces = saturation_table(), _pieces()
    place = (np.cbrt(1.0 - t / TC) - table.s_hot) / table.step
    index = np.clip(place.astype(np.intp), 0, KNOTS - 2)
    x = (place - index)[..., np.newaxis]
    piece = pieces[index]
    values = piece[..., 0, :] + x * (piece[..., 1, :] + x * (piece[..., 2, :] + x * piece[..., 3, :]))
    return SaturatedStates(t, *np.moveaxis(values, -1, 0))


def boiling_temperatures(pressures_pa: ArrayLike) -> Array:
    """Temperatures of saturation at many pressures.

    Parameters
    ----------
    pressures_pa : array of float, absolute, of any shape [Pa]

    Returns
    -------
    array of float, of that shape [K]

    Assumptions
    -----------
    The inverse of `saturated_states`, to rounding: a piece is found by the pressures at its
    ends, and its cubic solved by Newton's steps.

    Valid for
    ---------
    0.878 bar to 72.448 bar absolute, to 1e-7 K.

    Raises
    ------
    OutOfRange
        `no_saturation` where any pressure lies outside of that.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850, for the states at the knots.
    """
    p = np.asarray(pressures_pa, dtype=np.float64)
    table, pieces = saturation_table(), _pieces()
    knots = table.sides[0]
    _refuse_unless(bool(np.all((p >= (1.0 - _ROUNDING) * knots[-1]) & (p < P_CRITICAL))))
    p = np.clip(p, knots[-1], knots[0])
    # Pressure falls from knot to knot; searching wants it rising.
    index = np.clip(KNOTS - 1 - np.searchsorted(knots[::-1], p), 0, KNOTS - 2)
    c0, c1, c2, c3 = np.moveaxis(pieces[index, :, 0], -1, 0)
    x = (p - c0) / (knots[index + 1] - c0)
    for _ in range(4):  # a piece is all but straight: each step squares an error of some thousandths
        x = x - (c0 - p + x * (c1 + x * (c2 + x * c3))) / (c1 + x * (2.0 * c2 + 3.0 * x * c3))
    s = table.s_hot + (index + x) * table.step
    return np.asarray(np.clip(TC * (1.0 - s * s * s), T_TRIPLE, T_SATURATION_MAX))


def _pieces() -> Array:
    """Coefficients by piece, power and property; laid so that a point finds its own together."""
    if not _laid:
        with _lock:
            if not _laid:
                table = saturation_table()
                laid = [cubics(values, slopes(values, table.step), table.step) for values in table.sides]
                _laid.append(np.ascontiguousarray(np.array(laid).transpose(2, 1, 0)))
    return _laid[0]


_lock = threading.Lock()
_laid: list[Array] = []


def _refuse_unless(inside: bool) -> None:
    """Refuse what has no two phases, and what is no number."""
    if not inside:
        raise OutOfRange("no_saturation", NO_SATURATION)
