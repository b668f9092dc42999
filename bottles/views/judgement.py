"""The first part of a bottle's page: may it be filled, may it be emptied, and why."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from django.http import HttpRequest
from django.urls import reverse

from bottles.models import Bottle, Standing
from bottles.rules.fitness import Judgement
from bottles.selectors.judging import judge_many, rulebook
from bottles.views.wording import Words, words_for
from shop.base.models import Shop
from shop.rules import month as months
from shop.rules.reason import Reason


@dataclass(frozen=True, slots=True)
class Verdict:
    """An answer as a page shows it: the shape, the word."""

    kind: str  # yes, after, no, unknown
    word: str


FILLING = {
    "yes": Verdict("yes", "May be filled"),
    "only after": Verdict("after", "Fill only after…"),
    "no": Verdict("no", "Must not be filled"),
    "unknown": Verdict("unknown", "Can't be judged: not filled until it can"),
}
AFTER_THE_LOOK = Verdict("yes", "May be filled, after the filler's look")
EMPTYING = {
    "yes": "It may be emptied into another bottle.",
    "only after": "It may be emptied into another bottle only after what is marked below.",
    "no": "It must not be emptied into another bottle.",
    "unknown": "Whether it may be emptied into another bottle can't be judged.",
}


def verdict(judgement: Judgement) -> Verdict:
    """Return the answer to *may it be filled* as a page shows it.

    Every fill owes a look, so a bottle for which only that is left reads as one that may.
    """
    if judgement.only_the_look_is_left:
        return AFTER_THE_LOOK
    return FILLING[judgement.may_be_filled]


def section(request: HttpRequest, bottle: Bottle, standing: Standing, shop: Shop) -> dict[str, Any]:
    """The decision's frame, the limit with every figure behind it, what wasn't judged."""
    judgement = judge_many([bottle], shop=shop)[bottle.pk]
    words = words_for(request, shop)
    answer = verdict(judgement)
    book = rulebook(shop)
    decides = [reason for reason in judgement.reasons if reason.severity != "explains" and "filling" in reason.about]
    return {
        "kind": answer.kind,
        "word": answer.word,
        "lines": [line for line in (limit_line(judgement, words), due_line(judgement, book.edition.words), EMPTYING[judgement.may_be_emptied]) if line],
        "reasons": decides,
        "others": [reason for reason in judgement.reasons if reason not in decides],
        "limits": [
            [figure.label, words.mass(figure.grams), figure.origin, figure.source.citation]
            for figure in sorted(judgement.limit.candidates, key=lambda each: each.grams)
        ],
        "limit_head": ["Figure", "Nitrous", "Origin", "Rests on"],
        "not_judged": judgement.not_judged,
        "edition": book.edition.title,
        "edition_code": book.edition.code,
        "acts": acts_for(bottle, standing, judgement),
    }


def limit_line(judgement: Judgement, words: Words) -> str:
    """Up to how much it may be filled, and what binds."""
    limit = judgement.limit
    if limit.grams is None:
        return "No fill limit can be worked out."
    binding = next(figure for figure in limit.candidates if figure.code == limit.binds)
    return f"Up to {words.mass(limit.grams)} of nitrous: {binding.label} ({binding.source.citation})."


def due_line(judgement: Judgement, words: Any) -> str:
    """When its test is due, in the rule set's own words."""
    if judgement.due is None:
        return ""
    line = f"{words['due']} {months.slashed(judgement.due)}: {judgement.status}."
    dates = judgement.dates
    if dates.kept is not None and dates.fallback is not None:
        line += f" Star: {months.slashed(dates.kept)} if its conditions are kept, else {months.slashed(dates.fallback)}."
    return line


def first_reason(judgement: Judgement) -> Reason | None:
    """The reason to show where there is room for one."""
    return next((reason for reason in judgement.reasons if "filling" in reason.about and reason.code != "look-owed"), None)


def acts_for(bottle: Bottle, standing: Standing, judgement: Judgement) -> list[dict[str, Any]]:
    """What can be done next, the most likely first."""
    if bottle.retired_at is not None:
        return []
    code = bottle.code

    def link(name: str, word: str, *, main: bool = False) -> dict[str, Any]:
        return {"url": reverse(f"bottles:{name}", args=[code]), "word": word, "main": main}

    if not standing.is_in:
        return [link("check_in", "Check in", main=True), link("condition_new", "Note damage")]
    fills = judgement.may_be_filled in ("yes", "only after") and bottle.use != "supply"
    acts = [link("weigh", "Weigh", main=not fills)]
    if fills:
        acts.append(link("fill", "Forecast and fill", main=True))
    if bottle.use == "supply":
        acts.append(link("deliver", "Delivered full"))
        acts.append(link("return", "Return to supplier"))
    acts += [
        link("hand_over", "Hand over"),
        link("move", "Move"),
        link("wanted", "What it waits for"),
        link("condition_new", "Note damage"),
    ]
    return acts
