"""What is known of a bottle's dates, and what its rules make of them.

The data that the date rules take and give; the arithmetic is in ``requalification.py``.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass, replace
from typing import Literal

from bottles.rules.edition import MarkedRow
from bottles.rules.stamps import DateStamp
from shop.rules.month import MONTHS_A_YEAR, Month
from shop.rules.reason import Reason

Status = Literal["in date", "due this month", "overdue", "service life over", "cannot be judged"]


@dataclass(frozen=True, slots=True)
class History:
    """What is known of a bottle's dates; None is unknown.

    ``tests`` None means that nobody has looked for test stamps, an empty tuple that there
    are none. ``condition_noted`` is the day of the first open condition that makes it due
    at once. ``star_kept`` None means that nobody knows: the shorter interval then holds.
    """

    made: DateStamp | None = None
    tests: tuple[DateStamp, ...] | None = None
    star_kept: bool | None = None
    service_life_end: Month | None = None
    permit_interval_years: int | None = None
    condition_noted: datetime.date | None = None


@dataclass(frozen=True, slots=True)
class Requalification:
    """The dates of a bottle under a rule set, and its status on the day asked.

    ``not_filled_from`` is the first day on which it may not be filled by its dates.
    ``kept`` and ``fallback`` are the star's two dates; ``due`` is the one that holds.
    """

    status: Status
    due: Month | None = None
    kept: Month | None = None
    fallback: Month | None = None
    end_of_life: Month | None = None
    not_filled_from: datetime.date | None = None
    last: DateStamp | None = None
    row: MarkedRow | None = None
    reasons: tuple[Reason, ...] = ()

    def with_reasons(self, *reasons: Reason) -> Requalification:
        """The same with further reasons."""
        return replace(self, reasons=(*self.reasons, *reasons))


def interval_in_words(interval: int) -> str:
    """An interval of months in words."""
    years, rest = divmod(interval, MONTHS_A_YEAR)
    if rest:
        return f"{interval} months"
    return f"{years} year" if years == 1 else f"{years} years"
