"""The course over time: its ends are the limits, its sums hold, and it always comes to an end."""

from __future__ import annotations

import math
from math import inf

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.hose import effective_area, line_flow
from bottles.physics.likely_course import likely_course
from bottles.physics.transfer import Transfer, held, mixed, wall_condensing
from bottles.physics.transient import Setting, transient
from bottles.physics.transient_zones import Around, Filling
from bottles.physics.vessel import Vessel, pressure_and_energy
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import engine
from tests.examples import times
from tests.physics.courses import ABOVE, CASES, LIMIT, QUICK, SLOW, bottle, supply


def kept(source, receiver):
    return Setting(
        exchange_w_k=inf,
        source_around=Around(source.temperature_k, inf),
        receiver_around=Around(receiver.temperature_k, inf),
    )


@pytest.mark.parametrize("limit", [LIMIT, ABOVE])
@pytest.mark.parametrize("name", CASES)
def test_without_leaks_and_with_endless_exchange_it_ends_as_quick(name, limit):
    transfer = Transfer(*CASES[name])
    told, course = mixed(transfer, limit), transient(transfer, limit, QUICK)
    assert course.moved_kg[-1] == pytest.approx(told.moved_kg, rel=2e-3, abs=2e-3)
    assert course.stopped_by == told.stopped_by
    assert course.liquid_out == told.liquid_out
    assert course.source_k[-1] == pytest.approx(told.source_final_k, abs=0.05)
    assert course.receiver_k[-1] == pytest.approx(told.receiver_final_k, abs=0.05)
    assert course.receiver_pa[-1] == pytest.approx(told.receiver_final_pa, rel=2e-3)


@pytest.mark.parametrize("limit", [LIMIT, ABOVE])
@pytest.mark.parametrize("name", CASES)
def test_without_leaks_and_without_exchange_it_ends_as_slow_to_condense(name, limit):
    transfer = Transfer(*CASES[name])
    told, course = wall_condensing(transfer, limit), transient(transfer, limit, SLOW)
    assert course.moved_kg[-1] == pytest.approx(told.moved_kg, abs=0.02 * LIMIT)
    assert course.stopped_by == told.stopped_by


@pytest.mark.parametrize("limit", [LIMIT, ABOVE])
@pytest.mark.parametrize("name", CASES)
def test_with_endless_leaks_it_ends_as_kept_at_temperature(name, limit):
    source, receiver = CASES[name]
    transfer = Transfer(source, receiver)
    told, course = held(transfer, limit), transient(transfer, limit, kept(source, receiver))
    assert course.moved_kg[-1] == pytest.approx(told.moved_kg, rel=2e-3, abs=2e-3)
    assert course.stopped_by == told.stopped_by


def test_large_leaks_lead_to_the_same_end_as_endless_ones():
    source, receiver = CASES["liquid runs out"]
    large = Setting(
        exchange_w_k=1e5, source_around=Around(source.temperature_k, 1e5), receiver_around=Around(273.15, 1e5)
    )
    course = transient(Transfer(source, receiver), ABOVE, large)
    assert course.moved_kg[-1] == pytest.approx(held(Transfer(source, receiver), ABOVE).moved_kg, rel=2e-3)


@pytest.mark.parametrize("name", ["chilled", "level", "part filled", "liquid runs out"])
def test_with_some_exchange_and_time_it_comes_to_the_quick_end(name):
    transfer = Transfer(*CASES[name])
    course = transient(transfer, ABOVE)
    assert course.moved_kg[-1] == pytest.approx(mixed(transfer, ABOVE).moved_kg, rel=2e-3)


LEAKS = {
    "none": {},
    "bath": {"receiver_around": Around(273.15, 20.0)},
    "room": {"source_around": Around(295.15, 5.0), "receiver_around": Around(295.15, 2.0)},
    "kept": {"source_around": Around(293.15, inf), "receiver_around": Around(278.15, inf)},
}


@pytest.mark.parametrize("leaks", LEAKS)
@pytest.mark.parametrize("name", ["level", "liquid runs out", "through the critical point", "part filled"])
def test_a_course_conserves_mass_and_energy(name, leaks):
    source, receiver = CASES[name]
    transfer = Transfer(source, receiver, 2e-5)
    course = transient(transfer, ABOVE, Setting(exchange_w_k=inf, **LEAKS[leaks]))

    def energy(vessel, mass, kelvin):
        return pressure_and_energy(vessel.volume_m3, mass, kelvin)[1] + vessel.wall_j_k * kelvin

    moved = course.moved_kg[-1]
    given = source.net_kg - transfer.line_kg
    begin = transfer.path.after(transfer.line_kg).temperature_k
    start = energy(source, given, begin) + energy(receiver, receiver.net_kg, receiver.temperature_k)
    end = energy(source, given - moved, course.source_k[-1]) + energy(
        receiver, receiver.net_kg + moved, course.receiver_k[-1]
    )
    heat = course.heat_in_source_j + course.heat_in_receiver_j
    assert end - start == pytest.approx(heat, abs=1e-6 * max(abs(heat), moved * 3e5))
    if leaks == "none":
        assert heat == pytest.approx(0.0, abs=1e-6 * moved * 3e5)


def test_a_path_looked_at_later_begins_where_it_began():
    path = Transfer(Vessel(0.029, 500.0, 16.17122974098339, 273.15), bottle()).path
    first = path.after(0.0).energy_given_j
    path.after(1.0)
    assert path.after(0.0).energy_given_j == pytest.approx(first, abs=1e-3)


@pytest.mark.parametrize("exchange", [0.0, 60.0, 1e4])
def test_zones_keep_all_that_arrives_and_agree_with_their_states(exchange):
    receiver = bottle(10, net=0.5)
    filling = Filling(receiver, None, exchange)
    zones, joules, kilograms = filling.start, 0.0, 0.0
    for step in range(30):
        zones = filling.after(zones, 0.12, 0.12 * 2.4e5, 1.0 + step, zones.pressure_pa)
        joules, kilograms = joules + 0.12 * 2.4e5, kilograms + 0.12
        assert zones.pool_m3 + zones.above_m3 == pytest.approx(receiver.volume_m3, rel=1e-12)
        assert zones.pool_kg + zones.above_kg == pytest.approx(0.5 + kilograms, rel=1e-12)
        assert zones.energy_j - filling.start.energy_j == pytest.approx(joules, rel=1e-6)
        inside = pressure_and_energy(zones.above_m3, zones.above_kg, zones.temperature_k)[1]
        assert inside + receiver.wall_j_k * zones.temperature_k == pytest.approx(zones.above_j, rel=1e-6)
        assert zones.pool_k <= zones.temperature_k + 1e-6
    if exchange == 1e4:
        assert zones.pool_k == pytest.approx(zones.temperature_k, abs=0.05)


def test_heat_from_a_room_is_what_the_difference_passes():
    receiver = bottle(-20, net=2.0)
    course = transient(
        Transfer(supply(4.0, -30.0), receiver), LIMIT,
        Setting(exchange_w_k=inf, receiver_around=Around(293.15, 2.0), within_s=3600.0),
    )  # fmt: skip
    # Nothing flows towards the warmer bottle: it warms alone, by Newton's law.
    assert course.moved_kg[-1] == 0.0
    mean = np.diff(course.seconds) @ (293.15 - course.receiver_k[1:])
    assert course.heat_in_receiver_j == pytest.approx(2.0 * mean, rel=1e-6)


def test_time_meets_plain_stepping_by_short_steps():
    source, receiver = CASES["level"]
    transfer = Transfer(source, receiver)
    area = effective_area()
    moved = seconds = 0.0
    while moved < 0.9 * transfer.mixed_free_kg():
        given = transfer.path.after(moved)
        _, behind = transfer.mixed_receiver(moved)
        moved += 0.05 * line_flow(area, engine().saturation(given.temperature_k)[1], given.temperature_k, behind)
        seconds += 0.05
    course = transient(transfer, LIMIT, QUICK)
    assert course.seconds_to_90 == pytest.approx(seconds, rel=5e-3)


@pytest.mark.parametrize("leaks", LEAKS)
@pytest.mark.parametrize("name", ["chilled", "level", "part filled"])
def test_half_the_step_changes_little(name, leaks):
    transfer = Transfer(*CASES[name])
    coarse, fine = (transient(transfer, LIMIT, Setting(steps=steps, **LEAKS[leaks])) for steps in (40, 80))
    assert coarse.moved_kg[-1] == pytest.approx(fine.moved_kg[-1], rel=2e-3, abs=2e-3)
    assert coarse.seconds_to_90 == pytest.approx(fine.seconds_to_90, rel=0.05)


def test_a_colder_receiver_fills_faster():
    times = [transient(Transfer(supply(), bottle(celsius)), 3.0).seconds_to_limit for celsius in (-30, -10, 5)]
    assert times == sorted(times)
    assert times[0] < 0.9 * times[-1]


def test_a_longer_and_a_narrower_hose_are_slower():
    common, long, narrow, shut = (
        effective_area(),
        effective_area(length_m=10.0),
        effective_area(bore_m=0.003),
        effective_area(opening=0.25),
    )
    assert max(long, narrow, shut) < common
    times = [
        transient(Transfer(supply(), bottle(-10)), LIMIT, Setting(cd_area_m2=area)).seconds_to_90
        for area in (common, long, narrow, shut)
    ]
    assert min(times[1:]) > 1.1 * times[0]


def test_without_exchange_time_goes_as_one_over_the_line():
    times = [
        transient(Transfer(supply(), bottle(-10)), LIMIT, Setting(cd_area_m2=area, exchange_w_k=inf)).seconds[-1]
        for area in (1e-6, 2e-6)
    ]
    assert times[0] == pytest.approx(2.0 * times[1], rel=1e-9)


def test_a_bath_lets_more_in_than_no_bath():
    bath = transient(Transfer(supply(), bottle(15)), ABOVE, Setting(receiver_around=Around(273.15, 50.0)))
    assert bath.moved_kg[-1] > transient(Transfer(supply(), bottle(15)), ABOVE).moved_kg[-1] + 0.5
    assert bath.seconds_to_90 > 0.0


def test_a_freezer_opens_a_flow_that_pressures_alone_refuse():
    source, receiver = supply(19.0, 10.0), bottle(25.0, net=3.0)
    assert transient(Transfer(source, receiver), LIMIT).stopped_by == "no pressure difference"
    chilled = transient(Transfer(source, receiver), LIMIT, Setting(receiver_around=Around(253.15, 10.0)))
    assert chilled.stopped_by == "fill limit"
    assert chilled.seconds_to_limit > 60.0


def test_the_supplys_liquid_ends_inside_no_step():
    source, receiver = CASES["liquid runs out"]
    dry = Transfer(source, receiver).path.dry_out()
    course = transient(Transfer(source, receiver), LIMIT, QUICK)
    assert np.min(np.abs(course.moved_kg - dry)) < 1e-6


def test_a_bottle_full_of_liquid_that_goes_on_warming_is_refused():
    source = Vessel(0.043, 2000.0, 25.56, 316.9, 0.0, False)
    receiver = Vessel(0.0005, 5000.0, 0.0, 266.9, 0.17)
    with pytest.raises(OutOfRange) as refusal:
        transient(Transfer(source, receiver), 0.45, Setting(receiver_around=Around(309.52, 200.0)))
    assert refusal.value.code == "receiver_bursts"


def test_time_that_is_up_ends_it():
    course = transient(Transfer(supply(), bottle(-10)), LIMIT, Setting(within_s=10.0))
    assert course.stopped_by == "time is up"
    assert course.seconds[-1] == pytest.approx(10.0)
    assert course.seconds_to_limit is None
    assert 0.0 < course.moved_kg[-1] < LIMIT


@pytest.mark.parametrize("name", ["level", "liquid runs out", "through the critical point", "no dip tube"])
def test_next_to_no_leak_is_no_leak(name):
    source, receiver = CASES[name]
    none = transient(Transfer(source, receiver), ABOVE, QUICK)
    around = Around(source.temperature_k, 1e-6)
    little = transient(Transfer(source, receiver), ABOVE, Setting(exchange_w_k=inf, source_around=around))
    # The supply stepped with its wall and leak, beside the same supply's closed path.
    assert little.moved_kg[-1] == pytest.approx(none.moved_kg[-1], rel=2e-3, abs=2e-3)
    assert little.source_k[-1] == pytest.approx(none.source_k[-1], abs=0.05)
    assert little.seconds_to_90 == pytest.approx(none.seconds_to_90, rel=0.02)


def test_what_the_dip_tube_does_not_reach_leaves_as_vapour_with_a_leak_too():
    source = supply(8.0, below_tube_m3=0.004)
    courses = [
        transient(Transfer(source, bottle(-20)), ABOVE, Setting(exchange_w_k=inf, source_around=around))
        for around in (None, Around(293.15, 1e-6))
    ]
    for course in courses:
        assert course.liquid_out
        assert course.moved_kg[-1] < transient(Transfer(supply(8.0), bottle(-20)), ABOVE, QUICK).moved_kg[-1]
    assert courses[0].moved_kg[-1] == pytest.approx(courses[1].moved_kg[-1], rel=2e-3, abs=2e-3)


TEMPERATURES = st.floats(-40.0, 52.0) | st.sampled_from([36.37, 36.3707, 36.4])
AROUND = st.none() | st.builds(
    lambda celsius, leak: Around(celsius + 273.15, leak),
    TEMPERATURES,
    st.sampled_from([0.0, 0.5, 5.0, 200.0, 1e6, inf]),
)


@settings(max_examples=times(60), deadline=None)
@given(
    st.builds(
        lambda litres, fill, celsius, wall, pickup: (litres / 1e3, wall, fill * litres, celsius + 273.15, 0.0, pickup),
        st.sampled_from([3.4, 29.0]), st.floats(0.0, 0.85), TEMPERATURES, st.floats(500.0, 30000.0), st.booleans(),
    ),
    st.builds(
        lambda litres, fill, celsius, wall: (litres / 1e3, wall, fill * litres, celsius + 273.15),
        st.sampled_from([0.5, 6.8]), st.floats(0.0, 0.85) | st.just(0.002), TEMPERATURES, st.floats(100.0, 8000.0),
    ),
    st.builds(
        lambda area, source, receiver, exchange: Setting(area, source, receiver, exchange, steps=20),
        st.sampled_from([2e-8, 1.4e-6, 1e-5]), AROUND, AROUND, st.sampled_from([0.0, 60.0, inf]),
    ),
)  # fmt: skip
def test_any_two_bottles_have_a_course(source, receiver, setting):
    try:
        transfer = Transfer(Vessel(*source), Vessel(*receiver), 2e-5)
        limit = 680.0 * receiver[0]
        courses = [transient(transfer, limit, setting), likely_course(transfer, limit, 0.4, setting.cd_area_m2)]
    except PhysicsError as refusal:
        assert refusal.code in ("pressure_range", "receiver_bursts")
        return
    for course in courses:
        for column in (course.seconds, course.moved_kg, course.flow_kg_s, course.source_pa, course.receiver_pa,
                       course.source_k, course.receiver_k):  # fmt: skip
            assert np.all(np.isfinite(column))
            assert np.all(column >= 0.0)
        assert np.all(np.diff(course.seconds) >= 0.0)
        assert np.all(np.diff(course.moved_kg) >= 0.0)
        assert course.moved_kg[-1] <= source[2] + 1e-9
        assert receiver[2] + course.moved_kg[-1] <= max(limit, receiver[2]) + 1e-9


@pytest.mark.parametrize(
    ("wrong", "code"),
    [
        (lambda: Setting(cd_area_m2=0.0), "hose"),
        (lambda: Setting(cd_area_m2=math.nan), "hose"),
        (lambda: Setting(within_s=0.0), "time"),
        (lambda: Around(293.15, -1.0), "leak"),
        (lambda: Around(150.0, 1.0), "surroundings"),
        (lambda: Around(math.nan, 1.0), "surroundings"),
        (lambda: effective_area(bore_m=0.0), "hose"),
        (lambda: effective_area(opening=0.0), "hose"),
        (lambda: transient(Transfer(supply(), bottle()), LIMIT, Setting(exchange_w_k=-1.0)), "exchange"),
        (lambda: likely_course(Transfer(supply(), bottle()), LIMIT, 1.5, 1e-6), "condensation"),
        (lambda: likely_course(Transfer(supply(), bottle()), LIMIT, 0.5, 0.0), "hose"),
    ],
)
def test_what_cannot_be_is_refused(wrong, code):
    with pytest.raises(OutOfRange) as refusal:
        wrong()
    assert refusal.value.code == code
