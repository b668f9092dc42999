"""Which refill informs the figure, what is compared, what lies behind one far outside its band."""

from __future__ import annotations

import statistics
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.agreement import Compared, agreement, share_interval, student
from bottles.rules.learning import (
    SIZES_ML,
    WHY,
    WHY_NOT_COMPARED,
    Closed,
    is_bound,
    left_out,
    not_compared,
    size_of,
    size_span,
    way_of,
)
from bottles.rules.outliers import ORDER, Span, Traces, Typed, causes, slip

SOUND = Closed("flow ceased")


@pytest.mark.parametrize(
    ("changes", "why"),
    [
        ({}, ""),
        ({"ended_by": "limit"}, ""),
        ({"ended_by": "by hand"}, ""),
        ({"ended_by": "abandoned"}, "abandoned"),
        ({"pumped": True}, "pumped"),
        ({"vented": True}, "vented"),
        ({"draws": 2}, "several supplies"),
        ({"reversed_by_hand": True}, "reversed"),
        ({"weighed_before": False}, "reversed"),
        ({"weighed_after": False}, "reversed"),
        ({"line_off": False}, "line on"),
        ({"wet": True}, "wet"),
        ({"forecast": False}, "no temperatures"),
        ({"supply_known": False}, "reading only"),
    ],
)
def test_a_refill_stays_out_for_one_reason_with_words(changes: dict[str, object], why: str) -> None:
    assert left_out(replace(SOUND, **changes)) == why
    assert not why or why in WHY


def test_what_ended_it_decides_what_it_tells() -> None:
    assert [is_bound(end) for end in ("flow ceased", "limit", "by hand")] == [False, True, True]


def test_one_stopped_by_hand_tells_a_bound_but_not_how_good_its_forecast_was() -> None:
    by_hand = replace(SOUND, ended_by="by hand")
    assert left_out(by_hand) == "" and not_compared(by_hand) == "by hand"
    assert not_compared(replace(by_hand, wet=True)) == "wet"
    assert not_compared(replace(SOUND, ended_by="limit")) == ""
    assert {not_compared(replace(SOUND, **{name: True})) for name in ("pumped", "vented", "wet")} <= WHY_NOT_COMPARED.keys()


def test_the_way_of_entering_follows_from_the_dip_tube() -> None:
    assert [way_of(tube) for tube in ("dip", "none", "unknown")] == ["dip", "spray", ""]


@given(st.integers(50, 1_000_000))
def test_every_capacity_lies_within_its_class(capacity: int) -> None:
    low, high = size_span(size_of(capacity))
    assert low < capacity <= high and high in SIZES_ML


# --- bias, spread, share --------------------------------------------------------------------------

# Two-sided 5 % points of Student's t, as printed in any table.
T_TABLE = [(1, 12.706), (2, 4.303), (3, 3.182), (4, 2.776), (5, 2.571), (10, 2.228), (30, 2.042), (100, 1.984)]


@pytest.mark.parametrize(("free", "printed"), T_TABLE)
def test_students_t_is_that_of_the_tables(free: int, printed: float) -> None:
    assert student(free) == pytest.approx(printed, rel=2e-3)


def test_bias_and_spread_come_with_their_intervals() -> None:
    rows = [Compared(off, inside=abs(off) < 40) for off in (-50.0, -10.0, 0.0, 20.0, 30.0, -20.0)]
    told = agreement(rows)
    assert told is not None
    offs = [row.off_g for row in rows]
    assert told.bias_g == pytest.approx(statistics.mean(offs)) and told.spread_g == pytest.approx(statistics.stdev(offs))
    assert told.bias_error_g == pytest.approx(2.571 * statistics.stdev(offs) / 6**0.5, rel=2e-3)
    # Chi-square for five degrees of freedom, 2.5 % and 97.5 %, as printed: 0.831 and 12.833.
    assert told.spread_low_g == pytest.approx(told.spread_g * (5 / 12.833) ** 0.5, rel=0.01)
    assert told.spread_high_g == pytest.approx(told.spread_g * (5 / 0.831) ** 0.5, rel=0.03)
    assert (told.inside, told.count) == (5, 6)


def test_one_refill_has_a_bias_without_an_interval_and_none_has_nothing() -> None:
    told = agreement([Compared(12.0, inside=True)])
    assert told is not None and told.bias_g == 12.0
    assert told.bias_error_g is None and told.spread_g is None and told.spread_low_g is None
    assert agreement([]) is None


def test_the_interval_of_a_share_is_wilsons() -> None:
    # 10 of 20: 0.299 to 0.701, worked by hand from the published formula.
    low, high = share_interval(10, 20)
    assert (low, high) == (pytest.approx(0.2993, abs=1e-4), pytest.approx(0.7007, abs=1e-4))
    assert share_interval(0, 5)[0] == pytest.approx(0.0, abs=1e-12) and share_interval(5, 5)[1] == pytest.approx(1.0)


@given(st.integers(1, 500), st.data())
def test_a_share_lies_within_its_interval(count: int, data: st.DataObject) -> None:
    inside = data.draw(st.integers(0, count))
    low, high = share_interval(inside, count)
    assert 0.0 <= low <= inside / count + 1e-12 and inside / count - 1e-12 <= high <= 1.0


# --- far outside ----------------------------------------------------------------------------------

SPAN = Span(low_g=3_000, likely_g=3_200, high_g=3_400, came_g=2_300, error_g=40)
# Typed in pounds and ounces: no slip of a digit is looked for there.
TRACES = Traces(before=Typed("14 lb 13 oz", 6_720), after=Typed("19 lb 14 oz", 9_020))


def codes(span: Span = SPAN, **traces: object) -> list[str]:
    return [one.code for one in causes(span, replace(TRACES, **traces))]


def test_inside_outside_and_far_outside_are_told_apart() -> None:
    assert replace(SPAN, came_g=3_390).inside and replace(SPAN, came_g=3_430).inside  # within the weighings' ±
    outside = replace(SPAN, came_g=2_940)
    assert not outside.inside and not outside.far
    assert SPAN.far


def test_more_than_likely_at_the_limit_is_no_fault_of_the_forecast() -> None:
    assert replace(SPAN, came_g=4_300).far
    assert not replace(SPAN, came_g=4_300, at_limit=True).far


def test_what_leaves_a_trace_of_its_own_is_named_first() -> None:
    assert codes(missing_g=600)[0] == "leak"
    assert codes(not_vented=True)[0] == "not vented"
    assert codes(tares_differ=True)[0] == "tare"
    assert codes(liquid_out=True)[0] == "supply out"
    assert codes(supply_held_g=9_000, supply_left_g=500)[0] == "supply out"
    more = replace(SPAN, came_g=4_300)
    assert codes(more, found_g=700)[0] == "scale" and codes(more, minutes=180)[0] == "long"


def test_less_and_more_have_different_causes() -> None:
    assert "air" in codes() and "air" not in codes(replace(SPAN, came_g=4_300))
    assert "ice" in codes(replace(SPAN, came_g=4_300)) and "ice" not in codes()


def test_a_temperature_is_named_only_where_a_believable_error_would_do() -> None:
    # 900 g less: at 100 g a kelvin 9 K, at 20 g a kelvin 45 K, which nobody misreads.
    assert "bottle temperature" in codes(bottle_kg_k=0.1, missing_g=0)
    assert "bottle temperature" not in codes(bottle_kg_k=0.02)
    told = causes(SPAN, replace(TRACES, supply_kg_k=0.1, supply_in_air=True))
    assert told[0].code == "supply temperature" and "colder by about 9 K" in told[0].sentence


@given(
    st.integers(0, 6_000), st.booleans(), st.booleans(), st.integers(0, 900), st.floats(0.0, 0.5), st.integers(0, 3),
    st.integers(0, 300),
)  # fmt: skip
def test_causes_are_ordered_by_evidence_and_few(
    came: int, out: bool, books: bool, missing: int, worth: float, alike: int, minutes: int
) -> None:
    found = causes(replace(SPAN, came_g=came), replace(
        TRACES, liquid_out=out, supply_by_books=books, missing_g=missing, bottle_kg_k=worth, same_bottle_off=alike, minutes=minutes,
    ))  # fmt: skip
    assert 1 <= len(found) <= 4
    ranks = [ORDER.index(one.strength) for one in found]
    assert ranks == sorted(ranks)


def test_two_swapped_digits_that_would_fit_are_found() -> None:
    # Weighed 9.92, typed 9.29: 630 g too little; 3.2 kg was likely and 3.2 came.
    span = replace(SPAN, came_g=2_570)
    found = slip(span, replace(TRACES, before=Typed("6.72 kg", 6_720), after=Typed("9.29 kg", 9_290)))
    assert found == "after filling 9.29 kg was typed; 9.92 would fit (two digits swapped)"
    first = causes(span, replace(TRACES, after=Typed("9.29 kg", 9_290)))[0]
    assert first.code == "typed" and first.strength == "points to it"


def test_a_digit_off_by_one_before_filling_is_found() -> None:
    # 7.72 typed for 6.72: a kilogram less seems to have come.
    span = replace(SPAN, came_g=2_200)
    found = slip(span, Traces(before=Typed("7.72 kg", 7_720), after=Typed("21 lb 14 oz", 9_920)))
    assert found == "before filling 7.72 kg was typed; 6.72 would fit (one digit off by one)"


def test_no_slip_is_made_up_where_none_fits() -> None:
    assert slip(replace(SPAN, came_g=100), replace(TRACES, after=Typed("14 lb 3 oz", 6_435), before=Typed("6.7 kg", 6_700))) == ""
