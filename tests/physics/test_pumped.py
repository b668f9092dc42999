"""A pumped refill and its stops, its balance, and the pump's own heat."""

from __future__ import annotations

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.pumped import DELIVERY_LIMIT, INLET_LIMIT, PumpPlate, pumped_refill
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import FILL_LIMIT, LIQUID_OUT
from bottles.physics.venting_filling import RECEIVER_FULL
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import saturation_at_temperature
from tests.examples import times

LIMIT = 4.624
VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net=19.72, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def into(celsius=20.0, kind="vented", net=None):
    return start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=celsius + 273.15, start=Start(kind, net))


def energy(vessel, mass, temperature):
    return pressure_and_energy(vessel.volume_m3, mass, temperature)[1] + vessel.wall_j_k * temperature


def codes(told):
    return [code for code, _ in told.warnings]


def test_a_pump_fills_what_pressure_alone_would_not():
    told = pumped_refill(supply(), into(20), LIMIT)
    assert told.quick.stopped_by == told.held.stopped_by == FILL_LIMIT
    assert told.quick.receiver_final_kg == pytest.approx(LIMIT)
    assert told.quick.receiver_final_pa > told.quick.source_final_pa
    assert {"never_dry", "never_dead_headed", "oil_free", "highest_unknown", "lowest_unknown"} <= set(codes(told))


@pytest.mark.parametrize(("celsius", "efficiency"), [(20.0, 0.5), (35.0, 0.2), (5.0, 0.9)])
def test_mass_and_energy_balance_with_the_pumps_heat(celsius, efficiency):
    source, receiver = supply(), into(celsius)
    told = pumped_refill(source, receiver, LIMIT, plate=PumpPlate(efficiency=efficiency))
    end = told.quick
    assert end.receiver_final_kg + end.source_left_kg == pytest.approx(source.net_kg + receiver.net_kg)
    before = energy(source, source.net_kg, source.temperature_k) + energy(
        receiver, receiver.net_kg, receiver.temperature_k
    )
    after = energy(source, end.source_left_kg, end.source_final_k) + energy(
        receiver, end.receiver_final_kg, end.receiver_final_k
    )
    assert after == pytest.approx(before + told.pump_heat_j, rel=1e-6)


def test_a_worse_pump_warms_more():
    heats = [
        pumped_refill(supply(), into(35), LIMIT, plate=PumpPlate(efficiency=e)).pump_heat_j for e in (0.8, 0.4, 0.1)
    ]
    assert heats == sorted(heats)
    assert heats[2] == pytest.approx(8 * heats[0], rel=0.1)


def test_it_stops_where_the_tube_is_out_of_the_liquid():
    told = pumped_refill(supply(7.0, below_tube_m3=1e-3), into(5), LIMIT)
    side = saturation_at_temperature(293.15)
    left = 1e-3 * side.liquid_density + 28e-3 * side.vapour_density
    assert told.held.stopped_by == LIQUID_OUT
    assert told.held.source_left_kg == pytest.approx(left, rel=1e-6)
    assert told.quick.stopped_by == LIQUID_OUT
    assert told.quick.liquid_out
    without = pumped_refill(supply(7.0), into(5), LIMIT)
    assert without.quick.moved_kg > told.quick.moved_kg


def test_the_plates_highest_delivery_pressure_ends_it():
    told = pumped_refill(supply(celsius=10.0), into(30, "own vapour"), LIMIT, plate=PumpPlate(6.0e6, 1e6))
    assert told.held.stopped_by == DELIVERY_LIMIT
    assert told.held.moved_kg == 0.0
    told = pumped_refill(supply(), into(20), 6.5, plate=PumpPlate(5.0e6, 1e6))
    assert told.quick.stopped_by == DELIVERY_LIMIT
    assert told.quick.receiver_final_pa == pytest.approx(5.0e6, rel=1e-3)


def test_the_plates_lowest_inlet_pressure_ends_it():
    told = pumped_refill(supply(), into(20), LIMIT, plate=PumpPlate(9e6, 4.9e6))
    assert told.quick.stopped_by == INLET_LIMIT
    assert told.quick.source_final_pa == pytest.approx(4.9e6, rel=1e-4)
    assert told.held.stopped_by == FILL_LIMIT
    assert told.low_kg == told.quick.moved_kg < told.high_kg == told.held.moved_kg
    assert pumped_refill(supply(), into(20), LIMIT, plate=PumpPlate(9e6, 6e6)).high_kg == 0.0


def test_a_limit_beyond_all_liquid_stops_short_of_it():
    told = pumped_refill(supply(), into(20), 6.5)
    assert told.quick.stopped_by == told.held.stopped_by == RECEIVER_FULL
    assert "full_of_liquid" in codes(told)


@pytest.mark.parametrize("source", [supply(3.0), supply(liquid_pickup=False), supply(0.0)])
def test_without_liquid_it_is_never_started(source):
    told = pumped_refill(source, into(20), LIMIT)
    assert told.high_kg == 0.0
    assert codes(told)[0] == "no_source_liquid"


def test_a_full_bottle_takes_nothing():
    told = pumped_refill(supply(), into(0, "weighed", 4.7), LIMIT)
    assert (told.high_kg, told.quick.stopped_by) == (0.0, FILL_LIMIT)
    assert codes(told)[0] == "receiver_full"


def test_figures_that_no_pump_has_are_refused():
    for wrong in ({"highest_pa": 0.0}, {"lowest_inlet_pa": 1e9}, {"efficiency": 0.0}):
        with pytest.raises(OutOfRange):
            PumpPlate(**wrong)
    with pytest.raises(OutOfRange):
        pumped_refill(supply(), into(20), 0.0)


@settings(max_examples=times(40), deadline=None)
@given(
    st.floats(0.0, 24.0), st.floats(-40.0, 52.0), st.floats(-40.0, 52.0), st.sampled_from(["vented", "own vapour", "air"]),
    st.sampled_from([None, 5e6, 1e7]), st.sampled_from([None, 2e6]), st.sampled_from([0.0, 5e-5]),
)  # fmt: skip
def test_any_pumped_refill_gets_an_answer(net, celsius, receiver, kind, highest, lowest, line):
    try:
        source = supply(net, celsius, below_tube_m3=4e-4)
    except PhysicsError:
        return
    told = pumped_refill(source, into(receiver, kind), LIMIT, plate=PumpPlate(highest, lowest), line_volume_m3=line)
    json.dumps(told.as_dict(), allow_nan=False)
    for end in (told.quick, told.held):
        assert 0.0 <= end.moved_kg <= LIMIT
        assert highest is None or end.moved_kg == 0.0 or end.receiver_final_pa <= highest * 1.001
        lost = told.line_loss_kg if end.moved_kg > 0.0 else 0.0
        assert end.source_left_kg + end.moved_kg + lost == pytest.approx(max(net, 1e-9), abs=1e-9)
