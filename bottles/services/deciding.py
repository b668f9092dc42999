"""Keep what was answered to *may it be filled*, with what it rested on."""

from __future__ import annotations

from typing import Any

from bottles.models import Bottle, Decision
from bottles.rules.facts import kept_form
from bottles.rules.fitness import Judgement, judge
from bottles.selectors.judging import facts_of_bottle, rulebook
from shop.base.models import Act, Shop


def decide(
    *, act: Act, bottle: Bottle, shop: Shop, given: dict[str, Any], look: dict[str, bool] | None = None
) -> tuple[Judgement, Decision]:
    """Judge a bottle within an act's transaction and keep the answer with its inputs.

    `given` are facts seen just now; `look` the answers to the filler's look, item by item.
    """
    book = rulebook(shop)
    facts = facts_of_bottle(bottle, book, given)
    judgement = judge(facts, book.edition, book.policy, book.on)
    kept = Decision(
        act=act, bottle=bottle, on=book.on, edition=book.edition.code, edition_sha256=book.edition.sha256, policy=book.row,
        inputs={**kept_form(facts), "look": look or {}}, may_fill=judgement.may_be_filled, may_empty=judgement.may_be_emptied,
        limit_g=judgement.limit.grams, binds=judgement.limit.binds or "",
        reasons=[reason.as_dict() for reason in judgement.reasons],
    )  # fmt: skip
    kept.save()
    return judgement, kept
