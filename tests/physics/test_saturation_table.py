"""Saturated states read from a table, against the equation of state itself."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_table import saturated, saturation_table, to_s, to_t
from tests.examples import times

TEMPERATURES = st.floats(T_TRIPLE, T_SATURATION_MAX) | st.floats(T_SATURATION_MAX - 0.1, T_SATURATION_MAX)


@settings(max_examples=times(400), deadline=None)
@given(TEMPERATURES)
def test_the_table_meets_the_equation_of_state(kelvin):
    for index, (read, asked) in enumerate(zip(saturated(kelvin), engine().saturation(kelvin), strict=True)):
        # Enthalpy has no natural zero: its error is measured against a latent heat's size.
        assert read == pytest.approx(asked, rel=1e-8, abs=2e-3 if index > 2 else 0.0)


def test_its_ends_are_the_range_of_saturation():
    for kelvin in (T_TRIPLE, T_SATURATION_MAX):
        assert to_t(to_s(kelvin)) == pytest.approx(kelvin, abs=1e-9)
        assert saturated(kelvin)[0] == pytest.approx(engine().saturation(kelvin)[0], rel=1e-9)


@settings(max_examples=times(200), deadline=None)
@given(
    st.floats(T_TRIPLE + 0.5, T_SATURATION_MAX - 0.5), st.floats(0.01, 0.99), st.floats(0.0, 3e4), st.floats(-0.4, 0.4)
)
def test_two_phases_and_a_wall_settle_where_their_energy_says(kelvin, share, wall, off):
    _, liquid, vapour, _, _ = saturated(kelvin)
    volume = 0.01
    mass = volume * (vapour + share * (liquid - vapour))
    energy = mass * engine().pressure_energy(mass / volume, kelvin)[1] + wall * kelvin
    found = saturation_table().settled(volume, wall, mass, energy, to_s(kelvin + off))
    assert found is not None
    assert to_t(found) == pytest.approx(kelvin, abs=1e-6)


def test_an_energy_beyond_two_phases_has_no_place_in_the_table():
    mass, volume = 5.0, 0.01
    cold = mass * engine().pressure_energy(mass / volume, T_TRIPLE)[1]
    assert saturation_table().settled(volume, 100.0, mass, cold - 1e6, to_s(250.0)) is None
    assert saturation_table().settled(volume, 100.0, mass, cold + 1e9, to_s(250.0)) is None
