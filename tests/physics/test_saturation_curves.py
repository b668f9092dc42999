"""Saturated states in arrays: against the equation of state over the whole range, and there and back."""

from __future__ import annotations

import math
import threading

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from shop.physics import saturation_curves
from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_CRITICAL, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_curves import boiling_temperatures, saturated_states
from shop.physics.saturation_table import saturated, saturation_table
from tests.examples import times

NAMES = ("pressure_pa", "liquid_density", "vapour_density", "liquid_enthalpy", "vapour_enthalpy")
# Even in temperature, denser toward the critical point, and midway between the knots, where pieces are worst.
EVERYWHERE = np.concatenate([
    np.linspace(T_TRIPLE, T_SATURATION_MAX, 3001),
    T_SATURATION_MAX - np.geomspace(1e-6, 1.0, 1001),
    np.clip(309.52 * (1.0 - (saturation_table().s[:-1] + 0.5 * saturation_table().step) ** 3), T_TRIPLE, T_SATURATION_MAX),
])  # fmt: skip


@pytest.fixture(scope="module")
def asked():
    """The equation of state, one temperature after another."""
    return np.array([engine().saturation(float(t)) for t in EVERYWHERE]).T


@pytest.mark.parametrize("number", range(5), ids=NAMES)
def test_the_curves_meet_the_equation_of_state_everywhere(number, asked):
    read = getattr(saturated_states(EVERYWHERE), NAMES[number])
    _, _, _, liquid, vapour = engine().saturation(273.15)
    size = np.abs(asked[number]) if number < 3 else vapour - liquid
    worst = float(np.max(np.abs(read - asked[number]) / size))
    assert worst < 1e-8


def test_boiling_temperatures_meet_the_equation_of_state_everywhere(asked):
    assert float(np.max(np.abs(boiling_temperatures(asked[0]) - EVERYWHERE))) < 1e-7


@settings(max_examples=times(100), deadline=None)
@given(arrays(np.float64, st.integers(0, 40), elements=st.floats(T_TRIPLE, T_SATURATION_MAX)))
def test_there_and_back_is_the_same_temperature(kelvin):
    states = saturated_states(kelvin)
    assert states.pressure_pa.shape == kelvin.shape
    assert boiling_temperatures(states.pressure_pa) == pytest.approx(kelvin, abs=1e-9)
    assert np.all(states.liquid_density > states.vapour_density)
    assert np.all(states.vapour_enthalpy > states.liquid_enthalpy)


def test_many_at_once_are_what_each_alone_is():
    kelvin = np.linspace(T_TRIPLE, T_SATURATION_MAX, 60).reshape(3, 4, 5)
    states = saturated_states(kelvin)
    for place in np.ndindex(kelvin.shape):
        alone = saturated(float(kelvin[place]))
        assert [float(getattr(states, name)[place]) for name in NAMES] == pytest.approx(alone, rel=1e-12)
    assert float(saturated_states(293.15).pressure_pa) == pytest.approx(engine().saturation(293.15)[0], rel=1e-9)


def test_a_hotter_bottle_shows_more_pressure_all_the_way():
    states = saturated_states(np.linspace(T_TRIPLE, T_SATURATION_MAX, 200_001))
    assert np.all(np.diff(states.pressure_pa) > 0.0)
    assert np.all(np.diff(states.vapour_density) > 0.0)
    assert np.all(np.diff(states.liquid_density) < 0.0)


@pytest.mark.parametrize("kelvin", [[T_TRIPLE - 0.01], [290.0, 309.6], [290.0, math.nan], [math.inf]])
def test_one_temperature_outside_refuses_all(kelvin):
    with pytest.raises(OutOfRange) as refusal:
        saturated_states(kelvin)
    assert refusal.value.code == "no_saturation"


@pytest.mark.parametrize("pascal", [[0.0], [8e4, 5e6], [5e6, P_CRITICAL], [math.nan], [-1.0]])
def test_one_pressure_outside_refuses_all(pascal):
    with pytest.raises(OutOfRange) as refusal:
        boiling_temperatures(pascal)
    assert refusal.value.code == "no_saturation"


def test_threads_that_come_first_together_share_one_set_of_curves(monkeypatch):
    monkeypatch.setattr(saturation_curves, "_laid", [])
    together, found = threading.Barrier(4), []

    def ask():
        together.wait(20)
        found.append(float(saturated_states(280.0).pressure_pa))

    threads = [threading.Thread(target=ask) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(20)
    assert found == [found[0]] * 4
    assert len(saturation_curves._laid) == 1
