"""The table of ratios: each benchmark adds its lines, the end of the run prints them."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from tests.benchmarks.measuring import Measured, spoken

HEADS = ("what", "takes", "beside", "which takes", "ratio", "goal")
Told = Callable[..., float]


@pytest.fixture
def tell(record_property: Callable[[str, object], None]) -> Told:
    """Put one ratio on the table, and fail where it's worse than it may be: twice its goal.

    tell("a page", measured, "page", beside="bare", goal=3) for what should take at most so many
    times as long; tell(..., faster=True) for what should be so many times faster. `worst` is where it
    fails instead of at twice the goal.
    """

    def put(
        what: str, measured: Measured, name: str, *, beside: str, goal: float | None = None, worst: float | None = None,
        faster: bool = False,
    ) -> float:  # fmt: skip
        ratio = measured.ratio(beside, name) if faster else measured.ratio(name, beside)
        missed = goal is not None and (ratio < goal if faster else ratio > goal)
        aim = f"{'≥' if faster else '≤'} {goal:g}{', missed' if missed else ''}" if goal else ""
        record_property("ratio", (
            what, spoken(measured.seconds(name)), beside, spoken(measured.seconds(beside)),
            f"{ratio:.3g}" + (" × faster" if faster else ""), aim,
        ))  # fmt: skip
        if goal is not None and faster:
            assert ratio >= (worst or goal / 2), f"{what}: {ratio:.3g} times faster than {beside}; the goal is {goal:g}"
        elif goal is not None:
            assert ratio <= (worst or goal * 2), f"{what}: {ratio:.3g} times {beside}; the goal is {goal:g}"
        return ratio

    return put


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """The goals are those of a shop on SQLite: where the database alone is tested, leave them out."""
    if config.getoption("--database-only"):
        left_out = [item for item in items if item.get_closest_marker("benchmark")]
        config.hook.pytest_deselected(items=left_out)
        items[:] = [item for item in items if not item.get_closest_marker("benchmark")]


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    reports = [report for state in ("passed", "failed") for report in terminalreporter.getreports(state)]
    rows = [tuple(value) for report in reports for name, value in report.user_properties if name == "ratio"]
    if not rows:
        return
    widths = [max(len(row[at]) for row in (HEADS, *rows)) for at in range(len(HEADS))]
    terminalreporter.section("ratios")
    for row in (HEADS, *rows):
        terminalreporter.write_line("  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip())
