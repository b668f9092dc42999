"""The course of a refill as two small charts, pressures and masses over minutes, with the same numbers as tables."""

from __future__ import annotations

from typing import Any

from django.utils.safestring import mark_safe

from bottles.physics.course import Course
from bottles.services.forecast_details import OverTime
from bottles.services.forecasting import Answer
from bottles.views.refill_words import RefillWords
from shop.charts.model import Axis, Band, Chart, Mark, Series
from shop.charts.svg import to_svg
from shop.charts.table import to_notes, to_rows
from shop.physics.units import value_in

ESTIMATED = (
    "The times are an estimate: what hose and valves (taken as half open) let through, and how fast heat comes in from the room "
    "and passes within the bottle, are common practice, no source. The time that you measure is worth more."
)
MORE_G = 50  # less isn't worth a wait


def course_context(found: OverTime, answer: Answer, words: RefillWords) -> dict[str, Any]:
    """Both charts, ready to be drawn, and how long it takes in words."""
    course = found.likely
    minutes = [round(float(second) / 60.0, 2) for second in course.seconds]
    charts = [_pressures(course, minutes, words), _masses(course, minutes, answer, words)]
    return {
        "charts": [_drawn(chart, f"course-{number}") for number, chart in enumerate(charts, 1)],
        "lasts": _lasts(course), "longer": _longer(found, words), "estimated": ESTIMATED,
    }  # fmt: skip


def _pressures(course: Course, minutes: list[float], words: RefillWords) -> Chart:
    unit = words.units.pressure

    def gauge(pascal: float) -> float:
        return float(value_in(round(pascal), unit, ambient_pa=words.ambient_pa))

    named = (("supply bottle", course.source_pa), ("bottle to fill", course.receiver_pa))
    return Chart(
        title="Pressures while it fills",
        x=Axis("Time", "min", low=0),
        y=Axis("Gauge", unit, decimals=0 if unit == "psi" else 1),
        series=[
            Series(name, [(x, gauge(float(pascal))) for x, pascal in zip(minutes, column, strict=True)]) for name, column in named
        ],
    )


def _masses(course: Course, minutes: list[float], answer: Answer, words: RefillWords) -> Chart:
    unit = "lb" if words.units.name == "us" else "kg"
    holds = answer.start_g

    def mass(grams: float) -> float:
        return float(value_in(round(grams), unit))

    wide = answer.high_g > answer.low_g + 1  # a gram is lost in rounding down
    held = [(x, mass(holds + 1000 * float(moved))) for x, moved in zip(minutes, course.moved_kg, strict=True)]
    return Chart(
        title="Nitrous in the bottle while it fills",
        x=Axis("Time", "min", low=0),
        y=Axis("In the bottle", unit, low=0, decimals=1 if unit == "lb" else 2),
        series=[Series("in the bottle", held)],
        bands=[Band("forecast", mass(holds + answer.low_g), mass(holds + answer.high_g))] if wide else [],
        marks=[Mark("target", y=mass(answer.target_g))],
    )


def _drawn(chart: Chart, name: str) -> dict[str, Any]:
    head, *rows = to_rows(chart)
    return {
        "caption": chart.title, "svg": mark_safe(to_svg(chart, 640, 300, id=name)), "head": head, "rows": rows,
        "note": "; ".join(to_notes(chart)), "numeric": "23"[: len(head) - 1],
    }  # fmt: skip


def _lasts(course: Course) -> str:
    if course.seconds_to_90 is None:
        return "Nothing goes over."
    said = f"Nine tenths of what goes over is there after {_minutes(course.seconds_to_90)}"
    if course.seconds_to_limit is not None:
        return f"{said}, the limit after {_minutes(course.seconds_to_limit)}: close by the scale."
    return f"{said}; then it slows down."


def _longer(found: OverTime, words: RefillWords) -> str:
    """What waiting beside them would still bring."""
    left, likely = found.left_joined, found.likely
    more = round(1000 * float(left.moved_kg[-1] - likely.moved_kg[-1]))
    if more < MORE_G or likely.seconds_to_limit is not None:
        return ""
    if left.seconds_to_limit is not None:
        return f"Left joined longer it may reach the target after {_minutes(left.seconds_to_limit)}: never leave it alone."
    minutes = _minutes(float(left.seconds[-1]))
    return f"Left joined for {minutes}, about {words.small(more)} more may go over, as heat passes: never leave it alone."


def _minutes(seconds: float) -> str:
    if seconds < 57.0:
        return "less than a minute"
    minutes = seconds / 60.0
    return f"about {max(1, round(minutes))} min" if minutes < 90 else f"about {minutes / 60:.1f} h"
