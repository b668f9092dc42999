"""Liquid below the dip tube's end: left behind as liquid, given as vapour."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.forecast import forecast
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import Transfer, held, line_loss, mixed, wall_condensing
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from bottles.physics.withdrawal import Adiabatic, Held
from shop.physics.fluid import saturation_at_temperature
from tests.examples import times
from tests.physics.stepping import step_mixed

LIMIT, VOLUME, WALL = 4.624, 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net=19.72, celsius=20.0, below=0.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, below_tube_m3=below, **other)


def vented(celsius=0.0):
    return start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=celsius + 273.15, start=Start())


def liquid_m3(vessel, left_kg, kelvin):
    side = saturation_at_temperature(kelvin)
    return (left_kg - side.vapour_density * vessel.volume_m3) / (side.liquid_density - side.vapour_density)


@pytest.mark.parametrize("below", [1e-4, 5e-4, 3e-3])
def test_liquid_is_drawn_until_only_what_lies_below_is_left(below):
    source = supply(9.0, below=below)
    path = Adiabatic(source)
    dry = path.dry_out()
    before, after = path.after(dry - 1e-5), path.after(dry + 1e-5)
    assert (before.liquid, after.liquid) == (True, False)
    assert liquid_m3(source, source.net_kg - dry, after.temperature_k) == pytest.approx(below, rel=1e-3)
    assert before.temperature_k == pytest.approx(after.temperature_k, abs=1e-3)
    assert before.pressure_pa == pytest.approx(after.pressure_pa, rel=1e-5)
    # What follows leaves as vapour: much more heat goes with each gram, the bottle cools faster.
    assert after.outlet_j_kg - before.outlet_j_kg > 1e5
    assert dry < Adiabatic(supply(9.0)).dry_out()


def test_a_tube_to_the_bottom_changes_nothing():
    for net, celsius in ((19.72, 20.0), (6.9, 0.0), (3.0, 10.0)):
        plain, named = Transfer(supply(net, celsius), vented(-10)), Transfer(supply(net, celsius, 0.0), vented(-10))
        for limit in (mixed, wall_condensing, held):
            assert limit(plain, LIMIT) == limit(named, LIMIT)


@pytest.mark.parametrize(("net", "below"), [(6.9, 1e-3), (7.5, 2e-3), (4.0, 3e-3)])
def test_the_quick_limit_meets_plain_stepping(net, below):
    source, receiver = supply(net, below=below), vented()
    told = mixed(Transfer(source, receiver), LIMIT)
    t1, p1, t2, p2 = step_mixed(source, receiver, told.moved_kg, 1500)
    assert told.liquid_out is True
    assert told.source_final_k == pytest.approx(t1, abs=0.05)
    assert told.receiver_final_k == pytest.approx(t2, abs=0.05)
    assert told.source_final_pa == pytest.approx(p1, rel=2e-3)
    assert told.receiver_final_pa == pytest.approx(p2, rel=2e-3)


@settings(max_examples=times(60), deadline=None)
@given(st.floats(2.0, 20.0), st.floats(-20.0, 45.0), st.floats(1e-5, 0.014), st.floats(-30.0, 20.0))
def test_mass_and_energy_are_conserved_past_the_tubes_end(net, celsius, below, receiver_c):
    source, receiver = supply(net, celsius, below), vented(receiver_c)
    told = mixed(Transfer(source, receiver), 1e3)

    def energy(vessel, mass, kelvin):
        return pressure_and_energy(vessel.volume_m3, mass, kelvin)[1] + vessel.wall_j_k * kelvin

    before = energy(source, net, source.temperature_k) + energy(receiver, receiver.net_kg, receiver.temperature_k)
    after = energy(source, told.source_left_kg, told.source_final_k) + energy(
        receiver, told.receiver_final_kg, told.receiver_final_k
    )
    assert told.moved_kg + told.source_left_kg == pytest.approx(net, rel=1e-12)
    assert after - before == pytest.approx(0.0, abs=0.4 * max(told.moved_kg, 0.01))  # 1e-6 of what moved


def test_the_cautious_limit_ends_at_the_tubes_end():
    source = supply(7.5, below=2e-3)
    told = wall_condensing(Transfer(source, vented()), LIMIT)
    assert (told.stopped_by, told.liquid_out) == ("source out of liquid", True)
    assert told.moved_kg == pytest.approx(Adiabatic(source).dry_out())
    assert told.moved_kg < wall_condensing(Transfer(supply(7.5), vented()), LIMIT).moved_kg


def test_kept_at_its_temperature_a_bottle_tells_the_same():
    below = 1.5e-3
    side = saturation_at_temperature(293.15)
    edge = side.vapour_density * (0.029 - below) + side.liquid_density * below
    path = Held(supply(9.0, below=below))
    assert path.has_liquid(9.0 - edge - 1e-4)
    assert not path.has_liquid(9.0 - edge + 1e-4)


def test_a_supply_with_its_liquid_below_the_tube_gives_vapour():
    side = saturation_at_temperature(293.15)
    source = supply(side.vapour_density * 0.029 + 0.3, below=1e-3)
    assert Adiabatic(source).dry_out() == 0.0
    assert Adiabatic(source).after(0.0).liquid is False
    assert line_loss(source, 5e-5) == pytest.approx(5e-5 * side.vapour_density)


def test_a_dense_fluid_that_cools_gives_liquid_down_to_the_tube():
    source = supply(13.0, 38.0, 1e-3)
    path = Adiabatic(source)
    dry = path.dry_out()
    end = path.after(dry)
    assert liquid_m3(source, source.net_kg - dry, end.temperature_k) == pytest.approx(1e-3, rel=1e-2)
    # Thinner than the critical density it turns wet as vapour: liquid gathers up to the tube first.
    thin = Adiabatic(supply(11.0, 38.0, 1e-3))
    assert 0.0 < thin.dry_out() < Adiabatic(supply(11.0, 38.0)).dry_out()


@pytest.mark.parametrize("celsius", [20.0, 38.0])
def test_more_below_the_tube_never_gives_more_liquid(celsius):
    ends = [Adiabatic(supply(12.5, celsius, below)).dry_out() for below in (0.0, 1e-4, 1e-3, 3e-3, 1e-2)]
    assert ends == sorted(ends, reverse=True)


def ask(source, receiver_c):
    return forecast(
        source=source, receiver_volume_m3=VOLUME, receiver_wall_j_k=WALL, receiver_temperature_k=receiver_c + 273.15,
        limit_kg=LIMIT,
    )  # fmt: skip


def test_the_forecast_says_so_where_it_matters():
    codes = {
        name: [code for code, _ in ask(source, 0.0).warnings]
        for name, source in {
            "plenty": supply(19.0, below=1e-3), "runs out": supply(7.5, below=2e-3), "to the bottom": supply(6.9),
            "below from the start": supply(5.0, below=3.5e-3),
        }.items()
    }  # fmt: skip
    assert [name for name, found in codes.items() if "left_below_tube" in found] == ["runs out", "below from the start"]


def test_the_least_supply_grows_by_what_the_tube_leaves():
    plain, short = ask(supply(), 0.0).least_source_kg, ask(supply(below=1e-3), 0.0).least_source_kg
    assert plain + 0.1 < short < plain + 1.0
    for more, stop in ((0.01, "fill limit"), (-0.01, "pressures equal")):
        source = replace(supply(below=1e-3), net_kg=short + more)
        assert mixed(Transfer(source, vented()), LIMIT).stopped_by == stop
