"""When a bottle's test falls due, and what state that puts it in on a given day.

The arithmetic is of whole months: due month = month of the last test + interval. The
stamp of manufacture starts the first interval. What may shorten it: a stricter overlay,
a star whose conditions were not kept, a condition noted. What ends it for good: the end
of a service life, which no test revives and whose last month is still inside.
"""

from __future__ import annotations

import datetime
from dataclasses import replace

from bottles.rules.edition import Cited, MarkedRow, RuleEdition, SpecRow
from bottles.rules.history import History, Requalification, Status, interval_in_words
from bottles.rules.marks import SpecMark
from bottles.rules.policy import Policy
from bottles.rules.specifications import Wall
from bottles.rules.stamps import DateStamp
from bottles.rules.star import star_dates
from bottles.rules.words import say
from shop.rules import month as months
from shop.rules.month import Month
from shop.rules.reason import Reason


def requalify(
    history: History,
    mark: SpecMark | None,
    edition: RuleEdition,
    policy: Policy,
    on: datetime.date,
    *,
    wall: Wall | None = None,
) -> Requalification:
    """The due month, the end of life and the status of a bottle on a day."""
    marked = edition.row_for(mark, wall)
    last = _last_stamp(history)
    found = Requalification(
        status="cannot be judged",
        end_of_life=_end_of_life(history, marked.row if marked else None),
        last=last,
        row=marked,
    )
    found = _life(found, edition, on)
    if marked is None:
        return found.with_reasons(*_no_row(mark, edition, wall))
    if marked.row.no_test:
        return _judged(found.with_reasons(_no_test(marked)), history, edition, policy, on)
    if marked.row.interval_years is None:
        return found.with_reasons(_no_interval(marked))
    if last is None:
        return found.with_reasons(say("no-stamp-read", "first", edition.rule("legible"), "filling"))
    if problem := _unusable(last, history, marked, edition, on):
        found = found.with_reasons(problem)
        if last.month is None:
            # The month that a date would need isn't there. A misread one gives a date
            # all the same, so that it shows.
            return found
    found = _due(found, last, history, marked, edition, policy)
    if found.due is None or problem is not None:
        return found
    return _judged(found, history, edition, policy, on)


def _last_stamp(history: History) -> DateStamp | None:
    """The stamp that the interval runs from: the last test, else the manufacture."""
    tests = history.tests or ()
    if not tests:
        return history.made
    # Of one month stamped twice the one with the more complete date, then a star, counts.
    return max(tests, key=lambda stamp: (stamp.at, stamp.month is not None, stamp.star))


def _end_of_life(history: History, row: SpecRow | None) -> Month | None:
    ends = []
    if history.service_life_end is not None:
        ends.append(history.service_life_end)
    if row is not None and row.service_life_years is not None and history.made is not None:
        ends.append(months.add_years(history.made.at, row.service_life_years))
    return min(ends, default=None)


def _life(found: Requalification, edition: RuleEdition, on: datetime.date) -> Requalification:
    end = found.end_of_life
    if end is None:
        return found
    source = edition.rule("service life")
    house = edition.words["house"]
    found = replace(found, not_filled_from=months.first_day(end + 1))
    if months.of_date(on) > end:
        over = say(
            "service-life-over",
            "refuses",
            source,
            "filling",
            "emptying",
            end=months.slashed(end),
            house=house,
        )
        return replace(found, status="service life over").with_reasons(over)
    return found.with_reasons(say("service-life-ends", "explains", source, end=months.slashed(end)))


def _no_row(mark: SpecMark | None, edition: RuleEdition, wall: Wall | None) -> tuple[Reason, ...]:
    if mark is None:
        return ()
    source = Cited(edition.title, "read in part")
    if all(each.spec is None for each in mark.each()):
        return (say("mark-unknown", "unknown", source, "filling", mark=mark.typed),)
    specs = {each.spec for each in mark.each()}
    if wall is None and any(row.walls and specs & set(row.specifications) for row in edition.rows):
        return (say("wall-needed", "first", source, "filling", mark=mark.typed),)
    return (say("no-row-for-mark", "unknown", source, "filling", mark=mark.typed, edition=edition.title),)


def _no_test(marked: MarkedRow) -> Reason:
    return say("no-test-asked", "explains", marked.row.source, mark=marked.mark.spec)


def _no_interval(marked: MarkedRow) -> Reason:
    return say("no-interval", "explains", marked.row.source, mark=marked.mark.spec)


def _unusable(
    last: DateStamp,
    history: History,
    marked: MarkedRow,
    edition: RuleEdition,
    on: datetime.date,
) -> Reason | None:
    """Why a stamp can't carry a date here, or None."""
    source = edition.rule("legible")
    made = history.made
    if last.at > months.of_date(on):
        return say("test-after-day", "unknown", source, "filling", last=last.text)
    if made is not None and _is_before(last, made):
        return say(
            "test-before-manufacture",
            "unknown",
            source,
            "filling",
            last=last.text,
            made=made.text,
        )
    if last.month is None and not _year_is_enough(marked.row, edition):
        return say(
            "stamp-without-month",
            "unknown",
            source,
            "filling",
            last=last.text,
            house=edition.words["house"],
        )
    return None


def _is_before(test: DateStamp, made: DateStamp) -> bool:
    if test.month is None or made.month is None:
        return test.year < made.year
    return test.at < made.at


def _year_is_enough(row: SpecRow, edition: RuleEdition) -> bool:
    least = edition.year_only_from_interval_years
    return least is not None and row.interval_years is not None and row.interval_years >= least


def _due(
    found: Requalification,
    last: DateStamp,
    history: History,
    marked: MarkedRow,
    edition: RuleEdition,
    policy: Policy,
) -> Requalification:
    """The due month and how it came about."""
    row = marked.row
    years = row.interval_years or 0
    source = row.source
    if history.permit_interval_years is not None:
        if row.receiver == "per permit":
            years = history.permit_interval_years
            source = Cited("The permit itself", "entered")
    elif row.receiver == "per permit":
        found = found.with_reasons(
            say(
                "permit-governs",
                "warns",
                edition.rule("permit"),
                interval=interval_in_words(years * 12),
            )
        )
    interval = years * months.MONTHS_A_YEAR
    if last.plus:
        found = found.with_reasons(say("plus-no-effect", "explains", edition.rule("plus")))
    overlay = policy.overlay_for(marked.mark.spec)
    shortest = interval if overlay is None else min(interval, overlay.interval_months)
    if last.star:
        found = star_dates(found, last, history, marked, edition, policy, shortest)
    # A star's longer interval has no business in ``shortest``: it only holds while kept.
    holds = found.kept if found.kept is not None and history.star_kept else last.at + shortest
    by_overlay = overlay is not None and last.at + overlay.interval_months == holds
    if overlay is not None and by_overlay and (overlay.interval_months < interval or holds == found.kept):
        words = interval_in_words(overlay.interval_months)
        found = found.with_reasons(say("due-shortened", "explains", overlay.source, interval=words))
    if holds == found.kept and history.star_kept:
        # The ordinary interval may be read and the star's from memory: say which decided.
        source = edition.rule("star")
    explained = say(
        "due-date",
        "explains",
        source,
        test="Test" if history.tests else "Made",
        last=last.text,
        interval=interval_in_words(holds - last.at),
        due=months.slashed(holds),
    )
    return replace(found, due=holds).with_reasons(explained)


def _judged(
    found: Requalification,
    history: History,
    edition: RuleEdition,
    policy: Policy,
    on: datetime.date,
) -> Requalification:
    """The status on the day, once the due month is known."""
    house, test = edition.words["house"], edition.words["test"]
    by_stamp = found.due
    if history.condition_noted is not None:
        noted = months.of_date(min(history.condition_noted, on))
        found = replace(found, due=noted if by_stamp is None else min(by_stamp, noted))
        found = found.with_reasons(say("due-at-once", "explains", edition.rule("condition"), house=house))
    due, now = found.due, months.of_date(on)
    stops = _stops(found, due == by_stamp, edition, policy)
    if found.not_filled_from is not None:
        stops = min(stops, found.not_filled_from)
    if due is not None or found.not_filled_from is not None:
        found = replace(found, not_filled_from=stops)
    if found.status == "service life over":
        # What the test date adds no longer matters: nothing revives it.
        return found
    if due is None or now < due:
        status: Status = "in date"
    elif now == due:
        status = "due this month"
        found = found.with_reasons(_in_due_month(found, due, due == by_stamp, edition, policy))
    else:
        status = "overdue"
        overdue = say(
            "overdue",
            "refuses",
            edition.rule("overdue"),
            "filling",
            due=months.slashed(due),
            test=test,
            house=house,
        )
        source_only = say("source-when-overdue", "explains", edition.rule("source when overdue"))
        found = found.with_reasons(overdue, source_only)
    return replace(found, status=status)


def _stops(found: Requalification, by_stamp: bool, edition: RuleEdition, policy: Policy) -> datetime.date:
    """The first day on which the due month stops filling."""
    due = found.due
    if due is None:
        return datetime.date.max
    rule = policy.month_rule or edition.month_rule
    year_only = by_stamp and found.last is not None and found.last.month is None
    if rule == "from first day" or year_only:
        return months.first_day(due)
    return months.first_day(due + 1)


def _in_due_month(found: Requalification, due: Month, by_stamp: bool, edition: RuleEdition, policy: Policy) -> Reason:
    test = edition.words["test"]
    last = found.last
    if by_stamp and last is not None and last.month is None:
        return say(
            "year-only-due",
            "refuses",
            edition.rule("year only"),
            "filling",
            last=last.text,
            year=months.ym(due)[0],
            test=test,
        )
    if (policy.month_rule or edition.month_rule) == "from first day":
        source = edition.rule("due month")
        if policy.month_rule == "from first day":
            source = Cited(f"Setting of this shop; {source.citation}", "entered")
        return say(
            "due-month-stopped",
            "refuses",
            source,
            "filling",
            due=months.slashed(due),
            test=test,
        )
    return say(
        "in-due-month",
        "warns",
        edition.rule("due month"),
        "filling",
        due=months.slashed(due),
        last_day=f"{months.last_day(due):%Y-%m-%d}",
        test=test,
    )
