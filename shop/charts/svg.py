"""Writes a laid-out chart as inline SVG, fit for a strict content security policy.

Presentation attributes only, no style in any form, and no colour but ``currentColor``:
it follows the page, light or dark, and prints in grey. Series differ by dash and marker;
a stylesheet may add colour through the class names (``series-1`` and so on), which it can
since it outranks presentation attributes.
"""

from __future__ import annotations

import re
from html import escape

from shop.charts.layout import lay_out
from shop.charts.model import Chart
from shop.charts.shapes import Box, Line, Marker, Shape
from shop.charts.table import describe

DASHES = ("", "9 5", "2 4", "12 4 2 4", "5 3")
# What XML can't hold even escaped.
_FORBIDDEN = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")
_ID = re.compile(r"[A-Za-z][A-Za-z0-9_-]*")
_PENS = {
    "grid": 'stroke-width="1" stroke-opacity="0.25"',
    "axis": 'stroke-width="1.5"',
    "mark": 'stroke-width="1.5" stroke-dasharray="6 3"',
    "spread": 'stroke-width="1.5"',
    "series": 'stroke-width="2.5" stroke-linejoin="round"',
}


def to_svg(chart: Chart, width: float = 640, height: float = 320, *, id: str) -> str:
    """Write a chart as one SVG element; ``id`` must be the only such one on its page."""
    if not _ID.fullmatch(id):
        raise ValueError("an id is a letter, then letters, digits, - or _")
    drawing = lay_out(chart, width=width, height=height)
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" class="chart" id="{id}" width="100%"'
        f' viewBox="0 0 {_n(width)} {_n(height)}" role="img"'
        f' aria-labelledby="{id}-title {id}-desc" fill="currentColor">',
        f'<title id="{id}-title">{_words(chart.title)}</title>',
        f'<desc id="{id}-desc">{_words(chart.summary or describe(chart))}</desc>',
        *(_shape(each) for each in drawing.shapes),
        "</svg>",
    ]
    return "".join(parts)


def _shape(shape: Shape) -> str:
    if isinstance(shape, Line):
        return _line(shape)
    if isinstance(shape, Box):
        # Two depths of grey tell neighbouring bands apart.
        depth = "0.08" if shape.rank % 2 == 0 else "0.16"
        return (
            f'<rect class="band band-{shape.rank + 1}" x="{_n(shape.x)}" y="{_n(shape.y)}"'
            f' width="{_n(shape.width)}" height="{_n(shape.height)}" fill-opacity="{depth}"/>'
        )
    if isinstance(shape, Marker):
        return _marker(shape)
    return (
        f'<text x="{_n(shape.x)}" y="{_n(shape.y)}" font-size="{_n(shape.size)}"'
        f' text-anchor="{shape.anchor}">{_words(shape.words)}</text>'
    )


def _line(line: Line) -> str:
    places = " ".join(f"{_n(x)},{_n(y)}" for x, y in line.places)
    name = f"series series-{line.rank + 1}" if line.role == "series" else line.role
    pen = _PENS[line.role]
    dash = DASHES[line.rank % len(DASHES)] if line.role == "series" else ""
    if dash:
        pen += f' stroke-dasharray="{dash}"'
    return f'<polyline class="{name}" points="{places}" fill="none" stroke="currentColor" {pen}/>'


def _marker(marker: Marker) -> str:
    x, y, r = marker.x, marker.y, marker.size
    name = f"dot series-{marker.rank + 1}" if marker.role == "series" else "dot mark"
    kind = marker.rank % 4 if marker.role == "series" else 3
    if kind == 0:
        return f'<circle class="{name}" cx="{_n(x)}" cy="{_n(y)}" r="{_n(r)}"/>'
    corners = {
        1: ((x - r, y - r), (x + r, y - r), (x + r, y + r), (x - r, y + r)),
        2: ((x, y - 1.2 * r), (x + 1.1 * r, y + r), (x - 1.1 * r, y + r)),
        3: ((x, y - 1.4 * r), (x + 1.4 * r, y), (x, y + 1.4 * r), (x - 1.4 * r, y)),
    }[kind]
    places = " ".join(f"{_n(across)},{_n(down)}" for across, down in corners)
    return f'<polygon class="{name}" points="{places}"/>'


def _words(text: str) -> str:
    return escape(_FORBIDDEN.sub("", text), quote=True)


def _n(number: float) -> str:
    """Give a tenth of a unit, which no eye can tell apart, in as few letters as will do."""
    text = f"{number:.1f}".removesuffix(".0")
    return "0" if text == "-0" else text
