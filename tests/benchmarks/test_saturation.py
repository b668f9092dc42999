"""Saturated states: in arrays, from the table, and asked of the equation of state one by one."""

from __future__ import annotations

import numpy as np
import pytest

from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_curves import boiling_temperatures, saturated_states
from shop.physics.saturation_table import saturated
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import Measured, in_turn

pytestmark = pytest.mark.benchmark

POINTS = 1_000
KELVIN = np.linspace(T_TRIPLE, T_SATURATION_MAX, POINTS)
PASCAL = saturated_states(KELVIN[1:-1]).pressure_pa  # the very ends, rounded, lie outside
ONE_BY_ONE = [float(t) for t in KELVIN]


def test_many_states_at_once_cost_a_fraction_of_single_calls(tell: Told) -> None:
    alone = engine()
    measured = in_turn(
        {
            "arrays": lambda: saturated_states(KELVIN),
            "arrays, by pressure": lambda: boiling_temperatures(PASCAL),
            "table": lambda: [saturated(t) for t in ONE_BY_ONE],
            "single calls": lambda: [alone.saturation(t) for t in ONE_BY_ONE],
            "single calls, by pressure": lambda: [alone.boiling_temperature(float(p)) for p in PASCAL],
        },
        rounds=9, calls=5,
    )  # fmt: skip
    each = Measured({name: [seconds / POINTS for seconds in rounds] for name, rounds in measured.rounds.items()})
    tell("a saturated state of a thousand", each, "arrays", beside="single calls", goal=10, faster=True)
    tell("a boiling temperature of a thousand", each, "arrays, by pressure", beside="single calls, by pressure",
         goal=4, faster=True)  # fmt: skip
    tell("a saturated state from the table", each, "table", beside="single calls")
