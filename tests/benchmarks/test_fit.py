"""The condensation figure fitted over a thousand refills, in bare flashes; and the page that shows it."""

from __future__ import annotations

import random
from dataclasses import replace

import pytest

from bottles.physics.condensation import between
from bottles.physics.fitting import Observation, fit
from bottles.physics.observing import Refilled, observe
from bottles.physics.receiver_start import Start
from bottles.physics.vessel import Vessel, wall_heat
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn
from tests.benchmarks.test_forecast import bare_flash

pytestmark = pytest.mark.benchmark

REFILLS = 1_000
# Two seconds on a core that makes a flash in twenty millionths of a second.
GOAL = 100_000
FIGURE, SPREAD = 0.6, 0.1


def refills(many: int) -> list[Refilled]:
    """Refills of a shop: three sizes, any temperature and supply, and what came by the planted figure."""
    chance = random.Random(2026)
    found = []
    for _ in range(many):
        litres = chance.choice([3.4, 6.8, 10.2])
        one = Refilled(
            source=Vessel(0.029, wall_heat("steel", 32.0), chance.uniform(6.0, 19.0), 273.15 + chance.uniform(15, 26)),
            receiver_volume_m3=litres / 1000, receiver_wall_j_k=wall_heat("aluminium", 0.87 * litres),
            receiver_temperature_k=273.15 + chance.uniform(-18, 12), start=Start("weighed", 0.05 * litres), moved_kg=1.0,
            moved_error_kg=0.03, line_volume_m3=2.7e-5, source_error_kg=0.03, start_error_kg=0.03,
        )  # fmt: skip
        found.append(one)
    return found


def learned(rows: list[Refilled]) -> list[Observation]:
    told = [(row, observe(row)) for row in rows]
    return [
        Observation(one.figure, one.deviation, False, "dip", round(row.receiver_volume_m3 * 1e6))
        for row, one in told
        if not one.silent
    ]


def poured(rows: list[Refilled]) -> list[Refilled]:
    """The same refills with what came by the planted figure."""
    chance = random.Random(7)
    found = []
    for row in rows:
        told = observe(row)
        if not told.silent:
            found.append(replace(row, moved_kg=between(told.slow_kg, told.quick_kg, chance.gauss(FIGURE, SPREAD))))
    return found


def test_a_fit_over_a_thousand_refills_costs_few_bare_flashes(tell: Told) -> None:
    rows = poured(refills(REFILLS + 100))[:REFILLS]
    assert len(rows) == REFILLS
    whole = fit(learned(rows))[1]
    assert whole.way == "dip" and whole.figure == pytest.approx(FIGURE, abs=0.03)
    seen = learned(rows)
    measured = in_turn(
        {"flash": bare_flash(), "recomputed and fitted": lambda: fit(learned(rows)), "fitted": lambda: fit(seen)},
        rounds=3, calls={"flash": 2_000, "recomputed and fitted": 1, "fitted": 3},
    )  # fmt: skip
    tell("fit, 1,000 refills from their readings", measured, "recomputed and fitted", beside="flash", goal=GOAL)
    tell("fit, the sum on the grid alone", measured, "fitted", beside="flash")
