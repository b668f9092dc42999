"""The whole invented past as steps, in the order in which they're written.

First what must be on the page at once, then the register, then the days, oldest first. Each
bottle's own steps follow each other in time, so its books are right after every one of them.
"""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date
from zoneinfo import ZoneInfo

from shop.demo import counter, mishaps, promised, regulars, states
from shop.demo.days import HISTORY_MONTHS, Days
from shop.demo.history import History
from shop.demo.kit import Kit
from shop.demo.past import Past
from shop.demo.steps import Step

SEED = 20_260


def plan(*, today: date, kit: Kit, seed: int = SEED, history_months: float = HISTORY_MONTHS) -> Iterator[Step]:
    """Give every step; the same day, seed and kit give the same steps, to the byte."""
    past = Past(kit, Days.until(today, ZoneInfo(kit.time_zone), history_months), "demo", seed)
    yield from counter.premises(past)
    yield from counter.at_the_counter(past)
    yield from counter.ready_supply(past)
    yield from counter.everybody_else(past)
    yield from states.by_their_dates(past)
    yield from states.by_their_marks(past)
    yield from states.by_their_measures(past)
    yield from states.by_what_was_noted(past)
    yield from mishaps.in_the_books(past)
    yield from mishaps.somewhere_else(past)
    yield from promised.for_today(past)
    yield from regulars.register_regulars(past)
    yield from History(past).days()
