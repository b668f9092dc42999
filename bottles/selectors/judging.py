"""Judge bottles of the register: the facts gathered, the day's rules, one pure function."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

from bottles.models import Bottle
from bottles.rules.edition import RuleEdition
from bottles.rules.facts import Facts
from bottles.rules.fitness import Judgement, judge
from bottles.rules.policy import Policy
from bottles.selectors.edition import edition_for, policy_of, policy_row
from bottles.selectors.facts import facts_of
from shop.base import clock, models
from shop.base.models import Shop


@dataclass(frozen=True, slots=True)
class Rulebook:
    """What holds on a day: the rule set, the policy and the row that the policy came from."""

    on: datetime.date
    edition: RuleEdition
    policy: Policy
    row: models.Policy | None

    @property
    def star_items(self) -> tuple[str, ...]:
        """The items of the look that a star asks for."""
        return tuple(item.code for item in self.edition.look if item.when == "star")


def rulebook(shop: Shop, on: datetime.date | None = None) -> Rulebook:
    """Return what holds in the shop on a day; today where none is given."""
    on = on or clock.today(shop)
    row = policy_row(on)
    return Rulebook(on, edition_for(shop, on, row), policy_of(row), row)


def judge_bottle(
    bottle: Bottle, *, shop: Shop, on: datetime.date | None = None, given: dict[str, Any] | None = None
) -> Judgement:
    """Judge one bottle; `given` are facts seen at the counter just now, over what is recorded.

    Such are `look_done`, `star_check_done`, `pressure_kept`, `dried_and_purged`, `contents`,
    `consent`: fields of bottles.rules.facts.Facts.
    """
    book = rulebook(shop, on)
    return judge(facts_of_bottle(bottle, book, given), book.edition, book.policy, book.on)


def facts_of_bottle(bottle: Bottle, book: Rulebook, given: dict[str, Any] | None = None) -> Facts:
    """Return one bottle's facts, with what was seen just now laid over them."""
    return replace(facts_of([bottle], star_items=book.star_items)[bottle.pk], **(given or {}))


def judge_many(bottles: Sequence[Bottle], *, shop: Shop, on: datetime.date | None = None) -> dict[int, Judgement]:
    """Judge many bottles by key, in a fixed number of queries."""
    book = rulebook(shop, on)
    facts = facts_of(bottles, star_items=book.star_items)
    return {key: judge(each, book.edition, book.policy, book.on) for key, each in facts.items()}
