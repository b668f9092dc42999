"""Keep what was answered to *may it be filled*, with what it rested on."""

from __future__ import annotations

import uuid
from dataclasses import replace
from typing import Any

from bottles.models import Bottle, Decision
from bottles.rules.facts import Facts, kept_form
from bottles.rules.fitness import Judgement
from bottles.selectors.judging import Rulebook, rulebook
from bottles.services.locking import lock
from shop.base import acts
from shop.base.errors import AlreadyDone
from shop.base.models import Act, Shop
from shop.people.models import User


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


def keep_refusal(
    *, key: uuid.UUID, person: User | None, bottle: Bottle, shop: Shop, given: dict[str, Any], look: dict[str, bool]
) -> None:
    """Keep an answer that stopped a refill from being opened, in an act of its own.

    The act that would have opened it was rolled back whole. The same form with the same answers
    is kept once, however often it arrives.
    """
    same = uuid.uuid5(key, repr((sorted(given.items()), sorted(look.items()))))
    try:
        with acts.begin(key=same, person=person, code="refill.refused", subject=f"bottle:{bottle.code}") as act:
            bottle = lock([bottle])[bottle.pk]
            book = rulebook(shop)
            decide(act=act, bottle=bottle, book=book, facts=replace(book.facts([bottle])[bottle.pk], **given), look=look)
    except AlreadyDone:
        return
