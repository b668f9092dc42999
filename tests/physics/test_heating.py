"""Warming a bottle: against plain stepping in time, and through one phase and boiling dry."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.contents import split_of
from bottles.physics.heating import heat_to_pressure, overfull, room_loss, seconds_to_reach
from bottles.physics.vessel import Vessel
from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.fluid import state_by_density_temperature
from tests.examples import times
from tests.physics.stepping import settled

WALL = 5.9 * 896.0


def bottle(net=4.5, celsius=15.0):
    return Vessel(6.8e-3, WALL, net, celsius + 273.15)


def stepped(vessel, target_k, power, seconds=2.0):
    """Time to a temperature by plain steps in time."""
    t, time = vessel.temperature_k, 0.0
    energy = (
        vessel.net_kg * state_by_density_temperature(vessel.net_kg / vessel.volume_m3, t).energy + vessel.wall_j_k * t
    )
    before = t
    while (t < target_k) == (vessel.temperature_k < target_k):
        before = t
        half = t + 0.0
        half, _ = settled(vessel.volume_m3, vessel.wall_j_k, vessel.net_kg, energy + power(t) * seconds / 2, half)
        energy += power(half) * seconds
        t, _ = settled(vessel.volume_m3, vessel.wall_j_k, vessel.net_kg, energy, t)
        time += seconds
    return time - seconds * (t - target_k) / (t - before)


def codes(told):
    return [code for code, _ in told.warnings]


def test_time_and_energy_to_a_pressure_meet_plain_stepping():
    told = heat_to_pressure(bottle(), 63e5, watts=300.0, ambient_k=288.15, loss_w_k=3.0)
    assert split_of(4.5, 6.8e-3, told.temperature_k).pressure_pa == pytest.approx(63e5, rel=1e-6)
    time = stepped(bottle(), told.temperature_k, lambda t: 300.0 - 3.0 * (t - 288.15))
    assert told.seconds == pytest.approx(time, rel=2e-3)
    # The heater's work is what contents and wall took and what the room took.
    assert told.energy_j < 300.0 * told.seconds < told.energy_j + 3.0 * (told.temperature_k - 288.15) * told.seconds


def test_without_loss_the_time_is_energy_over_power():
    told = heat_to_pressure(bottle(), 60e5, watts=250.0, ambient_k=288.15, loss_w_k=0.0)
    assert told.seconds == pytest.approx(told.energy_j / 250.0, rel=1e-9)


def test_a_full_bottle_has_no_vapour_pressure_to_go_by():
    told = heat_to_pressure(bottle(5.1), 100e5, watts=300.0, ambient_k=288.15)
    assert told.becomes == "liquid-full"
    assert "full_of_liquid" in codes(told)
    time = stepped(bottle(5.1), told.temperature_k, lambda t: 300.0 - room_loss(6.8e-3) * (t - 288.15))
    assert told.seconds == pytest.approx(time, rel=5e-3)


def test_a_nearly_empty_bottle_boils_dry():
    told = heat_to_pressure(bottle(1.1), 58e5, watts=300.0, ambient_k=288.15)
    assert told.becomes == "dry"
    assert "boils_dry" in codes(told)
    assert told.one_phase_at_k < told.temperature_k
    with pytest.raises(NoSolution) as refusal:
        heat_to_pressure(bottle(0.2), 62e5, watts=300.0, ambient_k=288.15)
    assert refusal.value.code == "pressure_unreachable"


def test_too_little_power_never_gets_there():
    told = heat_to_pressure(bottle(), 62e5, watts=20.0, ambient_k=288.15, loss_w_k=3.0)
    assert told.seconds is None
    assert told.as_dict()["minutes"] is None
    assert "never_gets_there" in codes(told)


def test_a_target_above_52_celsius_is_warned():
    assert "above_52" in codes(heat_to_pressure(bottle(), 150e5, watts=500.0, ambient_k=288.15))


def test_a_pressure_already_there_costs_nothing():
    told = heat_to_pressure(bottle(), 30e5, watts=300.0, ambient_k=288.15)
    assert (told.energy_j, told.seconds) == (0.0, 0.0)
    assert codes(told) == ["already_there"]


def test_an_overfull_bottle_is_a_timer():
    told = overfull(bottle(5.3, -10), 4.624, ambient_k=295.15)
    assert told.must_come_out_kg == pytest.approx(0.676)
    assert not told.full_now
    assert split_of(5.3, 6.8e-3, told.full_at_k + 0.02).phase == "liquid"
    loss = room_loss(6.8e-3)
    time = stepped(bottle(5.3, -10), told.full_at_k, lambda t: loss * (295.15 - t), 60.0)
    assert told.seconds_until_full == pytest.approx(time, rel=5e-3)


def test_a_cool_room_never_fills_it_with_liquid():
    assert overfull(bottle(5.3, -10), 4.624, ambient_k=288.15).seconds_until_full is None


def test_a_bottle_may_be_full_already():
    told = overfull(bottle(5.9, 27), 4.624, ambient_k=288.15)
    assert told.full_now
    assert told.seconds_until_full == 0.0


def test_a_bottle_below_its_limit_owes_nothing():
    told = overfull(bottle(2.0, 10), 4.624, ambient_k=295.15)
    assert told.must_come_out_kg == 0.0
    assert told.full_at_k is None


def test_a_bottle_loses_about_what_common_practice_says():
    # Common practice, no source: 2 to 3 W/K for a bottle of 6.8 L in still air.
    assert 2.0 < room_loss(6.8e-3) < 3.0
    assert room_loss(29e-3) > 2.0 * room_loss(6.8e-3)


@settings(max_examples=times(100), deadline=None)
@given(st.floats(0.05, 5.0), st.floats(-40.0, 40.0), st.floats(0.5, 10.0), st.floats(250.0, 330.0))
def test_warming_takes_time_and_more_of_it_the_farther(net, celsius, degrees, ambient):
    vessel = bottle(net, celsius)
    start = vessel.temperature_k
    near = seconds_to_reach(vessel, start + degrees, ambient_k=ambient, loss_w_k=2.4)
    far = seconds_to_reach(vessel, start + degrees + 1.0, ambient_k=ambient, loss_w_k=2.4)
    if start + degrees >= ambient:
        assert near is None
    else:
        assert near > 0.0
        assert far is None or far > near


@pytest.mark.parametrize(
    ("call", "code"),
    [
        (lambda: heat_to_pressure(bottle(), 0.0, watts=300.0, ambient_k=288.15), "pressure_range"),
        (lambda: heat_to_pressure(bottle(), 6e6, watts=-1.0, ambient_k=288.15), "power"),
        (lambda: heat_to_pressure(bottle(0.0), 6e6, watts=300.0, ambient_k=288.15), "empty"),
    ],
)
def test_heating_refuses_what_cannot_be(call, code):
    with pytest.raises(OutOfRange) as refusal:
        call()
    assert refusal.value.code == code
