"""The same numbers as a table, and in a sentence, for those who can't see the curve."""

from __future__ import annotations

from itertools import zip_longest

from shop.charts.model import Axis, Chart
from shop.charts.ticks import decimals_for, write_day, write_number


def to_rows(chart: Chart) -> list[list[str]]:
    """Give the table that stands beside a chart: a head, then a row for each x.

    A series with more than one value at an x has a row for each of them. Marks and bands
    follow, named, so that nothing on the chart is missing from the table.
    """
    rows = [[chart.x.name, *(f"{each.name} ({chart.y.unit})" if chart.y.unit else each.name
                             for each in chart.series)]]  # fmt: skip
    cells: dict[float, list[list[str]]] = {}
    write_x, write_y = _Writer(chart, "x"), _Writer(chart, "y")
    for series in chart.series:
        for point in series.points:
            cells.setdefault(point[0], [[] for _ in chart.series])
    for column, series in enumerate(chart.series):
        for point in series.points:
            if point[1] is None:
                continue
            text = write_y(point[1])
            if len(point) == 3 and point[2] is not None:
                text += f" ±{write_y(point[2])}"
            cells[point[0]][column].append(text)
    for x in sorted(cells):
        lines = list(zip_longest(*cells[x], fillvalue="")) or [("",) * len(chart.series)]
        rows += [[write_x(x), *line] for line in lines]
    return rows


def to_notes(chart: Chart) -> list[str]:
    """Give what is marked on the chart, a phrase each: it stands below the table."""
    write = {"x": _Writer(chart, "x"), "y": _Writer(chart, "y")}
    axes = {"x": chart.x, "y": chart.y}
    # A mark's own name says what it is: its axis is named only where the unit doesn't tell which.
    told = bool(chart.x.unit or chart.y.unit) and chart.x.unit != chart.y.unit
    notes = []
    for mark in chart.marks:
        given = [(name, at) for name, at in (("x", mark.x), ("y", mark.y)) if at is not None]
        places = [
            f"{'' if told and len(given) == 1 else f'{axes[name].label} '}{_with_unit(write[name](at), axes[name])}"
            for name, at in given
        ]
        notes.append(f"{mark.name}: {', '.join(places)}")
    for band in chart.bands:
        axis, put = axes[band.axis], write[band.axis]
        high = _with_unit(put(band.high), axis)
        notes.append(f"{band.name}: {axis.label} {put(band.low)} to {high}")
    return notes


def describe(chart: Chart) -> str:
    """Say in a sentence or two what the chart shows."""
    write_x, write_y = _Writer(chart, "x"), _Writer(chart, "y")
    said = [f"{chart.y.name} against {chart.x.name}."]
    for series in chart.series:
        known = [(point[0], point[1]) for point in series.points if point[1] is not None]
        if not known:
            said.append(f"{series.name}: no values.")
            continue
        first, last = min(known), max(known)
        lowest, highest = (end(y for _, y in known) for end in (min, max))
        said.append(
            f"{series.name}: {_with_unit(write_y(first[1]), chart.y)} at"
            f" {_with_unit(write_x(first[0]), chart.x)}, {_with_unit(write_y(last[1]), chart.y)}"
            f" at {_with_unit(write_x(last[0]), chart.x)}, lowest {write_y(lowest)},"
            f" highest {write_y(highest)}."
        )
    said += [f"{each}." for each in to_notes(chart)]
    return " ".join(said)


class _Writer:
    """Writes the values of one axis alike, as finely as the chart can show them."""

    def __init__(self, chart: Chart, name: str) -> None:
        self.axis = chart.x if name == "x" else chart.y
        index = 0 if name == "x" else 1
        values = [
            value for each in chart.series for point in each.points
            if (value := point[index]) is not None
        ]  # fmt: skip
        found = decimals_for(min(values, default=0.0), max(values, default=0.0))
        self.decimals = found if self.axis.decimals is None else self.axis.decimals

    def __call__(self, value: float) -> str:
        if self.axis.kind == "day":
            return write_day(value)
        return write_number(value, self.decimals)


def _with_unit(text: str, axis: Axis) -> str:
    return f"{text} {axis.unit}" if axis.unit else text
