"""From a chart to shapes: where everything goes, for every writer alike.

Letters are a thirtieth of the width, so that a drawing of 640 units squeezed into a
phone's 360 pixels still has letters of 12 pixels.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from shop.charts.model import Axis, Chart, Series
from shop.charts.shapes import Box, Drawing, Line, Marker, Shape, Text
from shop.charts.ticks import Scale, day_scale, number_scale

_LETTER = 0.56  # mean width of a letter in parts of its size, rather wide than narrow
_NOTHING = "nothing to show yet"


def lay_out(chart: Chart, *, width: float = 640, height: float = 320) -> Drawing:
    """Place the shapes of a chart on a sheet."""
    if width < 120 or height < 80:
        raise ValueError("a chart needs 120 by 80 units at least")
    size = width / 30
    legend = _legend(chart, width, size)
    y = _scale(chart, "y", max(2, int((height - (5 + len(legend)) * size) / (2.2 * size))))
    left = _widest([label for _, label in y.ticks], size) + size
    frame = _Frame(
        left=left,
        top=(1.6 + 1.4 * len(legend)) * size + 0.3 * size,
        right=width - size,
        bottom=height - 3.2 * size,
    )
    longest = len("2026-12-31") if chart.x.kind == "day" else 5
    x = _scale(chart, "x", max(2, int((frame.right - left) / (size * _LETTER * longest * 1.5))))
    place = _Place(frame, x, y)
    shapes: list[Shape] = [
        *_bands(chart, place, size),
        *_grid(chart, place, size, width, height),
        *_marks(chart, place, size),
        *(shape for rank, each in enumerate(chart.series) for shape in _series(each, place, rank)),
    ]
    for row, names in enumerate(legend):
        shapes.extend(_legend_row(names, (2.6 + 1.4 * row) * size, size))
    if all(point[1] is None for each in chart.series for point in each.points):
        middle = (frame.left + frame.right) / 2, (frame.top + frame.bottom) / 2
        shapes.append(Text(*middle, _NOTHING, size, "middle"))
    return Drawing(width, height, tuple(shapes))


class _Frame:
    """The rectangle between the axes."""

    def __init__(self, left: float, top: float, right: float, bottom: float) -> None:
        self.left, self.right = left, max(right, left + 10)
        self.top, self.bottom = top, max(bottom, top + 10)


class _Place:
    """From a pair of values to a place on the sheet."""

    def __init__(self, frame: _Frame, x: Scale, y: Scale) -> None:
        self.frame, self.x, self.y = frame, x, y

    def across(self, value: float) -> float:
        part = min(1.0, max(0.0, self.x.part(value)))
        return self.frame.left + part * (self.frame.right - self.frame.left)

    def down(self, value: float) -> float:
        part = min(1.0, max(0.0, self.y.part(value)))
        return self.frame.bottom - part * (self.frame.bottom - self.frame.top)

    def shows(self, x: float, y: float) -> bool:
        near = -1e-9, 1 + 1e-9
        return near[0] <= self.x.part(x) <= near[1] and near[0] <= self.y.part(y) <= near[1]


def _values(chart: Chart, axis: str) -> list[float]:
    """Give every number that an axis must reach."""
    found: list[float] = []
    for series in chart.series:
        for point in series.points:
            if point[1] is None:
                continue
            spread = (point[2] or 0.0) if len(point) == 3 else 0.0
            found += [point[0]] if axis == "x" else [point[1] - spread, point[1] + spread]
    for band in chart.bands:
        if band.axis == axis:
            found += [band.low, band.high]
    for mark in chart.marks:
        at = mark.x if axis == "x" else mark.y
        if at is not None:
            found.append(at)
    return found


def _scale(chart: Chart, name: str, count: int) -> Scale:
    axis: Axis = chart.x if name == "x" else chart.y
    values = _values(chart, name)
    low = axis.low if axis.low is not None else min(values, default=axis.high or 0.0)
    high = axis.high if axis.high is not None else max(values, default=low + 1)
    if low > high:  # one end is given and all values lie beyond it
        low, high = (low, low) if axis.low is not None else (high, high)
    if axis.kind == "day":
        # No day is known at all: an axis without dates rather than one of the year 1.
        return day_scale(low, high, count) if low > 0 else Scale(0, 1, ())
    # An x axis keeps its ends: half of it left empty would tell of hours that weren't.
    return number_scale(
        low,
        high,
        count,
        keep_low=axis.low is not None or name == "x",
        keep_high=axis.high is not None or name == "x",
    )


def _bands(chart: Chart, place: _Place, size: float) -> Iterator[Shape]:
    frame = place.frame
    for rank, band in enumerate(chart.bands):
        left, right, top, bottom = frame.left, frame.right, frame.top, frame.bottom
        if band.axis == "x":
            left, right = place.across(band.low), place.across(band.high)
        else:
            top, bottom = place.down(band.high), place.down(band.low)
        yield Box(left, top, right - left, bottom - top, "band", rank)
        edge = min(left + 0.3 * size, frame.right - _widest([band.name], size))
        yield Text(max(edge, frame.left), min(top + size, frame.bottom), band.name, size)


def _grid(chart: Chart, place: _Place, size: float, width: float, height: float) -> Iterator[Shape]:
    frame = place.frame
    for value, label in place.y.ticks:
        down = place.down(value)
        yield Line(((frame.left, down), (frame.right, down)), "grid")
        yield Text(frame.left - 0.4 * size, down + 0.35 * size, label, size, "end")
    free_from = -width
    for value, label in place.x.ticks:
        across = place.across(value)
        yield Line(((across, frame.bottom), (across, frame.bottom + 0.3 * size)), "axis")
        half = _widest([label], size) / 2
        # Labels at the ends are pulled inwards, and left out where they would touch.
        middle = min(max(across, half), width - half)
        if middle - half > free_from:
            yield Text(middle, frame.bottom + 1.4 * size, label, size, "middle")
            free_from = middle + half + 0.4 * size
    corner = ((frame.left, frame.top), (frame.left, frame.bottom), (frame.right, frame.bottom))
    yield Line(corner, "axis")
    yield Text(0.3 * size, 1.1 * size, chart.y.name, size)
    yield Text(frame.right, height - 0.4 * size, chart.x.name, size, "end")


def _marks(chart: Chart, place: _Place, size: float) -> Iterator[Shape]:
    frame = place.frame
    for mark in chart.marks:
        long = _widest([mark.name], size)
        across = frame.right if mark.x is None else place.across(mark.x)
        down = frame.top if mark.y is None else place.down(mark.y)
        if mark.x is None:
            yield Line(((frame.left, down), (frame.right, down)), "mark")
        elif mark.y is None:
            yield Line(((across, frame.top), (across, frame.bottom)), "mark")
        else:
            yield Marker(across, down, 0.45 * size, "mark")
        # Words go above a line and left of a place, unless the frame ends there.
        above = down - 0.4 * size
        if above - size < frame.top:
            above = down + 1.2 * size
        if across - 0.5 * size - long >= frame.left:
            yield Text(across - 0.5 * size, above, mark.name, size, "end")
        else:
            yield Text(across + 0.5 * size, above, mark.name, size)


def _series(series: Series, place: _Place, rank: int) -> Iterator[Shape]:
    size = (place.frame.right - place.frame.left) / 110
    runs: list[list[tuple[float, float]]] = [[]]
    for point in series.points:
        if point[1] is None:
            runs.append([])
            continue
        runs[-1].append((point[0], point[1]))
        spread = point[2] if len(point) == 3 else None
        if spread and place.shows(point[0], point[1]):
            across = place.across(point[0])
            ends = place.down(point[1] + spread), place.down(point[1] - spread)
            yield Line(((across, ends[0]), (across, ends[1])), "spread", rank)
            for down in ends:
                yield Line(((across - size, down), (across + size, down)), "spread", rank)
    for run in runs:
        if series.kind != "dots" and len(run) > 1:
            corners = _stairs(run) if series.kind == "step" else run
            for piece in _inside(corners, place):
                yield Line(piece, "series", rank)
        # A curve of many computed points is a line; few points were measured, one by one.
        if series.kind == "dots" or len(run) <= 24:
            for x, y in run:
                if place.shows(x, y):
                    yield Marker(place.across(x), place.down(y), size, "series", rank)


def _stairs(run: list[tuple[float, float]]) -> list[tuple[float, float]]:
    """Hold each value until the next one is known."""
    corners = [run[0]]
    for (_, before), (x, y) in pairwise(run):
        corners += [(x, before), (x, y)]
    return corners


def _inside(run: list[tuple[float, float]], place: _Place) -> Iterator[tuple[tuple[float, float], ...]]:
    """Cut a line at the frame, where an axis ends before its values do."""
    piece: list[tuple[float, float]] = []
    for start, end in pairwise(run):
        cut = _cut(start, end, place)
        if cut is None:
            if len(piece) > 1:
                yield tuple(piece)
            piece = []
            continue
        first, last = ((place.across(x), place.down(y)) for x, y in cut)
        if not piece or piece[-1] != first:
            if len(piece) > 1:
                yield tuple(piece)
            piece = [first]
        piece.append(last)
    if len(piece) > 1:
        yield tuple(piece)


def _cut(
    start: tuple[float, float], end: tuple[float, float], place: _Place
) -> tuple[tuple[float, float], tuple[float, float]] | None:
    """Clip one stretch to the frame (Liang and Barsky, ACM Trans. Graphics 3 (1984) 1)."""
    begin, finish = 0.0, 1.0
    run_x, run_y = end[0] - start[0], end[1] - start[1]
    for step, room in (
        (-run_x, start[0] - place.x.low),
        (run_x, place.x.high - start[0]),
        (-run_y, start[1] - place.y.low),
        (run_y, place.y.high - start[1]),
    ):
        if step == 0:
            if room < 0:
                return None
        elif step < 0:
            begin = max(begin, room / step)
        else:
            finish = min(finish, room / step)
    if begin > finish:
        return None
    first = start if begin == 0 else (start[0] + begin * run_x, start[1] + begin * run_y)
    last = end if finish == 1 else (start[0] + finish * run_x, start[1] + finish * run_y)
    return first, last


def _legend(chart: Chart, width: float, size: float) -> list[list[tuple[int, str]]]:
    """Give the names of the series in rows that fit; none where one axis label says it."""
    if len(chart.series) < 2:
        return []
    rows: list[list[tuple[int, str]]] = [[]]
    used = 0.0
    for rank, series in enumerate(chart.series):
        long = _entry_width(series.name, size)
        if rows[-1] and used + long > width - size:
            rows.append([])
            used = 0.0
        rows[-1].append((rank, series.name))
        used += long
    return rows


def _legend_row(names: list[tuple[int, str]], down: float, size: float) -> Iterator[Shape]:
    across = 0.3 * size
    for rank, name in names:
        middle = down - 0.35 * size
        yield Line(((across, middle), (across + 2.2 * size, middle)), "series", rank)
        yield Marker(across + 1.1 * size, middle, 0.3 * size, "series", rank)
        yield Text(across + 2.6 * size, down, name, size)
        across += _entry_width(name, size)


def _entry_width(name: str, size: float) -> float:
    return _widest([name], size) + 3.6 * size


def _widest(words: list[str], size: float) -> float:
    return max((len(each) for each in words), default=0) * size * _LETTER
