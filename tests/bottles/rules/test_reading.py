"""Marks and stamps are read as they are stamped, and what can't be read isn't guessed."""

from __future__ import annotations

import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.marks import Pressure, read_mark
from bottles.rules.specifications import specifications
from bottles.rules.stamps import StampError, read_stamp
from tests.bottles.rules.tables import day, rows, yes_no


@pytest.mark.parametrize("case", rows("mark_cases.csv"), ids=lambda case: case["typed"] or "empty")
def test_a_mark_is_read_as_stamped(case: dict[str, str]) -> None:
    mark = read_mark(case["typed"])
    assert (mark.spec or "") == case["spec"]
    assert str(mark.service or "") == case["service"]
    assert str(mark.test_pressure or "") == case["test_pressure"]
    assert (mark.permit or "") == case["permit"]
    assert " ".join(f"{each.spec} {each.service}" for each in mark.also) == case["also"]


@pytest.mark.parametrize("case", rows("stamp_cases.csv"), ids=lambda case: f"{case['typed']}-{case['year_first']}")
def test_a_stamp_is_read_as_stamped(case: dict[str, str]) -> None:
    year_first = bool(yes_no(case["year_first"]))
    if case["error"]:
        with pytest.raises(StampError) as caught:
            read_stamp(case["typed"], year_first=year_first, today=day(case["today"]))
        assert caught.value.code == case["error"]
        assert str(caught.value)
        return
    stamp = read_stamp(case["typed"], year_first=year_first, today=day(case["today"]))
    assert stamp.year == int(case["year"])
    assert stamp.month == (int(case["month"]) if case["month"] else None)
    assert stamp.star == bool(case["star"])
    assert stamp.plus == bool(case["plus"])
    assert (stamp.facility or "") == case["facility"]


@pytest.mark.parametrize(
    ("typed", "letters"),
    [("06/2021 UE", ("UE",)), ("06/2021S", ("S",)), ("06/21+E", ("E",)), ("6/21 VE*", ("VE",)), ("6/21 star", ())],
)
def test_letters_after_a_stamp_are_kept(typed: str, letters: tuple[str, ...]) -> None:
    assert read_stamp(typed, year_first=False).letters == letters


def test_every_known_specification_is_read_back_from_its_own_name() -> None:
    for code in specifications():
        assert read_mark(code).spec == code or specifications()[code].permit, code


def test_124_bar_and_1800_psi_are_one_class() -> None:
    # 1800 psi × 6894.757 Pa = 12,410,563 Pa: 124 bar stamped in Canada (TC-3ALM124).
    assert Pressure(124, "bar").pascals() == pytest.approx(Pressure(1800, "psi").pascals(), rel=1e-3)


@given(st.text(max_size=80))
def test_any_text_is_a_mark_or_unknown_but_never_an_error(text: str) -> None:
    mark = read_mark(text)
    assert mark.spec is None or mark.spec in specifications()


@given(st.text(alphabet="0123456789/-. *+[]AUES★", max_size=80), st.booleans(), st.dates(datetime.date(1950, 1, 1)))
def test_any_text_is_a_stamp_or_a_sentence(text: str, year_first: bool, today: datetime.date) -> None:
    try:
        stamp = read_stamp(text, year_first=year_first, today=today)
    except StampError as error:
        assert error.code
        assert error.sentence
    else:
        assert stamp.month is None or 1 <= stamp.month <= 12
        assert stamp.at <= today.year * 12 + today.month - 1


@given(st.dates(datetime.date(1950, 1, 1), datetime.date(2090, 1, 1)), st.booleans())
def test_a_stamp_with_four_digits_reads_the_same_in_both_orders(date: datetime.date, year_first: bool) -> None:
    for typed in (f"{date.month}/{date.year}", f"{date.year}/{date.month:02d}", f"{date.year}-{date.month:02d}*"):
        stamp = read_stamp(typed, year_first=year_first, today=date)
        assert (stamp.year, stamp.month) == (date.year, date.month)
