"""The record of a transfer's course over time."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Course:
    """Both bottles over time, how long it takes, and what ended it.

    `receiver_k` is the vapour and the wall; `liquid_k` is the pool below it, where it's followed
    on its own. Heat that came in counts from the moment that the line was full. `flow_between`
    is how much less and more than the flow told may flow, half way.
    """

    seconds: Array
    moved_kg: Array
    flow_kg_s: Array
    source_pa: Array
    receiver_pa: Array
    source_k: Array
    receiver_k: Array
    liquid_k: Array | None
    stopped_by: str
    liquid_out: bool
    seconds_to_90: float | None
    seconds_to_limit: float | None
    flow_between: tuple[float, float]
    heat_in_source_j: float | None = None
    heat_in_receiver_j: float | None = None

    @property
    def seconds_to_90_between(self) -> tuple[float, float] | None:
        """Shortest and longest time to 90 %, by the range of the flow."""
        if self.seconds_to_90 is None:
            return None
        least, most = self.flow_between
        return self.seconds_to_90 / most, self.seconds_to_90 / least

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON; pressures absolute."""
        between = self.seconds_to_90_between
        return {
            "seconds": self.seconds.tolist(),
            "moved_kg": self.moved_kg.tolist(),
            "flow_kg_s": self.flow_kg_s.tolist(),
            "source_bar": (self.source_pa / 1e5).tolist(),
            "receiver_bar": (self.receiver_pa / 1e5).tolist(),
            "source_c": (self.source_k - 273.15).tolist(),
            "receiver_c": (self.receiver_k - 273.15).tolist(),
            "receiver_liquid_c": None if self.liquid_k is None else (self.liquid_k - 273.15).tolist(),
            "stopped_by": self.stopped_by,
            "liquid_out": self.liquid_out,
            "minutes_to_90_percent": None if self.seconds_to_90 is None else self.seconds_to_90 / 60.0,
            "minutes_to_90_percent_between": None if between is None else [time / 60.0 for time in between],
            "minutes_to_limit": None if self.seconds_to_limit is None else self.seconds_to_limit / 60.0,
        }


def seconds_until(seconds: Array, moved_kg: Array, share: float) -> float | None:
    """Time at which a share of what goes over has gone.

    Parameters
    ----------
    seconds : Array, the course's times, rising [s]
    moved_kg : Array, what has gone over by then, never falling [kg]
    share : float, of what has gone at the end [-]

    Returns
    -------
    float or None, time; None where nothing goes over [s]

    Assumptions
    -----------
    Straight between the course's moments.

    Valid for
    ---------
    Shares between 0 and 1.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    This project's own.
    """
    if moved_kg[-1] <= 0.0:
        return None
    target = share * moved_kg[-1]
    after = int(np.argmax(moved_kg >= target))
    if after == 0:
        return float(seconds[0])
    before = after - 1
    part = (target - moved_kg[before]) / (moved_kg[after] - moved_kg[before])
    return float(seconds[before] + part * (seconds[after] - seconds[before]))
