"""Months as whole numbers, and reasons in order."""

from __future__ import annotations

import calendar
import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shop.rules import month as months
from shop.rules.origin import ORIGINS, caution, is_verified
from shop.rules.reason import SEVERITIES, Reason, in_order

MONTHS = st.integers(months.from_ym(1900, 1), months.from_ym(2200, 12))


@pytest.mark.parametrize(
    ("year", "month", "last"),
    [(2024, 2, 29), (2026, 2, 28), (2000, 2, 29), (2100, 2, 28), (2025, 12, 31), (2026, 6, 30)],
)
def test_the_last_day_of_a_month_is_the_calendars(year: int, month: int, last: int) -> None:
    # The Gregorian rule: every fourth year, not the centuries, but every fourth century.
    assert months.last_day(months.from_ym(year, month)) == datetime.date(year, month, last)


@given(MONTHS)
def test_a_month_comes_back_from_each_way_of_writing_it(value: int) -> None:
    assert months.from_ym(*months.ym(value)) == value
    assert months.parse(months.iso(value)) == value
    assert months.parse(months.slashed(value)) == value
    assert months.of_date(months.first_day(value)) == months.of_date(months.last_day(value)) == value
    assert months.last_day(value) + datetime.timedelta(days=1) == months.first_day(value + 1)


@given(MONTHS, st.integers(0, 100))
def test_years_added_keep_the_month(value: int, years: int) -> None:
    year, month = months.ym(value)
    assert months.ym(months.add_years(value, years)) == (year + years, month)


def test_five_years_are_never_five_times_365_days() -> None:
    tested = datetime.date(2021, 6, 1)
    assert (tested + datetime.timedelta(days=5 * 365)).month == 5 or calendar.isleap(2024)
    assert months.iso(months.add_years(months.of_date(tested), 5)) == "2026-06"


@pytest.mark.parametrize("text", ["", "2026-13", "13/2026", "0/2026", "06/26", "2026", "2026-06-01", "-1/2026"])
def test_what_is_not_a_month_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="month"):
        months.parse(text)


def test_refusing_reasons_stand_first_and_nothing_is_said_twice() -> None:
    def one(code: str, severity: str) -> Reason:
        return Reason(code, severity, "s", "n", "c", "read")  # type: ignore[arg-type]

    given_in = [one("a", "explains"), one("b", "warns"), one("c", "refuses"), one("d", "first"), one("c", "refuses")]
    ordered = in_order([*given_in, one("e", "unknown")])
    assert [each.code for each in ordered] == ["c", "e", "d", "b", "a"]
    assert [each.severity for each in ordered] == list(SEVERITIES)
    assert ordered[0].as_dict()["code"] == "c"


def test_what_rests_on_memory_carries_a_caution() -> None:
    for origin in ORIGINS:
        assert bool(caution(origin)) == (not is_verified(origin)), origin
