"""Due months and statuses, case by case and as properties."""

from __future__ import annotations

import datetime
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.edition_files import edition_on, editions
from bottles.rules.history import History, Requalification
from bottles.rules.marks import read_mark
from bottles.rules.policy import Overlay, Policy
from bottles.rules.requalification import requalify
from bottles.rules.stamps import DateStamp, read_stamp
from shop.rules import month as months
from tests.bottles.rules.tables import day, rows, yes_no

TODAY = datetime.date(2040, 1, 1)
CASES = rows("requalification_cases.csv")


def judged(case: dict[str, str]) -> Requalification:
    on = day(case["on"])
    edition = edition_on(case["rules"], on)
    assert edition is not None

    def stamp(text: str) -> DateStamp:
        return read_stamp(text, year_first=edition.year_first, today=TODAY)

    typed = case["tests"]
    pieces = [typed] if "[" in typed else typed.split()
    tests = {"?": None, "-": ()}.get(typed, tuple(stamp(text) for text in pieces if text not in "?-"))
    overlays = (Overlay(int(case["overlay_months"])),) if case["overlay_months"] else ()
    history = History(
        made=stamp(case["made"]) if case["made"] else None,
        tests=tests,
        star_kept=yes_no(case["star_kept"]),
        service_life_end=months.parse(case["life_end"]) if case["life_end"] else None,
        condition_noted=day(case["condition_on"]) if case["condition_on"] else None,
    )
    policy = Policy(month_rule=case["month_rule"] or None, overlays=overlays)  # type: ignore[arg-type]
    return requalify(history, read_mark(case["mark"]), edition, policy, on)


def test_the_table_is_large_enough_and_every_row_has_its_source() -> None:
    assert len(CASES) >= 60
    assert all(case["source"] for case in CASES)


@pytest.mark.parametrize(
    "case", CASES, ids=lambda case: "-".join((case["rules"], case["mark"], case["tests"], case["on"]))
)
def test_dates_and_status(case: dict[str, str]) -> None:
    found = judged(case)
    assert (months.iso(found.due) if found.due is not None else "") == case["due"]
    assert found.status == case["status"]
    assert set(case["codes"].split()) <= {reason.code for reason in found.reasons}
    if case["by_date"] == "?":
        assert found.status == "cannot be judged"
        return
    refused = any(reason.severity == "refuses" for reason in found.reasons)
    assert refused == (case["by_date"] == "no")
    # The first day without a fill and the refusal are worked out apart and have to agree.
    stops = found.not_filled_from
    assert refused == (stops is not None and day(case["on"]) >= stops)


def test_a_star_has_two_dates() -> None:
    case = next(case for case in CASES if case["tests"] == "03/2018*" and case["star_kept"] == "")
    found = judged(case)
    assert found.kept == months.from_ym(2028, 3)
    assert found.fallback == found.due == months.from_ym(2023, 3)


MARKS = [
    "DOT-3AL1800",
    "DOT-3AA2015",
    "DOT-3HT1850",
    "DOT-SP 10915-4500",
    "TC-3ALM124",
    "TC-3AAM153",
    "UN ISO 7866 PH250",
    "ISO 7866 PH180",
    "pi ISO 11119-2 PH300",
    "DOT-3E1800",
    "DOT-39",
]
MONTHS = st.integers(months.from_ym(1990, 1), months.from_ym(2035, 12))
DAYS = st.dates(datetime.date(1990, 1, 1), datetime.date(2060, 12, 31))


@st.composite
def stamps(draw: st.DrawFn) -> DateStamp:
    year, month = months.ym(draw(MONTHS))
    only_year = draw(st.booleans())
    return DateStamp("", year, None if only_year else month, star=draw(st.booleans()))


@st.composite
def histories(draw: st.DrawFn) -> History:
    return History(
        made=draw(st.none() | stamps()),
        tests=draw(st.none() | st.lists(stamps(), max_size=3).map(tuple)),
        star_kept=draw(st.none() | st.booleans()),
        service_life_end=draw(st.none() | MONTHS),
        permit_interval_years=draw(st.none() | st.integers(1, 10)),
        condition_noted=draw(st.none() | DAYS),
    )


@st.composite
def policies(draw: st.DrawFn) -> Policy:
    return Policy(
        month_rule=draw(st.sampled_from([None, "through due month", "from first day"])),
        overlays=tuple(Overlay(n) for n in draw(st.lists(st.integers(1, 200), max_size=2))),
    )


EDITIONS = st.sampled_from(editions())
A_MARK = st.sampled_from(MARKS).map(read_mark)


@given(histories(), A_MARK, EDITIONS, policies(), DAYS, MONTHS, st.integers(0, 200), st.booleans())
def test_a_later_test_never_gives_an_earlier_due_date(history, mark, edition, policy, on, month, later, star) -> None:
    def with_test(value: int) -> Requalification:
        year, number = months.ym(value)
        tests = (DateStamp("", year, number, star=star),)
        return requalify(replace(history, tests=tests), mark, edition, policy, on)

    earlier_due, later_due = with_test(month).due, with_test(month + later).due
    assert (earlier_due is None) == (later_due is None) or history.condition_noted is not None
    if earlier_due is not None and later_due is not None and history.condition_noted is None:
        assert later_due >= earlier_due


@given(histories(), A_MARK, EDITIONS, policies(), DAYS, st.integers(1, 200))
def test_a_stricter_policy_never_gives_a_later_date(history, mark, edition, policy, on, interval) -> None:
    before = requalify(history, mark, edition, policy, on)
    stricter = replace(policy, month_rule="from first day", overlays=(*policy.overlays, Overlay(interval)))
    after = requalify(history, mark, edition, stricter, on)
    if before.due is not None:
        assert after.due is not None
        assert after.due <= before.due
    if before.not_filled_from is not None:
        assert after.not_filled_from is not None
        assert after.not_filled_from <= before.not_filled_from


@given(histories(), A_MARK, EDITIONS, policies(), DAYS)
def test_the_status_changes_only_at_the_dates_that_the_rule_gives(history, mark, edition, policy, on) -> None:
    # A condition counts from its own day, so it is left out here.
    history = replace(history, condition_noted=None)
    today = requalify(history, mark, edition, policy, on)
    tomorrow_day = on + datetime.timedelta(days=1)
    tomorrow = requalify(history, mark, edition, policy, tomorrow_day)
    allowed = set()
    for month in (today.due, today.end_of_life):
        if month is not None:
            allowed |= {months.first_day(month), months.first_day(month + 1)}
    if today.last is not None:
        # Before the stamp's own month the stamp itself can't be true yet.
        allowed.add(months.first_day(today.last.at))
    assert today.status == tomorrow.status or tomorrow_day in allowed


@given(histories(), A_MARK, EDITIONS, policies(), DAYS)
def test_the_first_day_without_a_fill_agrees_with_the_refusal(history, mark, edition, policy, on) -> None:
    found = requalify(history, mark, edition, policy, on)
    if found.status == "cannot be judged":
        return
    refused = any(reason.severity == "refuses" for reason in found.reasons)
    assert refused == (found.not_filled_from is not None and on >= found.not_filled_from)
