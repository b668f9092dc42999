"""Keep what was answered to *may it be filled*, with what it rested on."""

from __future__ import annotations

from bottles.models import Bottle, Decision
from bottles.rules.facts import Facts, kept_form
from bottles.rules.fitness import Judgement
from bottles.selectors.judging import Rulebook
from shop.base.models import Act


def decide(
    *, act: Act, bottle: Bottle, book: Rulebook, facts: Facts, look: dict[str, bool] | None = None
) -> tuple[Judgement, Decision]:
    """Judge a bottle within an act's transaction and keep the answer with its inputs.

    `facts` were read within the act, with what was seen just now laid over them; `look` are the
    answers to the filler's look, item by item.
    """
    judgement = book.judge(facts)
    kept = Decision(
        act=act, bottle=bottle, on=book.on, edition=book.edition.code, edition_sha256=book.edition.sha256, policy=book.row,
        inputs={**kept_form(facts), "look": look or {}}, may_fill=judgement.may_be_filled, may_empty=judgement.may_be_emptied,
        limit_g=judgement.limit.grams, binds=judgement.limit.binds or "",
        reasons=[reason.as_dict() for reason in judgement.reasons],
    )  # fmt: skip
    kept.save()
    return judgement, kept
