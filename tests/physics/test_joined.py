"""Two joined bottles: which gives, which takes, and when that is too much."""

from __future__ import annotations

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.joined import FIRST, SECOND, joined
from bottles.physics.joining import Transfer
from bottles.physics.transfer import EQUAL, LIQUID_OUT, mixed
from bottles.physics.venting_filling import RECEIVER_FULL
from bottles.physics.vessel import Vessel, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import saturation_at_temperature
from tests.examples import times

SMALL, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net=19.72, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def small(net=3.0, celsius=0.0, **other):
    return Vessel(SMALL, WALL, net, celsius + 273.15, **other)


def codes(told):
    return [code for code, _ in told.warnings]


def test_the_warmer_gives_until_the_colder_is_full_of_liquid():
    told = joined(supply(), small(), limits_kg=(19.72, 4.624))
    assert told.flows_from == FIRST
    full = saturation_at_temperature(273.15).liquid_density * SMALL
    assert told.long.ends_by == RECEIVER_FULL
    assert told.long.full_of_liquid
    assert told.long.outcome.receiver_final_kg == pytest.approx(full, rel=0.02)  # squeezed a little
    assert told.long.over_limit_kg == pytest.approx(told.long.outcome.receiver_final_kg - 4.624)
    assert told.long.full_at_k <= 273.15
    assert codes(told)[:3] == ["passes_limit", "full_of_liquid", "close_valves"]


def test_the_quick_end_is_that_of_a_transfer_without_a_limit():
    told = joined(supply(), small(0.3, 20.0))
    assert told.quick.outcome == mixed(Transfer(supply(), small(0.3, 20.0)), 1e5)
    assert "limit_unknown" in codes(told)


def test_a_small_warm_bottle_runs_dry_into_a_large_cold_one():
    told = joined(supply(5.0, 0.0), small(3.0, 25.0), limits_kg=(19.72, 4.624))
    assert told.flows_from == SECOND
    assert told.long.ends_by == LIQUID_OUT
    assert told.long.outcome.receiver_final_kg > 7.0
    assert told.long.over_limit_kg == 0.0
    assert "later" in codes(told)


def test_a_warm_bottle_of_vapour_takes_from_a_colder_one_with_liquid():
    told = joined(small(0.1, 40.0), supply())
    assert told.flows_from == SECOND
    assert told.long.ends_by == EQUAL


def test_the_order_in_which_they_are_named_changes_nothing():
    there, back = joined(supply(), small()), joined(small(), supply())
    assert (there.flows_from, back.flows_from) == (FIRST, SECOND)
    assert there.quick == back.quick
    assert there.long == back.long


@pytest.mark.parametrize(("liquid", "phase"), [(True, "liquid"), (False, "vapour")])
def test_either_phase_goes_over_by_the_tube_and_as_much_in_the_end(liquid, phase):
    told = joined(supply(liquid_pickup=liquid), small())
    assert told.phase == phase
    assert ("vapour" in codes(told)) is not liquid  # how slowly vapour goes over is worth a sentence
    assert told.long.outcome.moved_kg == pytest.approx(joined(supply(), small()).long.outcome.moved_kg, rel=1e-6)


def test_at_one_temperature_nothing_flows():
    told = joined(supply(celsius=15.0), small(celsius=15.0))
    assert told.flows_from is told.phase is told.quick is told.long is None
    assert codes(told)[0] == "equal"


def test_limits_and_lines_out_of_range_are_refused():
    for wrong in ({"limits_kg": (None, 0.0)}, {"line_volume_m3": -1.0}):
        with pytest.raises(OutOfRange):
            joined(supply(), small(), **wrong)


@settings(max_examples=times(40), deadline=None)
@given(
    st.floats(0.0, 24.0), st.floats(-40.0, 52.0), st.floats(0.0, 6.5), st.floats(-40.0, 52.0), st.booleans(),
    st.sampled_from([0.0, 5e-4]),
)  # fmt: skip
def test_any_two_bottles_get_an_answer_that_keeps_the_mass(net, celsius, other, colder, liquid, line):
    try:
        pair = supply(net, celsius, liquid_pickup=liquid), small(other, colder)
    except PhysicsError:
        return
    told = joined(*pair, limits_kg=(19.72, 4.624), line_volume_m3=line)
    json.dumps(told.as_dict(), allow_nan=False)
    for passing in (told.quick, told.long):
        if passing is not None:
            outcome = passing.outcome
            assert outcome.moved_kg >= 0.0
            assert outcome.receiver_final_kg + outcome.source_left_kg <= net + other + 1e-6
