"""The first part of a bottle's page: may it be filled, may it be emptied, and why."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from django.http import HttpRequest

from bottles.models import Standing
from bottles.rules.fitness import Judgement
from bottles.views.reason_rows import IN_THE_SHOP, reason_rows
from bottles.views.sections import Seen
from bottles.views.wording import Words, words_for
from shop.rules import month as months
from shop.rules.reason import Reason


@dataclass(frozen=True, slots=True)
class Verdict:
    """An answer as a page shows it: the shape, the word."""

    kind: str  # yes, after, no, unknown
    word: str


FILLING = {
    "only after": Verdict("after", "Fill only after…"),
    "no": Verdict("no", "Must not be filled"),
    "unknown": Verdict("unknown", "Can't be judged: not filled until it can"),
}
AFTER_THE_LOOK = Verdict("yes", "May be filled, after the filler's look")
FULL = Verdict("open", "Full: nothing more goes in")
FULL_BY_ITS_WEIGHT = frozenset({"at-its-limit", "within-plus-minus"})
IN_ITS_MONTH = Verdict("after", "May be filled; its test is due this month")
FILLED_SHORT = Verdict("open", "Filled short, to hand over")
SUPPLY = {
    "yes": Verdict("yes", "May be emptied into another bottle"),
    "only after": Verdict("after", "May be emptied only after…"),
    "no": Verdict("no", "Must not be emptied into another bottle"),
    "unknown": Verdict("unknown", "Can't be judged: not emptied until it can"),
}
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
    if is_full(judgement):
        return FULL
    if judgement.only_the_look_is_left or judgement.may_be_filled == "yes":
        return IN_ITS_MONTH if judgement.status == "due this month" else AFTER_THE_LOOK
    return FILLING[judgement.may_be_filled]


def is_full(judgement: Judgement) -> bool:
    """Whether all that speaks against filling is that it holds its limit already, as near as the scale can tell."""
    about = [reason for reason in judgement.reasons if "filling" in reason.about]
    against = {reason.code for reason in about if reason.severity not in ("explains", "warns")}
    return any(reason.code in FULL_BY_ITS_WEIGHT for reason in about) and against <= FULL_BY_ITS_WEIGHT | set(IN_THE_SHOP)


def section(request: HttpRequest, seen: Seen) -> dict[str, Any]:
    """The decision's frame, the limit with every figure behind it, what wasn't judged."""
    bottle, standing, book, judgement = seen.bottle, seen.standing, seen.book, seen.judgement
    words = words_for(request, seen.shop)
    supply = bottle.use == "supply"  # what a supply bottle is asked is whether it may be emptied
    answer, asked = (SUPPLY[judgement.may_be_emptied], "emptying") if supply else (verdict(judgement), "filling")
    stopped = any(reason.severity in ("refuses", "unknown") and "filling" in reason.about for reason in judgement.reasons)
    # Nobody looks a bottle over for a fill that can't be.
    shown = [reason for reason in judgement.reasons if not (stopped and reason.code == "look-owed")]
    decides = [reason for reason in shown if reason.severity != "explains" and asked in reason.about]
    other = _filling_line(standing, judgement) if supply else EMPTYING[judgement.may_be_emptied]
    lines = (limit_line(judgement, words), due_line(judgement, book.edition.words), other)
    return {
        "kind": answer.kind,
        "word": answer.word,
        "lines": [line for line in lines if line],
        "full": is_full(judgement),
        "may_fill": not supply and all(reason.code in IN_THE_SHOP for reason in decides if reason.severity != "warns"),
        "offers_fill": not stopped,
        "refilled_now": any(reason.code == "in-open-refill" for reason in judgement.reasons),
        "reasons": reason_rows(decides, bottle, standing, words),
        "others": reason_rows((one for one in shown if one not in decides), bottle, standing, words),
        "limits": [
            [figure.label, words.mass(figure.grams), figure.origin, figure.source.citation]
            for figure in sorted(judgement.limit.candidates, key=lambda each: each.grams)
        ],
        "limit_head": ["Figure", "Nitrous", "Origin", "Rests on"],
        "not_judged": judgement.not_judged,
        "edition": book.edition.title,
        "edition_code": book.edition.code,
    }


def _filling_line(standing: Standing, judgement: Judgement) -> str:
    """What is said of filling a supply bottle."""
    if standing.ownership is not None and standing.ownership.kind == "supplier":
        return "The supplier's: never filled here, nor sent to test; it's swapped."
    return f"Filling it: {verdict(judgement).word[0].lower()}{verdict(judgement).word[1:]}."


def limit_line(judgement: Judgement, words: Words) -> str:
    """How much it may hold, and what binds."""
    limit = judgement.limit
    if limit.grams is None:
        return "No fill limit can be worked out."
    binding = next(figure for figure in limit.candidates if figure.code == limit.binds)
    cited = "" if binding.code == "charge" else f" ({binding.source.citation})"  # a label is its own source
    return f"Limit {words.mass(limit.grams)} of nitrous: {binding.label}{cited}."


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

