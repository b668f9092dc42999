"""How long chilling and warming take, between what, and where they never get."""

from __future__ import annotations

import json
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.chilling import (
    FREEZER,
    ICED_WATER,
    MOVED_AIR,
    ROOM,
    SPREAD,
    TRANSFER,
    Surroundings,
    heat_passed,
    temperature_after,
    time_to_reach,
)
from bottles.physics.heating import room_loss
from bottles.physics.vessel import Vessel, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from tests.examples import times

VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def bottle(net=0.01, celsius=20.0, volume=VOLUME, wall=WALL):
    return Vessel(volume, wall, net, celsius + 273.15)


def codes(told):
    return [code for code, _ in told.warnings]


def test_an_empty_wall_cools_by_newtons_law():
    told = time_to_reach(bottle(0.0), 263.15, Surroundings(FREEZER, 253.15))
    assert told.likely_s == pytest.approx(WALL / heat_passed(VOLUME, FREEZER) * math.log(40.0 / 10.0), rel=1e-6)
    assert told.heat_j == pytest.approx(30.0 * WALL, rel=1e-6)
    assert told.quick_s * SPREAD == pytest.approx(told.likely_s) == pytest.approx(told.slow_s / SPREAD)


def test_water_is_faster_than_moved_air_and_that_than_still_air():
    times = [
        time_to_reach(bottle(), 276.15, Surroundings(kind, 273.15)).likely_s for kind in (ICED_WATER, MOVED_AIR, FREEZER)
    ]
    assert times == sorted(times)
    assert times[0] < 600.0 < 1800.0 < times[2]


def test_a_full_bottle_takes_longer_than_an_empty_one():
    freezer = Surroundings(FREEZER, 255.15)
    assert time_to_reach(bottle(4.5), 270.0, freezer).likely_s > 2.0 * time_to_reach(bottle(), 270.0, freezer).likely_s


def test_a_room_passes_what_heating_takes_it_to_pass():
    assert heat_passed(VOLUME, ROOM) == pytest.approx(room_loss(VOLUME))


def test_never_below_the_freezers_own_temperature():
    told = time_to_reach(bottle(), 250.0, Surroundings(FREEZER, 255.15))
    assert told.likely_s is told.quick_s is told.slow_s is None
    assert codes(told)[0] == "never_gets_there"
    assert time_to_reach(bottle(), 255.15, Surroundings(FREEZER, 255.15)).likely_s is None
    assert min(temperature_after(bottle(), 1e8, Surroundings(FREEZER, 255.15))) >= 255.15


def test_what_was_reached_in_a_time_took_that_time():
    freezer = Surroundings(MOVED_AIR, 250.15)
    slow, likely, quick = temperature_after(bottle(2.0), 1800.0, freezer)
    assert slow > likely > quick
    assert time_to_reach(bottle(2.0), likely, freezer).likely_s == pytest.approx(1800.0, rel=2e-3)
    assert time_to_reach(bottle(2.0), quick, freezer).quick_s == pytest.approx(1800.0, rel=2e-3)


def test_a_cold_bottle_warms_in_a_room():
    told = time_to_reach(bottle(3.0, -20.0), 288.15, Surroundings(ROOM, 295.15))
    assert told.likely_s > 0.0
    assert told.heat_j > 0.0
    assert "no_flame" in codes(told)
    assert "no_dry_ice" not in codes(told)


def test_a_bottle_that_swells_full_on_warming_is_said():
    assert codes(time_to_reach(bottle(5.6, 0.0), 293.15, Surroundings(ROOM, 298.15)))[0] == "full_of_liquid"


def test_baths_and_frost_are_to_be_dried_before_the_scale():
    assert "wet" in codes(time_to_reach(bottle(), 283.15, Surroundings(ICED_WATER, 273.15)))
    assert "wet" in codes(time_to_reach(bottle(), 263.15, Surroundings(FREEZER, 255.15)))


def test_a_bottle_already_there_takes_no_time():
    assert time_to_reach(bottle(), 293.15, Surroundings()).likely_s == 0.0
    assert temperature_after(bottle(), 0.0, Surroundings()) == (293.15,) * 3


@pytest.mark.parametrize(("kind", "kelvin"), [("dry ice", 255.15), (ICED_WATER, 250.0), (ROOM, 350.0), (FREEZER, 150.0)])
def test_surroundings_that_cannot_be_are_refused(kind, kelvin):
    with pytest.raises(OutOfRange) as refusal:
        Surroundings(kind, kelvin)
    assert refusal.value.code == "surroundings"


def test_targets_and_times_out_of_range_are_refused():
    for question in (
        lambda: time_to_reach(bottle(), 350.0, Surroundings()),
        lambda: temperature_after(bottle(), -1.0, Surroundings()),
        lambda: heat_passed(VOLUME, "sea"),
    ):
        with pytest.raises(OutOfRange):
            question()


@settings(max_examples=times(40), deadline=None)
@given(
    st.floats(0.0, 5.5), st.floats(-40.0, 52.0), st.floats(-40.0, 52.0), st.sampled_from(sorted(TRANSFER)),
    st.floats(-30.0, 40.0), st.sampled_from([(3e-4, 300.0), (VOLUME, WALL), (0.06, 3e4)]),
)  # fmt: skip
def test_any_bottle_gets_a_time_or_is_told_why_not(net, celsius, target, kind, ambient, size):
    around = Surroundings(kind, 273.15 if kind == ICED_WATER else ambient + 273.15)
    try:
        start = bottle(min(net, 800.0 * size[0]), celsius, *size)
        told = time_to_reach(start, target + 273.15, around)
        after = temperature_after(start, 3600.0, around)
    except PhysicsError:
        return
    json.dumps(told.as_dict(), allow_nan=False)
    low, high = sorted((start.temperature_k, around.temperature_k))
    assert all(low - 1e-9 <= t <= high + 1e-9 for t in after)
