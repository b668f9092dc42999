"""Compare jobs in one run: in turn, round after round, so that a machine's mood meets all of them.

A ratio is the median over the rounds of the ratio within a round; times are medians, printed, never
asserted.
"""

from __future__ import annotations

import gc
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from statistics import median
from typing import Any

Job = Callable[[], Any]


@dataclass(frozen=True)
class Measured:
    """What the rounds said of each job, in seconds a call."""

    rounds: Mapping[str, list[float]]

    def seconds(self, name: str) -> float:
        return median(self.rounds[name])

    def ratio(self, name: str, to: str) -> float:
        return median(one / other for one, other in zip(self.rounds[name], self.rounds[to], strict=True))


def in_turn(
    jobs: Mapping[str, Job], *, rounds: int, calls: int | Mapping[str, int] = 1, clock: Callable[[], float] = time.process_time
) -> Measured:  # fmt: skip
    """Do each job some calls in each round; the first round, which fills caches, isn't counted."""
    times: dict[str, list[float]] = {name: [] for name in jobs}
    for number in range(rounds + 1):
        for name, job in jobs.items():
            many = calls if isinstance(calls, int) else calls[name]
            gc.collect(0)
            began = clock()
            for _ in range(many):
                job()
            spent = (clock() - began) / many
            if number:
                times[name].append(spent)
    return Measured(times)


def spoken(seconds: float) -> str:
    """A time in the unit that suits it."""
    for size, unit in ((1.0, "s"), (1e-3, "ms"), (1e-6, "µs")):
        if seconds >= size:
            return f"{seconds / size:.3g} {unit}"
    return f"{seconds * 1e9:.3g} ns"
