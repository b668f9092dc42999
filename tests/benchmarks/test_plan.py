"""The day's fill plan for 20 bottles and 4 supply bottles, in bare flashes; a small day planned exactly beside it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from bottles.rules.planning.exact import best_plan
from bottles.rules.planning.heuristic import good_plan
from bottles.rules.planning.problem import Day, Source, Start, Waiting
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn, spoken
from tests.benchmarks.test_forecast import bare_flash

pytestmark = pytest.mark.benchmark

HOUR = 3600
SIZES = ((3.4e-3, 3.0), (6.8e-3, 5.9), (10e-3, 8.2), (13.4e-3, 10.5))  # m3, kg of aluminium
# 2 s of one core, at some 13 microseconds a flash.
GOAL = 150_000


def a_day(bottles: int, sources: tuple[float, ...]) -> Day:
    """No two bottles alike, as tares differ; supply bottles from full to all but empty."""
    waiting = []
    for number in range(bottles):
        volume, kilograms = SIZES[number % 4]
        limit = 680 * volume
        chill = int(2_400 * (volume / 6.8e-3) ** (1 / 3))
        starts = (Start(293.15), Start(275.15, 0, chill), Start(258.15, 0, int(2.5 * chill)))
        promised = (number + 2) * HOUR // 2 if number % 3 else None
        wall, held = 896 * kilograms * (1 + 0.01 * (number % 7)), limit * 0.03 * (number % 10)
        waiting.append(Waiting(f"T-{number}", volume, wall, held, limit, starts, promised))
    supplies = tuple(
        Source(f"S-{number}", 0.029, 15_040.0, net, 293.15, number if number < 2 else None, line_m3=4e-5)
        for number, net in enumerate(sources)
    )
    return Day(tuple(waiting), supplies, (0, 0), 9 * HOUR, people=2, slots=(6,))


def test_twenty_bottles_and_four_supply_bottles_are_planned_within_two_seconds(tell: Told) -> None:
    large, small = a_day(20, (19.7, 13.0, 6.0, 19.7)), a_day(3, (19.7, 13.0, 6.0))
    flash = bare_flash()

    def flashes() -> None:
        for _ in range(20_000):
            flash()

    jobs: dict[str, Callable[[], Any]] = {
        "20,000 flashes": flashes, "large": lambda: good_plan(large), "small": lambda: best_plan(small),
    }  # fmt: skip
    measured = in_turn(jobs, rounds=3)
    for name, words in (("large", "plan: 20 bottles, 4 supply bottles"), ("small", "plan: 3 bottles, 3 supply bottles, exact")):
        tell(f"{words} ({spoken(measured.seconds(name))})", measured, name, beside="20,000 flashes", goal=GOAL / 20_000)
    assert best_plan(small).exact
    assert good_plan(large).good >= 8
