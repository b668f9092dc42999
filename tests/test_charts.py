"""A chart says the same as a drawing, as a table and in words, under a strict policy."""

import re
import xml.etree.ElementTree as ET
from datetime import date
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shop.charts.layout import lay_out
from shop.charts.model import Axis, Band, Chart, Mark, Point, Series
from shop.charts.shapes import Box, Line, Marker, Text
from shop.charts.svg import to_svg
from shop.charts.table import describe, to_notes, to_rows
from shop.charts.ticks import day_scale, decimals_for, number_scale, write_number
from tests.examples import times

FEW = settings(max_examples=times(50), deadline=None)
SVG = "{http://www.w3.org/2000/svg}"
NUMBERS = st.floats(-1e6, 1e6).map(lambda value: round(value, 3))
DAY = date(2026, 11, 30).toordinal()


def warming() -> Chart:
    return Chart(
        title="Pressure against temperature <at this fill>",
        x=Axis("Temperature", "°C"),
        y=Axis("Gauge", "bar", low=0),
        series=[
            Series("4.52 kg", [(-12, 20.4), (0, 30.2), (20, 49.5), (36, 77.1)]),
            Series("read & kept", [(20, 50.0, 1.5)], kind="dots"),
        ],
        bands=[Band("heater allowed", -10, 30, axis="x")],
        marks=[Mark("safety disc", y=200), Mark("now", x=20, y=49.5)],
    )


def contents() -> Chart:
    points: list[Point] = [(DAY - 40, 4.61), (DAY - 30, 3.2), (DAY - 20, None), (DAY, 1.1, 0.02)]
    return Chart(
        title="Contents over time",
        x=Axis("Day", kind="day"),
        y=Axis("Nitrous", "kg", low=0),
        series=[Series("weighed", points, kind="step")],
    )


EMPTY = Chart("Nothing", Axis("Day", kind="day"), Axis("Nitrous", "kg"), [Series("weighed", [])])
ALL = [warming(), contents(), EMPTY, Chart("Bare", Axis("x"), Axis("y"))]


@pytest.mark.parametrize("chart", ALL, ids=lambda chart: chart.title[:8])
def test_the_svg_is_well_formed_named_and_passes_a_strict_policy(chart: Chart) -> None:
    text = to_svg(chart, id="one")
    root = ET.fromstring(text)
    assert root.tag == f"{SVG}svg"
    assert root.get("role") == "img"
    named = [root.find(f"{SVG}title"), root.find(f"{SVG}desc")]
    assert root.get("aria-labelledby") == " ".join(each.get("id") for each in named)
    assert named[0].text == chart.title
    assert named[1].text == describe(chart)
    for element in root.iter():
        assert element.tag.removeprefix(SVG) not in ("style", "script", "image", "use", "a")
        assert not [name for name in element.attrib if name == "style" or name[:2] == "on"]
        assert element.get("stroke") in (None, "currentColor")
        assert element.get("fill") in (None, "currentColor", "none")
    assert not re.search(r"nan|inf\b|#[0-9a-f]{3}|url\(", text)


def test_markup_in_names_is_escaped() -> None:
    nasty = '"><script>alert(1)</script>&\x00'
    chart = Chart(
        nasty,
        Axis(nasty, nasty),
        Axis(nasty, nasty),
        [Series(nasty, [(0, 1), (1, 2)]), Series(nasty, [(0, 2)])],
        [Band(nasty, 0, 1)],
        [Mark(nasty, y=1)],
        summary=nasty,
    )
    text = to_svg(chart, id="one")
    assert "<script" not in text
    assert ET.fromstring(text).find(f"{SVG}title").text == nasty.removesuffix("\x00")


@pytest.mark.parametrize("name", ["", "1a", "a b", 'a"b', "a.b"])
def test_an_id_that_could_break_out_is_a_mistake_in_the_program(name: str) -> None:
    with pytest.raises(ValueError):
        to_svg(warming(), id=name)


def test_letters_stay_legible_on_a_phone() -> None:
    for width in (360, 640, 1200):
        drawing = lay_out(warming(), width=width, height=width / 2)
        sizes = {each.size for each in drawing.shapes if isinstance(each, Text)}
        assert min(sizes) * 360 / width >= 11.9


def test_series_differ_without_colour() -> None:
    chart = Chart("t", Axis("x"), Axis("y"), [Series(f"s{n}", [(0, n), (1, n + 1)]) for n in range(4)])
    root = ET.fromstring(to_svg(chart, id="one"))
    lines = [each for each in root.iter(f"{SVG}polyline") if "series" in each.get("class")]
    dashes = {each.get("class"): each.get("stroke-dasharray") for each in lines}
    assert len(set(dashes.values())) == len(dashes) == 4


def test_a_legend_names_each_series_and_one_alone_needs_none() -> None:
    words = [each.words for each in lay_out(warming()).shapes if isinstance(each, Text)]
    assert "4.52 kg" in words
    assert "read & kept" in words
    assert "weighed" not in [each.words for each in lay_out(contents()).shapes if isinstance(each, Text)]


def test_axes_marks_and_bands_are_written_with_their_units() -> None:
    words = [each.words for each in lay_out(warming()).shapes if isinstance(each, Text)]
    for expected in ("Temperature (°C)", "Gauge (bar)", "safety disc", "now", "heater allowed", "0"):
        assert expected in words


def test_a_step_holds_its_value_until_the_next() -> None:
    chart = Chart("t", Axis("x"), Axis("y", low=0, high=10), [Series("s", [(0, 2), (10, 8)], kind="step")])
    (line,) = [each for each in lay_out(chart).shapes if isinstance(each, Line) and each.role == "series"]
    (x0, y0), (x1, y1), (x2, y2) = line.places
    assert y0 == y1 > y2
    assert x0 < x1 == x2


def test_a_gap_breaks_the_line() -> None:
    points: list[Point] = [(0, 1), (1, 2), (2, None), (3, 2), (4, 1)]
    chart = Chart("t", Axis("x"), Axis("y"), [Series("s", points)])
    lines = [each for each in lay_out(chart).shapes if isinstance(each, Line) and each.role == "series"]
    assert [len(each.places) for each in lines] == [2, 2]


def test_a_spread_is_drawn_to_scale() -> None:
    chart = Chart("t", Axis("x", low=0, high=2), Axis("y", low=0, high=10), [Series("s", [(1, 5, 2)])])
    shapes = lay_out(chart).shapes
    upright = next(each for each in shapes if isinstance(each, Line) and each.role == "spread")
    axis = next(each for each in shapes if isinstance(each, Line) and len(each.places) == 3)
    tall = axis.places[1][1] - axis.places[0][1]
    assert abs(upright.places[0][1] - upright.places[1][1]) == pytest.approx(0.4 * tall)


def test_a_line_that_leaves_a_fixed_axis_is_cut_at_the_frame() -> None:
    chart = Chart("t", Axis("x", low=0, high=10), Axis("y", low=0, high=10), [Series("s", [(-10, -10), (20, 20)])])
    shapes = lay_out(chart).shapes
    (line,) = [each for each in shapes if isinstance(each, Line) and each.role == "series"]
    axis = next(each for each in shapes if isinstance(each, Line) and len(each.places) == 3)
    left, top = axis.places[0]
    right, bottom = axis.places[2]
    assert line.places[0] == pytest.approx((left, bottom))
    assert line.places[-1] == pytest.approx((right, top))
    assert not [each for each in shapes if isinstance(each, Marker)]


def test_a_band_covers_its_stretch() -> None:
    chart = Chart(
        "t", Axis("x", low=0, high=10), Axis("y", low=0, high=10), bands=[Band("b", 2, 4), Band("c", 5, 10, axis="x")]
    )
    flat, upright = [each for each in lay_out(chart).shapes if isinstance(each, Box)]
    assert flat.height == pytest.approx(0.2 * upright.height)
    assert upright.width == pytest.approx(0.5 * flat.width)


def test_an_empty_chart_says_so() -> None:
    words = [each.words for each in lay_out(EMPTY).shapes if isinstance(each, Text)]
    assert "nothing to show yet" in words
    assert to_rows(EMPTY) == [["Day", "weighed (kg)"]]
    assert "no values" in describe(EMPTY)


def test_the_table_has_the_same_numbers() -> None:
    assert to_rows(contents()) == [
        ["Day", "weighed (kg)"],
        ["2026-10-21", "4.61"],
        ["2026-10-31", "3.20"],
        ["2026-11-10", ""],
        ["2026-11-30", "1.10 ±0.02"],
    ]
    rows = to_rows(warming())
    assert rows[0] == ["Temperature (°C)", "4.52 kg (bar)", "read & kept (bar)"]
    assert [row[1:] for row in rows if row[0].startswith("20")] == [["49.5", "50.0 ±1.5"]]


def test_the_table_writes_as_finely_as_the_scale_reads() -> None:
    axis = Axis("Nitrous", "kg", decimals=3)
    chart = Chart("t", Axis("Run", decimals=0), axis, [Series("s", [(1, 4.605, 0.005), (2, 3)])])
    assert to_rows(chart)[1:] == [["1", "4.605 ±0.005"], ["2", "3.000"]]


def test_two_values_at_one_place_are_two_rows() -> None:
    chart = Chart("t", Axis("x"), Axis("y"), [Series("a", [(1, 2), (1, 3)]), Series("b", [(1, 5)])])
    assert [row[1:] for row in to_rows(chart)[1:]] == [["2.00", "5.00"], ["3.00", ""]]


def test_what_is_marked_is_told_below_the_table() -> None:
    notes = to_notes(warming())
    assert len(notes) == 3
    assert notes[0] == "safety disc: 200.0 bar"
    assert notes[1].startswith("now: Temperature 20.0 °C, Gauge 49.5 bar")
    assert "Temperature −10.0 to 30.0 °C" in notes[2]


def test_a_description_can_be_given() -> None:
    chart = Chart("t", Axis("x"), Axis("y"), summary="It falls.")
    assert ET.fromstring(to_svg(chart, id="a")).find(f"{SVG}desc").text == "It falls."


@pytest.mark.parametrize(
    ("low", "high", "labels"),
    [
        (0, 10, ["0", "2", "4", "6", "8", "10"]),
        (0, 4.61, ["0", "1", "2", "3", "4", "5"]),
        (-0.2, 0.3, ["−0.2", "−0.1", "0.0", "0.1", "0.2", "0.3"]),
        (0, 2300, ["0", "500", "1000", "1500", "2000", "2500"]),
        (5, 5, ["4.4", "4.6", "4.8", "5.0", "5.2", "5.4", "5.6"]),
        (0, 0, ["−1.0", "−0.5", "0.0", "0.5", "1.0"]),
    ],
)
def test_numbers_are_divided_in_ones_twos_and_fives(low: float, high: float, labels: list[str]) -> None:
    assert [label for _, label in number_scale(low, high, 5).ticks] == labels


@pytest.mark.parametrize(
    ("low", "high", "labels"),
    [
        ((2026, 11, 28), (2026, 12, 1), ["2026-11-28", "2026-11-29", "2026-11-30", "2026-12-01"]),
        ((2026, 1, 15), (2026, 5, 2), ["2026-02", "2026-03", "2026-04", "2026-05"]),
        ((2024, 2, 29), (2026, 2, 28), ["2024-07", "2025-01", "2025-07", "2026-01"]),
    ],
)
def test_days_are_divided_at_days_and_firsts_of_months(
    low: tuple[int, int, int], high: tuple[int, int, int], labels: list[str]
) -> None:
    scale = day_scale(date(*low).toordinal(), date(*high).toordinal(), 4)
    assert [label for _, label in scale.ticks] == labels


@FEW
@given(low=NUMBERS, span=st.floats(1e-3, 1e6), count=st.integers(2, 8))
def test_a_number_axis_holds_its_values_and_its_ticks_are_even(low: float, span: float, count: int) -> None:
    scale = number_scale(low, low + span, count)
    near = 1e-6 * span
    assert scale.low <= low + near
    assert scale.high >= low + span - near
    places = [value for value, _ in scale.ticks]
    assert 2 <= len(places) <= count + 2
    gaps = [after - before for before, after in pairwise(places)]
    assert max(gaps) == pytest.approx(min(gaps), rel=1e-3)
    assert len({label for _, label in scale.ticks}) == len(places)


@FEW
@given(low=st.integers(1, 3_600_000), span=st.integers(0, 30_000), count=st.integers(2, 8))
def test_a_day_axis_has_its_ticks_inside(low: int, span: int, count: int) -> None:
    scale = day_scale(low, low + span, count)
    assert all(scale.low <= value <= scale.high for value, _ in scale.ticks)
    assert len(scale.ticks) <= count + 2


@FEW
@given(
    points=st.lists(st.tuples(NUMBERS, st.one_of(st.none(), NUMBERS)), max_size=30),
    kind=st.sampled_from(["line", "step", "dots"]),
    width=st.integers(120, 1200),
    height=st.integers(80, 600),
    low=st.one_of(st.none(), NUMBERS),
)
def test_whatever_is_given_stays_on_the_sheet(
    points: list[Point], kind: str, width: int, height: int, low: float | None
) -> None:
    chart = Chart(
        "t",
        Axis("x", low=low),
        Axis("y"),
        [Series("s", points, kind=kind), Series("u", points)],  # type: ignore[arg-type]
        [Band("b", -5, 5)],
        [Mark("m", x=3, y=4)],
    )
    drawing = lay_out(chart, width=width, height=height)
    for shape in drawing.shapes:
        if isinstance(shape, Marker) or (isinstance(shape, Line) and shape.role == "series"):
            places = shape.places if isinstance(shape, Line) else ((shape.x, shape.y),)
            assert all(-1 <= x <= width + 60 and -1 <= y <= height + 60 for x, y in places)
    ET.fromstring(to_svg(chart, width, height, id="one"))
    assert len(to_rows(chart)[0]) == 3


@pytest.mark.parametrize(
    "make",
    [
        lambda: Series("s", [(0, float("nan"))]),
        lambda: Series("s", [(float("inf"), 1)]),
        lambda: Series("s", [(0, 1, -1)]),
        lambda: Axis("x", low=2, high=1),
        lambda: Axis("x", low=float("nan")),
        lambda: Band("b", 2, 1),
        lambda: Mark("m"),
        lambda: lay_out(warming(), width=50),
    ],
)
def test_what_cannot_be_drawn_is_a_mistake_in_the_program(make: object) -> None:
    with pytest.raises(ValueError):
        make()  # type: ignore[operator]


def test_numbers_are_written_with_a_true_minus_and_enough_decimals() -> None:
    assert write_number(-3.14159, 2) == "−3.14"
    assert write_number(-0.001, 2) == "0.00"
    assert decimals_for(0, 4.61) == 2
    assert decimals_for(0, 2000) == 0
    assert decimals_for(3, 3) == 2


def test_an_empty_axis_runs_from_nothing_upwards() -> None:
    words = [each.words for each in lay_out(EMPTY).shapes if isinstance(each, Text)]
    assert "0.0" in words
    assert "1.0" in words
    assert not [each for each in words if each.startswith(("−", "0001"))]
