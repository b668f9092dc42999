"""Vapour let out while filling: the least of it, in balance, beside plain stepping."""

from __future__ import annotations

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.joining import Transfer
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.venting_filling import vent_while_filling
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from tests.examples import times
from tests.physics.stepping import outlet, saturation_at_temperature, settled, state_by_density_temperature

LIMIT = 4.624
VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net=19.72, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def into(celsius, kind="vented", net=None, wall=WALL):
    return start_vessel(volume_m3=VOLUME, wall_j_k=wall, temperature_k=celsius + 273.15, start=Start(kind, net))


def energy(vessel, mass, temperature):
    return pressure_and_energy(vessel.volume_m3, mass, temperature)[1] + vessel.wall_j_k * temperature


def codes(told):
    return [code for code, _ in told.warnings]


@pytest.mark.parametrize(
    ("source", "receiver"),
    [
        (supply(), into(20)), (supply(), into(45)), (supply(12.0, 5.0), into(15)), (supply(19.0, 30.0), into(35)),
        (supply(15.0, 10.0), into(40, "own vapour")), (supply(9.0, 20.0), into(25, "weighed", 0.8)),
    ],
)  # fmt: skip
def test_mass_and_energy_balance_to_a_millionth(source, receiver):
    told = vent_while_filling(Transfer(source, receiver), LIMIT)
    assert told.vented_kg > 0.0
    before = source.net_kg + receiver.net_kg
    assert told.receiver_final_kg + told.source_left_kg + told.vented_kg == pytest.approx(before, rel=1e-9)
    joules = energy(source, source.net_kg, source.temperature_k) + energy(
        receiver, receiver.net_kg, receiver.temperature_k
    )
    after = energy(source, told.source_left_kg, told.source_final_k) + energy(
        receiver, told.receiver_final_kg, told.receiver_final_k
    )
    assert after + told.vented_j == pytest.approx(joules, rel=1e-6)
    pressures = [
        pressure_and_energy(each.volume_m3, mass, t)[0]
        for each, mass, t in (
            (source, told.source_left_kg, told.source_final_k), (receiver, told.receiver_final_kg, told.receiver_final_k),
        )
    ]  # fmt: skip
    assert pressures == pytest.approx([told.final_pa] * 2, rel=1e-5)


def test_it_agrees_with_plain_stepping():
    """Both bottles stepped by the whole equation: so much given, vapour let out to equal pressures."""
    source, receiver = supply(), into(20)
    transfer = Transfer(source, receiver)
    told = vent_while_filling(transfer, LIMIT)
    plain = transfer.mixed_free_kg()
    # Where the plain transfer ends both are saturated: one temperature, found by halving.
    m1, m2 = source.net_kg - plain, receiver.net_kg + plain
    t = transfer.mixed_receiver(plain)[0]
    one, two = (state_by_density_temperature(m / each.volume_m3, t) for m, each in ((m1, source), (m2, receiver)))
    e1, e2 = m1 * one.energy + source.wall_j_k * t, m2 * two.energy + receiver.wall_j_k * t
    vented, steps = 0.0, 30
    share = (told.moved_kg - plain) / steps
    t1 = t2 = t
    for _ in range(steps):
        h = outlet(source.volume_m3, m1, one, latched=False)[0]
        half = settled(source.volume_m3, source.wall_j_k, m1 - share / 2, e1 - h * share / 2, t1)[1]
        h = outlet(source.volume_m3, m1 - share / 2, half, latched=False)[0]
        m1, e1, m2, e2 = m1 - share, e1 - h * share, m2 + share, e2 + h * share
        t1, one = settled(source.volume_m3, source.wall_j_k, m1, e1, t1)
        low, high = 0.0, share
        h_before = saturation_at_temperature(t2).vapour_enthalpy
        for _ in range(26):
            out = 0.5 * (low + high)
            h_out = 0.5 * (h_before + saturation_at_temperature(t1).vapour_enthalpy)
            t2, two = settled(VOLUME, WALL, m2 - out, e2 - out * h_out, t1)
            low, high = (out, high) if two.pressure_pa > one.pressure_pa else (low, out)
        m2, e2, vented = m2 - out, e2 - out * h_out, vented + out
    assert vented == pytest.approx(told.vented_kg, abs=2e-4)
    assert m2 == pytest.approx(LIMIT, abs=1e-3)
    assert t2 == pytest.approx(told.receiver_final_k, abs=0.02)


def test_it_is_the_least_that_fills():
    told = vent_while_filling(Transfer(supply(), into(20)), LIMIT)
    assert told.fills
    assert told.receiver_final_kg == pytest.approx(LIMIT, abs=1e-6)
    less = vent_while_filling(Transfer(supply(), into(20)), LIMIT - 0.2)
    assert less.vented_kg < told.vented_kg
    assert told.slow_vented_kg > told.vented_kg


def test_where_it_fills_anyway_nothing_needs_to_be_vented():
    told = vent_while_filling(Transfer(supply(), into(-10)), LIMIT)
    assert (told.vented_kg, told.fills) == (0.0, True)
    assert "nothing_to_vent" in codes(told)


def test_a_supply_that_runs_out_gives_what_there_is_and_says_so():
    told = vent_while_filling(Transfer(supply(8.0), into(20)), LIMIT)
    assert not told.fills
    assert told.gain_kg > 0.0
    assert "never_full" in codes(told)


def test_a_bottle_that_stands_above_the_supply_is_vented_down_first():
    transfer = Transfer(supply(celsius=5.0), into(30, "own vapour"))
    assert transfer.mixed_free_kg() == 0.0
    told = vent_while_filling(transfer, LIMIT)
    assert told.fills
    assert told.vented_kg > 0.5


def test_air_and_a_supply_without_liquid_are_said():
    assert codes(vent_while_filling(Transfer(supply(), into(25, "air")), LIMIT)) == ["air"]
    assert codes(vent_while_filling(Transfer(supply(3.0), into(25)), LIMIT)) == ["no_source_liquid"]
    assert codes(vent_while_filling(Transfer(supply(24.0, 50.0), into(52, "weighed", 3.0)), 6.2)) == ["near_critical"]


@settings(max_examples=times(40), deadline=None)
@given(
    st.floats(0.0, 22.0), st.floats(-40.0, 52.0), st.floats(-40.0, 52.0), st.sampled_from(["vented", "own vapour"]),
    st.sampled_from([0.0, 600.0, WALL]), st.sampled_from([1.0, LIMIT, 6.2]),
)  # fmt: skip
def test_any_pair_gets_an_answer_in_balance(net, celsius, receiver, kind, wall, limit):
    transfer = Transfer(supply(net, celsius), into(receiver, kind, wall=wall))
    told = vent_while_filling(transfer, limit)
    json.dumps(told.as_dict(), allow_nan=False)
    assert told.vented_kg >= 0.0
    total = transfer.source.net_kg + transfer.receiver.net_kg
    assert told.receiver_final_kg + told.source_left_kg + told.vented_kg == pytest.approx(total, abs=1e-9)
