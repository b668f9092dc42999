"""States of nitrous oxide along its own entropy: what flow through an opening follows."""

from __future__ import annotations

from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_CRITICAL, P_MAX, P_TRIPLE, T_MAX, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.roots import find_root
from shop.physics.states import PRESSURE_RANGE

_APART = 2e-6  # how far from its vapour pressure's temperature one phase is told safely, as a share
_ABOVE = 5e-6  # of the critical pressure, past what the solver takes for saturation


def entropy_of(density: float, temperature_k: float) -> tuple[float, float, float]:
    """Entropy, enthalpy and pressure of a state of equilibrium.

    Parameters
    ----------
    density : float, mass over volume, of both phases together [kg/m3]
    temperature_k : float, temperature [K]

    Returns
    -------
    tuple of float, entropy [J/kg/K], enthalpy [J/kg], absolute pressure [Pa]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium; entropy by the equation's own zero.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    fluid = engine()
    pressure, _ = fluid.pressure_energy(density, temperature_k)
    return float(fluid.raw.smass()), float(fluid.raw.hmass()), pressure


def sound_speed(density: float, temperature_k: float) -> float:
    """Speed of sound of one phase.

    Parameters
    ----------
    density : float, density [kg/m3]
    temperature_k : float, temperature [K]

    Returns
    -------
    float, speed of sound [m/s]

    Assumptions
    -----------
    One phase, even just past saturation: nothing condenses within a wave.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    # c² = (dp/drho)_T + T (dp/dT)² / (rho² cv), by a step in density small enough for both.
    fluid, step = engine(), 1e-4
    _, heat, rise = fluid.one_phase_slopes(density, temperature_k)
    above = fluid.one_phase_slopes(density * (1.0 + step), temperature_k)[0]
    below = fluid.one_phase_slopes(density * (1.0 - step), temperature_k)[0]
    stiff = (above - below) / (2.0 * step * density)
    return float(max(stiff + temperature_k * rise * rise / (density * density * heat), 1.0) ** 0.5)


def isentropic(entropy: float, pressure_pa: float) -> tuple[float, float]:
    """State of equilibrium that an entropy has at a pressure.

    Parameters
    ----------
    entropy : float, entropy by the equation's own zero [J/kg/K]
    pressure_pa : float, absolute pressure [Pa]

    Returns
    -------
    tuple of float, density [kg/m3], enthalpy [J/kg]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium, both phases at one speed. Below the triple point's
    pressure solid nitrous isn't computed: the state at that pressure stands for it.

    Valid for
    ---------
    0.878 bar to 500 bar.

    Raises
    ------
    OutOfRange, `pressure_range` above 500 bar.
    NoSolution
        `no_sign_change` where such an entropy lies outside of the range of temperature.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not pressure_pa <= P_MAX:
        raise OutOfRange("pressure_range", PRESSURE_RANGE)
    pressure = max(pressure_pa, P_TRIPLE)
    fluid = engine()
    raw = fluid.raw
    low, high = T_TRIPLE, T_MAX
    if pressure < P_CRITICAL:
        boiling = fluid.boiling_temperature(pressure)
        if boiling < T_SATURATION_MAX:
            s_l, h_l, rho_l = raw.smass(), raw.hmass(), raw.rhomass()
            _, _, rho_v, _, h_v = fluid.saturation(boiling)
            share = (entropy - s_l) / (raw.smass() - s_l)
            if -1e-9 <= share <= 1.0 + 1e-9:
                return 1.0 / (1.0 / rho_l + share * (1.0 / rho_v - 1.0 / rho_l)), h_l + share * (h_v - h_l)
            if share < 0.0:
                high = boiling * (1.0 - _APART)
            else:
                low = boiling * (1.0 + _APART)
        else:
            # So near the critical point the solver takes no pressure on saturation; nothing parts just above it.
            pressure = P_CRITICAL * (1.0 + _ABOVE)

    def surplus(temperature: float) -> float:
        fluid.density(pressure, temperature)
        return float(raw.smass()) - entropy

    # A hair from saturation: that close the state at the edge is the answer.
    edge = high if high < T_MAX else low
    if pressure < P_CRITICAL and (surplus(edge) < 0.0) == (edge == high):
        temperature = edge
    else:
        temperature = find_root(surplus, low, high, tolerance=1e-6)
    return fluid.density(pressure, temperature), float(raw.hmass())
