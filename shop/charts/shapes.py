"""The few shapes that a layout is made of. A writer knows these and nothing else.

Lengths are in the chart's own units, x to the right and y down from the upper left.
A ``role`` says what a shape stands for; writers turn it into a class name or a pen.
``rank`` counts the series, so that writers tell them apart by dash and marker.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Role = Literal["grid", "axis", "band", "series", "spread", "mark", "text"]


@dataclass(frozen=True)
class Line:
    """A polyline through places."""

    places: tuple[tuple[float, float], ...]
    role: Role
    rank: int = 0


@dataclass(frozen=True)
class Box:
    """A filled rectangle."""

    x: float
    y: float
    width: float
    height: float
    role: Role
    rank: int = 0


@dataclass(frozen=True)
class Marker:
    """A small figure at a place: a disc, a square, a triangle or a lozenge, by its rank."""

    x: float
    y: float
    size: float
    role: Role
    rank: int = 0


@dataclass(frozen=True)
class Text:
    """Words on a baseline."""

    x: float
    y: float
    words: str
    size: float
    anchor: Literal["start", "middle", "end"] = "start"


Shape = Line | Box | Marker | Text


@dataclass(frozen=True)
class Drawing:
    """All shapes of a chart, from back to front, on a sheet of this size."""

    width: float
    height: float
    shapes: tuple[Shape, ...]
