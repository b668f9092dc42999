"""Nitrous oxide against an independent correlation: ESDU 91022, September 1991.

How far each of its figures can be trusted (the deviation of two good sources from each other, not an
error of either): vapour pressure 0.4 %, liquid density 0.5 % above -35 °C and 1.2 % below, vapour density
1, 2 and 3.5 % and latent heat 1, 2 and 4 % up to 25, 30 and 35 °C.
"""

from __future__ import annotations

import numpy as np
import pytest

from shop.physics import fluid
from shop.physics.saturation_curves import saturated_states
from tests.physics.esdu import TC, esdu, latent_heat

CELSIUS = [-90, -80, -70, -60, -50, -40, -30, -20, -10, 0, 5, 10, 15, 20, 25, 28, 30, 32, 33.5, 35]
GAS = 8.314472 / fluid.MOLAR_MASS  # J/kg/K, the gas constant of Lemmon and Span (2006)


def stepped(celsius: float, *tolerances: float) -> float:
    """The tolerance up to 25, 30 and 35 °C."""
    return tolerances[0 if celsius <= 25 else 1 if celsius <= 30 else 2]


@pytest.mark.parametrize("celsius", CELSIUS)
def test_saturation_meets_an_independent_correlation(celsius):
    kelvin = celsius + 273.15
    state = fluid.saturation_at_temperature(kelvin)
    assert state.pressure_pa == pytest.approx(esdu("p_vap", kelvin), rel=0.0041)
    assert state.liquid_density == pytest.approx(esdu("rho_liq", kelvin), rel=0.005 if celsius > -35 else 0.012)
    assert state.vapour_density == pytest.approx(esdu("rho_vap", kelvin), rel=stepped(celsius, 0.01, 0.02, 0.035))
    assert state.latent_heat == pytest.approx(latent_heat(kelvin), rel=stepped(celsius, 0.01, 0.02, 0.04))


@pytest.mark.parametrize("celsius", [c for c in CELSIUS if -60 <= c <= 20])
def test_each_phase_takes_the_heat_that_the_correlation_says(celsius):
    # From 0 °C, because both count enthalpy from a zero of their own; up to 20 °C, beyond which the correlation
    # of either phase bends before the critical point. 0.7 kJ/kg is what warms the liquid by a third of a kelvin.
    kelvin, zero = celsius + 273.15, 273.15
    here, there = fluid.saturation_at_temperature(kelvin), fluid.saturation_at_temperature(zero)
    liquid = here.liquid_enthalpy - there.liquid_enthalpy
    vapour = here.vapour_enthalpy - there.vapour_enthalpy
    assert liquid == pytest.approx(esdu("h_liq", kelvin) - esdu("h_liq", zero), abs=700)
    assert vapour == pytest.approx(esdu("h_vap", kelvin) - esdu("h_vap", zero), abs=700)


@pytest.mark.parametrize("celsius", [-90, -40, 0, 20, 52, 100, 200, 250])
def test_the_thin_gas_takes_the_heat_that_the_correlation_says(celsius):
    kelvin = celsius + 273.15
    engine = fluid.engine()
    cv = engine.one_phase_slopes(1e-4, kelvin)[1]
    assert cv + GAS == pytest.approx(esdu("cp_ideal", kelvin), rel=0.003)
    # h = u + p/rho of the ideal gas, from 25 °C, where the correlation counts from.
    warmed = engine.pressure_energy(1e-6, kelvin)[1] - engine.pressure_energy(1e-6, 298.15)[1] + GAS * (kelvin - 298.15)
    assert warmed == pytest.approx(esdu("h_ideal", kelvin), abs=250)


def test_both_have_their_critical_point_in_one_place():
    # There the correlations have another power than any analytic equation: no digits, but both close in on it.
    celsius = np.linspace(30.0, 36.3, 64)
    states = saturated_states(celsius + 273.15)
    ours = states.liquid_density - states.vapour_density
    theirs = np.array([esdu("rho_liq", t) - esdu("rho_vap", t) for t in states.temperature_k])
    for split in (ours, theirs):
        assert np.all(np.diff(split) < 0.0)
        assert split[-1] < 0.35 * split[0]
    assert abs(fluid.T_SATURATION_MAX - TC) < 0.06
