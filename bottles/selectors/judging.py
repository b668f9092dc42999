"""Judge bottles of the register: the facts gathered, the day's rules, one pure function."""

from __future__ import annotations

import datetime
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from bottles.models import Bottle, Standing
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
    """What holds on a day: the rule set, the policy and the row that the policy came from.

    Read once for an act or a page and handed down, so that all of it is judged by one.
    """

    on: datetime.date
    edition: RuleEdition
    policy: Policy
    row: models.Policy | None

    def facts(self, bottles: Sequence[Bottle], standings: Mapping[int, Standing] | None = None) -> dict[int, Facts]:
        """Return what is known of bottles by key, in a fixed number of queries; see `facts_of`."""
        star_items = tuple(item.code for item in self.edition.look if item.when == "star")
        return facts_of(bottles, star_items=star_items, standings=standings)

    def judge(self, facts: Facts) -> Judgement:
        """Judge what is known of one bottle."""
        return judge(facts, self.edition, self.policy, self.on)

    def judge_all(
        self, bottles: Sequence[Bottle], standings: Mapping[int, Standing] | None = None
    ) -> dict[int, Judgement]:  # fmt: skip
        """Judge bottles by key, in a fixed number of queries."""
        return {key: self.judge(facts) for key, facts in self.facts(bottles, standings).items()}


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
    return book.judge(replace(book.facts([bottle])[bottle.pk], **(given or {})))


def judge_many(bottles: Sequence[Bottle], *, shop: Shop, on: datetime.date | None = None) -> dict[int, Judgement]:
    """Judge many bottles by key, in a fixed number of queries."""
    return rulebook(shop, on).judge_all(bottles)
