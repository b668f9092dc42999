"""What a chart says, before anything is drawn.

>>> chart = Chart(
...     title="Contents over time",
...     x=Axis("Day", kind="day"),
...     y=Axis("Nitrous", "kg", low=0),
...     series=[Series("weighed", [(739_000, 4.6, 0.02), (739_004, 3.1, 0.02)], kind="step")],
...     marks=[Mark("limit", y=4.61)],
... )

A chart knows no page, no paper, no unit conversion: its numbers are already in the units
that its axes name. The layout (layout.py) turns it into shapes; a writer (svg.py) writes
the shapes; the table beside it comes from the same chart (table.py).
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Literal

# (x, y) or (x, y, ±); y None: a gap in the line.
Point = tuple[float, float | None] | tuple[float, float | None, float | None]


@dataclass(frozen=True)
class Axis:
    """An axis: what it measures, in which unit; its ends, where they aren't to be found.

    ``kind`` "day" takes days as ``date.toordinal()`` counts them, with fractions.
    ``decimals`` is how fine the table writes: as the scale reads, where there is one.
    """

    label: str
    unit: str = ""
    low: float | None = None
    high: float | None = None
    kind: Literal["number", "day"] = "number"
    decimals: int | None = None

    def __post_init__(self) -> None:
        _finite(each for each in (self.low, self.high) if each is not None)
        if self.low is not None and self.high is not None and self.low >= self.high:
            raise ValueError("an axis ends above where it begins")

    @property
    def name(self) -> str:
        """The label with its unit, as it is written beside the axis."""
        return f"{self.label} ({self.unit})" if self.unit else self.label


@dataclass(frozen=True)
class Series:
    """One line, stair or row of dots, with a name."""

    name: str
    points: Sequence[Point]
    kind: Literal["line", "step", "dots"] = "line"

    def __post_init__(self) -> None:
        for point in self.points:
            _finite(each for each in point if each is not None)
            if len(point) == 3 and point[2] is not None and point[2] < 0:
                raise ValueError("a ± isn't below zero")


@dataclass(frozen=True)
class Band:
    """A stretch of one axis with a meaning, right across the chart."""

    name: str
    low: float
    high: float
    axis: Literal["x", "y"] = "y"

    def __post_init__(self) -> None:
        _finite((self.low, self.high))
        if self.low > self.high:
            raise ValueError("a band ends above where it begins")


@dataclass(frozen=True)
class Mark:
    """One place with a name: a point, or a line right across where only x or y is given."""

    name: str
    x: float | None = None
    y: float | None = None

    def __post_init__(self) -> None:
        given = [each for each in (self.x, self.y) if each is not None]
        if not given:
            raise ValueError("a mark lies somewhere")
        _finite(given)


@dataclass(frozen=True)
class Chart:
    """A title, two axes, and what is drawn between them."""

    title: str
    x: Axis
    y: Axis
    series: Sequence[Series] = field(default_factory=list)
    bands: Sequence[Band] = field(default_factory=list)
    marks: Sequence[Mark] = field(default_factory=list)
    summary: str = ""  # said in place of the one that is made from the numbers


def _finite(numbers: Iterable[float]) -> None:
    if not all(math.isfinite(each) for each in numbers):
        raise ValueError("a chart takes finite numbers; a gap is None")
