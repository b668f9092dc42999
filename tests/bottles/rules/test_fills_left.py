"""Full fills left go down by what is drawn, and are never more than was counted."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.fills_left import Counted, fills_left

FOUR = Counted(full_fills=4, held_g=20_000, held_error_g=50, each_g=4_000, least_g=5_000)


@pytest.mark.parametrize(
    ("holds", "left"),
    [
        (20_000, 4), (20_040, 4), (19_700, 4), (18_000, 3), (16_000, 3), (15_700, 3), (12_000, 2), (8_000, 1), (5_000, 0),
        (4_999, 0), (0, 0), (20_051, None),
    ],
)  # fmt: skip
def test_each_fill_drawn_is_one_less(holds: int, left: int | None) -> None:
    assert fills_left(FOUR, holds) == left


def test_a_forecast_that_found_no_room_tells_nothing() -> None:
    assert fills_left(Counted(4, 20_000, 50, 0, 5_000), 20_000) is None


@given(st.integers(0, 20_000), st.integers(0, 3_000))
def test_what_is_drawn_never_adds_a_fill(holds: int, drawn: int) -> None:
    before, after = fills_left(FOUR, holds), fills_left(FOUR, max(0, holds - drawn))
    assert before is not None and after is not None
    assert 0 <= after <= before <= FOUR.full_fills
