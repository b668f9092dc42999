"""The star after a test stamp: two dates, and which of them holds.

A star doubles the interval while its conditions are kept: nitrous oxide or another
listed gas, made after 1945, out of any rack, cluster or vehicle for each fill, a hammer
test at each fill. Once broken, the ordinary interval counts from the marked test date.
"""

from __future__ import annotations

from dataclasses import replace

from bottles.rules.edition import MarkedRow, RuleEdition
from bottles.rules.history import History, Requalification, interval_in_words
from bottles.rules.policy import Policy
from bottles.rules.stamps import DateStamp
from bottles.rules.words import say
from shop.rules import month as months

FIRST_STAR_YEAR = 1946


def star_dates(
    found: Requalification,
    last: DateStamp,
    history: History,
    marked: MarkedRow,
    edition: RuleEdition,
    policy: Policy,
    shortest: int,
) -> Requalification:
    """A star's two dates, where the specification knows a star."""
    source = edition.rule("star")
    if marked.row.star_interval_years is None:
        return found.with_reasons(say("star-not-for-mark", "warns", source, mark=marked.mark.spec))
    if history.made is not None and history.made.year < FIRST_STAR_YEAR:
        return found.with_reasons(say("star-too-old", "warns", source))
    long = marked.row.star_interval_years * months.MONTHS_A_YEAR
    overlay = policy.overlay_for(marked.mark.spec)
    if overlay is not None:
        long = min(long, overlay.interval_months)
    kept, fallback = last.at + long, last.at + shortest
    found = replace(found, kept=kept, fallback=fallback)
    if history.star_kept is None:
        return found.with_reasons(
            say(
                "star-fallback",
                "warns",
                source,
                kept=months.slashed(kept),
                fallback=months.slashed(fallback),
            ),
        )
    if history.star_kept:
        return found.with_reasons(say("star-kept", "explains", source, interval=interval_in_words(long)))
    return found.with_reasons(
        say(
            "star-broken",
            "warns",
            edition.rule("star broken"),
            interval=interval_in_words(shortest),
            fallback=months.slashed(fallback),
            house=edition.words["house"],
        ),
    )
