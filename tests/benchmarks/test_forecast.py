"""One complete forecast, in bare flashes and beside plain stepping by CoolProp's high-level calls."""

from __future__ import annotations

from collections.abc import Callable
from statistics import median
from typing import Any

import pytest

from bottles.physics.forecast import Forecast, forecast
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.vessel import Vessel, wall_heat
from tests.benchmarks import stepping
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn

pytestmark = pytest.mark.benchmark

# A 6.8 L aluminium bottle from a 29 L steel one: the limit is 68 % of 6.8 kg of water.
LIMIT = 4.624
VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)
CASES: dict[str, dict[str, Any]] = {
    "chilled, full supply": {"bottle": -12},
    "level, full supply": {"bottle": 20},
    "cooled, with a rest in it": {"bottle": 0, "start": Start("weighed", 0.579)},
    "chilled, with a long hose": {"bottle": -10, "line_volume_m3": 5e-5},
    "cooled, supply a third full": {"net": 6.9, "bottle": 0},
    "warmed supply": {"supply": 30, "bottle": 5},
    "supply above critical": {"supply": 45, "bottle": 20},
    "supply of vapour": {"net": 3.0, "bottle": 0},
    "never purged": {"bottle": 10, "start": Start("air")},
    "supply never weighed": {"bottle": -10, "source_range_kg": (4.58, 19.72)},
}
GOAL, WORST = 150, 500  # bare flashes, of the median case and of any


def ask(*, net: float = 19.72, supply: float = 20.0, bottle: float, **more: Any) -> Forecast:
    return forecast(
        source=Vessel(0.029, wall_heat("steel", 32.0), net, supply + 273.15), receiver_volume_m3=VOLUME,
        receiver_wall_j_k=WALL, receiver_temperature_k=bottle + 273.15, limit_kg=LIMIT, **more,
    )  # fmt: skip


def bare_flash() -> Callable[[], None]:
    """A flash by density and energy where there are two phases, by CoolProp's low level."""
    from CoolProp import CoolProp

    state = CoolProp.AbstractState("HEOS", "NitrousOxide")
    state.update(CoolProp.DmassT_INPUTS, 400.0, 290.0)
    energy = state.umass()
    assert 0.0 < state.Q() < 1.0
    return lambda: state.update(CoolProp.DmassUmass_INPUTS, 400.0, energy)


def test_a_forecast_costs_few_bare_flashes(tell: Told) -> None:
    jobs: dict[str, Callable[[], Any]] = {name: lambda case=case: ask(**case) for name, case in CASES.items()}
    calls = dict.fromkeys(jobs, 5) | {"flash": 300}
    measured = in_turn({"flash": bare_flash()} | jobs, rounds=15, calls=calls)
    ratios = [tell(f"forecast: {name}", measured, name, beside="flash", goal=GOAL, worst=WORST) for name in CASES]
    assert median(ratios) <= 2 * GOAL


def test_a_forecast_is_a_hundred_times_faster_than_plain_stepping(tell: Told) -> None:
    """The peer answers less: neither the warmest start nor the least supply nor the fills left."""
    receiver = start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=293.15, start=Start())
    source = stepping.Bottle(0.029, wall_heat("steel", 32.0), 19.72, 293.15)
    into = stepping.Bottle(VOLUME, WALL, receiver.net_kg, 293.15)
    ours, peer = ask(bottle=20), stepping.told(source, into)
    # One accuracy: a thousandth of the limit for the quick limit, the model's own 2 % for the slow one.
    assert peer.mixed == pytest.approx(ours.mixed.moved_kg, abs=1e-3 * LIMIT)
    assert peer.wall_condensing == pytest.approx(ours.wall_condensing.moved_kg, abs=0.02 * LIMIT)
    assert peer.held == pytest.approx(ours.held.moved_kg, abs=LIMIT / stepping.STEPS * 2)
    widths = dict(ours.width)
    for name, worth in peer.readings.items():
        assert worth == pytest.approx(widths[name], abs=0.005 * LIMIT)
    measured = in_turn(
        {"forecast": lambda: ask(bottle=20), "plain stepping": lambda: stepping.told(source, into),
         "one limit stepped": lambda: stepping.mixed(source, into)},
        rounds=5, calls={"forecast": 20, "plain stepping": 1, "one limit stepped": 1},
    )  # fmt: skip
    tell("forecast: level, full supply", measured, "forecast", beside="one limit stepped", faster=True)
    tell("forecast: level, full supply", measured, "forecast", beside="plain stepping", goal=100, faster=True)
