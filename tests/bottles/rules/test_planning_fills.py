"""What a plan reads off its lattice, beside the transfer itself; and the last day to order."""

from __future__ import annotations

from datetime import date, timedelta

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.condensation import between
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel
from bottles.rules.planning.fills import Fills, warming_time
from bottles.rules.planning.ordering import LEAST_DAYS, Pace, order_by, pace_of
from bottles.rules.planning.problem import Day, Source, Start, Waiting
from tests.examples import times

MONDAY = date(2026, 3, 2)
WORKDAYS = range(5)
WALLS = {3.4e-3: 2_700.0, 6.8e-3: 5_300.0, 10e-3: 7_300.0, 13.4e-3: 9_400.0}
SUPPLIES = {0.029: 15_000.0, 0.040: 21_000.0, 0.020: 14_300.0}


@settings(max_examples=times(250), deadline=None, derandomize=True)
@given(
    volume=st.sampled_from(sorted(WALLS)), large=st.sampled_from(sorted(SUPPLIES)), held=st.floats(0.003, 0.4),
    bottle_k=st.sampled_from((255.15, 263.15, 278.15, 293.15)), share=st.floats(0.05, 1.0), supply_k=st.floats(276.0, 303.0),
    figure=st.sampled_from((0.0, 0.5, 1.0)),
)  # fmt: skip
def test_the_lattice_is_within_half_a_percent_of_the_limit(
    volume: float, large: float, held: float, bottle_k: float, share: float, supply_k: float, figure: float
) -> None:
    limit = 680 * volume
    one = Waiting("T-1", volume, WALLS[volume], held * limit, limit, (Start(bottle_k),), figure=figure)
    source = Source("S-1", large, SUPPLIES[large], share * 680 * large, supply_k, 0, line_m3=3e-5)
    fills = Fills(Day((one,), (source,), (0,), 36_000))
    read = min(fills.free_kg((0, one.net_kg, bottle_k), 0, source.net_kg, supply_k), limit - one.net_kg)
    transfer = Transfer(
        Vessel(large, SUPPLIES[large], source.net_kg, supply_k), Vessel(volume, WALLS[volume], one.net_kg, bottle_k), 3e-5
    )
    quick = transfer.mixed_free_kg()
    itself = max(0.0, between(transfer.cautious_free_kg(), quick, figure)) if quick > 0.0 else 0.0
    assert read == pytest.approx(min(itself, limit - one.net_kg), abs=0.005 * limit)


def test_a_supply_bottle_warms_towards_the_room_and_never_past_it() -> None:
    source = Source("S-1", 0.029, 15_000.0, 15.0, 283.15, 0)
    fills = Fills(Day((), (source,), (0,), 36_000))
    course = [fills.warmed(0, 15.0, 283.15, seconds) for seconds in (0, 600, 3_600, 36_000, 10**7)]
    assert course == sorted(course) and course[0] == 283.15 and course[-1] == pytest.approx(293.15)
    pace = warming_time(source, 15.0, 293.15)
    assert 3_600 < pace < 6 * 3_600  # hours for a supply bottle of this size: common practice
    assert fills.warmed(0, 15.0, 283.15, pace) == pytest.approx(293.15 - 10.0 * 0.3679, abs=0.01)


def test_giving_liquid_cools_a_supply_bottle() -> None:
    fills = Fills(Day((), (Source("S-1", 0.029, 15_000.0, 15.0, 293.15, 0),), (0,), 36_000))
    course = [fills.source_after(0, 15.0, 293.15, given_kg) for given_kg in (0.0, 2.0, 5.0, 9.0)]
    assert course == sorted(course, reverse=True) and course[0] == pytest.approx(293.15, abs=1e-6)


def test_transfers_alike_are_worked_out_once() -> None:
    one = Waiting("T-1", 6.8e-3, 5_300.0, 0.1, 4.6, (Start(258.15),))
    twins = tuple(Source(code, 0.029, 15_000.0, 19.0, 293.15, 0) for code in ("S-1", "S-2"))
    fills = Fills(Day((one,), twins, (0,), 36_000))
    first = fills.free_kg((0, 0.1, 258.15), 0, 18.2, 292.0)
    asked = fills.calls
    assert fills.free_kg((0, 0.1, 258.15), 1, 18.2, 292.0) == first and fills.calls == asked


def test_the_pace_is_the_mean_of_open_days_with_two_standard_errors() -> None:
    pace = pace_of([4_000, 6_000] * 8)
    assert pace is not None and pace.grams == 5_000 and pace.days == 16
    assert pace.error_g == pytest.approx(2 * 1_032.8 / 4, abs=1)


@pytest.mark.parametrize("used", [[], [0] * 20, [5_000] * (LEAST_DAYS - 1)])
def test_without_a_pace_there_is_no_day_to_order(used: list[int]) -> None:
    assert order_by(10_000, pace_of(used), today=MONDAY, weekdays=WORKDAYS, lead_days=2) is None


def test_the_order_comes_in_time_at_the_upper_end_of_the_pace() -> None:
    found = order_by(20_500, Pace(4_000, 1_000, 20), today=MONDAY, weekdays=WORKDAYS, lead_days=2)
    assert found is not None
    assert found.soonest == MONDAY + timedelta(days=4)  # four days of 5 kg, and a half
    assert found.lasts_until == MONDAY + timedelta(days=7)  # five days of 4 kg, then the weekend
    assert found.order_by == MONDAY + timedelta(days=2)


def test_an_order_that_is_late_is_due_today_and_a_closed_day_is_passed_over() -> None:
    late = order_by(1_000, Pace(4_000, 0, 20), today=MONDAY, weekdays=WORKDAYS, lead_days=3)
    assert late is not None and late.order_by == MONDAY
    closed = order_by(4_000 * 5, Pace(4_000, 0, 20), today=MONDAY, weekdays=WORKDAYS, lead_days=1)
    assert closed is not None and closed.soonest == MONDAY + timedelta(days=7)
    assert closed.order_by == MONDAY + timedelta(days=4)  # Friday, as Sunday is closed


def test_stock_for_more_than_a_year_asks_for_no_order() -> None:
    assert order_by(10**9, Pace(100, 0, 20), today=MONDAY, weekdays=WORKDAYS, lead_days=2) is None
