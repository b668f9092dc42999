"""What venting gives and costs, before filling."""

from __future__ import annotations

import json
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.venting import LIQUID, VAPOUR, phase_leaving, vent
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import ATMOSPHERE
from tests.examples import times
from tests.physics.stepping import outlet, settled, state_by_density_temperature

POUND = 0.45359237
VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def bottle(net=4.536, celsius=20.0, **other):
    return Vessel(VOLUME, WALL, net, celsius + 273.15, **other)


def codes(told):
    return [code for code, _ in told.warnings]


@pytest.mark.parametrize(
    ("tube", "attitude", "phase"),
    [
        ("dip", "upright", LIQUID), ("dip", "inverted", VAPOUR), ("none", "upright", VAPOUR),
        ("none", "inverted", LIQUID), ("unknown", "upright", None), ("dip", "unknown", None), ("none", "lying", None),
    ],
)  # fmt: skip
def test_tube_and_attitude_tell_which_phase_leaves(tube, attitude, phase):
    assert phase_leaving(tube, attitude) == phase


@pytest.mark.parametrize("celsius", [12.0, 18.0, 24.0])
def test_a_pound_out_of_a_full_ten_pound_bottle_cools_it_as_the_trade_knows(celsius):
    """Vapour 6 to 8 °C, liquid 1 to 2 °C: common practice, no source."""
    full = bottle(10 * POUND, celsius)
    vapour, liquid = (vent(full, phase, to_kg=9 * POUND) for phase in (VAPOUR, LIQUID))
    assert 5.9 < full.temperature_k - vapour.temperature_k < 8.0
    assert 0.9 < full.temperature_k - liquid.temperature_k < 2.0
    assert vapour.lost_kg == pytest.approx(POUND, abs=1e-9)


def test_vented_vapour_agrees_with_plain_stepping():
    start, steps = bottle(), 60
    mass, t = start.net_kg, start.temperature_k
    one = state_by_density_temperature(mass / VOLUME, t)
    energy = mass * one.energy + WALL * t
    told = vent(start, VAPOUR, to_kg=3.0)
    share = (mass - 3.0) / steps
    for _ in range(steps):
        h = outlet(VOLUME, mass, one, latched=True)[0]
        half = settled(VOLUME, WALL, mass - share / 2, energy - h * share / 2, t)[1]
        h = outlet(VOLUME, mass - share / 2, half, latched=True)[0]
        mass, energy = mass - share, energy - h * share
        t, one = settled(VOLUME, WALL, mass, energy, t)
    assert told.temperature_k == pytest.approx(t, abs=0.01)
    assert told.pressure_pa == pytest.approx(one.pressure_pa, rel=5e-4)


def test_down_to_the_rooms_pressure_it_ends_there_and_says_that_liquid_stays():
    told = vent(bottle(), VAPOUR, to_pa=ATMOSPHERE)
    assert told.pressure_pa == pytest.approx(ATMOSPHERE, rel=1e-4)
    assert told.temperature_k == pytest.approx(184.7, abs=0.2)
    assert 0.0 < told.liquid_left_kg < told.left_kg
    assert told.lost_kg < told.lost_when_warm_kg < 4.536
    assert {"outdoors", "cold", "very_cold", "liquid_stays"} <= set(codes(told))


def test_liquid_vented_to_the_rooms_pressure_leaves_vapour_alone():
    told = vent(bottle(), LIQUID, to_pa=ATMOSPHERE)
    assert told.liquid_left_kg == 0.0
    assert told.left_kg < 0.05
    assert "liquid_out" in codes(told)


def test_a_room_so_high_that_solid_would_form_is_said():
    assert "solid" in codes(vent(bottle(), VAPOUR, to_pa=70e3))


def test_nothing_needs_to_come_out_of_what_is_already_there():
    for target in ({"to_kg": 5.0}, {"to_pa": 9e6}):
        told = vent(bottle(), VAPOUR, **target)
        assert (told.lost_kg, codes(told)) == (0.0, ["nothing_to_vent"])


@pytest.mark.parametrize(
    ("phase", "target", "code"),
    [
        ("gas", {"to_kg": 1.0}, "vent"), (VAPOUR, {}, "vent"), (VAPOUR, {"to_kg": 1.0, "to_pa": 1e5}, "vent"),
        (VAPOUR, {"to_kg": math.nan}, "vent"), (VAPOUR, {"to_pa": 0.0}, "vent"),
    ],
)  # fmt: skip
def test_venting_towards_nothing_known_is_refused(phase, target, code):
    with pytest.raises(OutOfRange) as refusal:
        vent(bottle(), phase, **target)
    assert refusal.value.code == code


def test_air_that_comes_with_the_vapour_is_refused():
    with pytest.raises(OutOfRange) as refusal:
        vent(bottle(1.0, air=2.0), VAPOUR, to_pa=ATMOSPHERE)
    assert refusal.value.code == "air"


@settings(max_examples=times(60), deadline=None)
@given(
    st.floats(0.0, 6.9), st.floats(-40.0, 52.0), st.sampled_from([VAPOUR, LIQUID]), st.floats(0.0, 1.0), st.booleans()
)
def test_any_bottle_can_be_vented_and_only_cools(net, celsius, phase, share, by_pressure):
    try:
        start = bottle(net, celsius)
        rest = pressure_and_energy(VOLUME, net, start.temperature_k)[0]
        target = {"to_pa": max(rest * share, 1.0)} if by_pressure else {"to_kg": net * share}
        told = vent(start, phase, **target)
    except PhysicsError:
        return
    json.dumps(told.as_dict(), allow_nan=False)
    assert told.lost_kg + told.left_kg == pytest.approx(net, abs=1e-9)
    assert told.temperature_k <= start.temperature_k + 1e-6
    assert told.pressure_pa <= rest * (1 + 1e-6) + 1e-3
