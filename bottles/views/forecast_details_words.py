"""What stands behind a forecast, as its page says it: the course, other starts, the fills left."""

from __future__ import annotations

from typing import Any

from bottles.physics.fills_left import Fills, FillsLeft
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED
from bottles.services.forecast_details import StartWorth, below_tube_g, course_over_time, fills_ahead, starts_compared
from bottles.services.forecasting import Answer, Asked
from bottles.views.course_chart import course_context
from bottles.views.forecast_part import Worked
from bottles.views.refill_words import RefillWords

STARTS = {
    VENTED: "Vented to the room",
    OWN_VAPOUR: "Still full of its own vapour, no liquid",
    AIR: "Open before, air not purged",
    WEIGHED: "As it weighs now",
}
START_HEAD = ["How it starts", "Goes over", "Then holds", "Beside now"]
FILLS_HEAD = ["Full fills, the supply bottle", "Likely", "If quick", "Then left", "Next gets"]
COLDER_GIVES_MORE = "Without time to warm up it gives more here: a colder supply bottle keeps less of its nitrous back as vapour."
HIDDEN = {"condensation_prior", "near_critical"}  # said with the forecast
UNKNOWN = "The supply bottle's weight isn't known: weigh it, then its course and its fills can be worked out."


def details_part(found: Worked, words: RefillWords, *, begun: bool = False) -> dict[str, Any]:
    """The variables of the details' part, or why there are none; a refill that is begun has no start to choose any more."""
    asked, answer = found.asked, found.answer
    if asked is None or answer is None:
        said = found.trouble or [f"It waits for: {', '.join(found.waits)}."]
    elif answer.blocked or answer.transferred.reaches_limit == "already":
        said = ["Nothing goes over, so there is no course."]
    elif answer.pair.source_range_kg is not None:
        said = [UNKNOWN]
    else:
        return {"details": _details(asked, answer, words, begun=begun)}
    return {"details": None, "details_trouble": said}


def _details(asked: Asked, answer: Answer, words: RefillWords, *, begun: bool) -> dict[str, Any]:
    pair = answer.pair
    course = None if answer.pumped else course_over_time(pair, asked.supply.station)
    fills = None if answer.pumped else fills_ahead(pair)
    return {
        "course": course_context(course, answer, words) if course else None,
        "pumped": answer.pumped is not None,
        "starts": [] if answer.pumped or begun else _starts(starts_compared(pair), words), "start_head": START_HEAD,
        "fills": _fills(fills, words) if fills and fills.warmed_quick.count else [], "fills_head": FILLS_HEAD,
        "fills_said": fills_said(fills) if fills else [],
        "fills_next": words.mass(round(fills.warmed_likely.then_kg * 1000)) if fills and not fills.warmed_quick.count else "",
        "below": _below(asked, answer, words),
    }  # fmt: skip


def _starts(found: list[StartWorth], words: RefillWords) -> list[list[str]]:
    """A row for each start; the first is the bottle as it is."""
    rows = []
    for one in found:
        change = "as it is" if one is found[0] else beside(one.holds_g - found[0].holds_g, words)
        rows.append([STARTS[one.kind], words.mass(one.likely_g), words.mass(one.holds_g), change])
    return rows


def _fills(found: FillsLeft, words: RefillWords) -> list[list[str]]:
    """A row with the supply warmed up again between fills, one without."""

    def row(name: str, likely: Fills, quick: Fills) -> list[str]:
        left, then = (words.mass(round(kilograms * 1000)) for kilograms in (likely.left_kg, likely.then_kg))
        return [name, str(likely.count), str(quick.count), left, then]

    return [
        row("warming up again between them", found.warmed_likely, found.warmed_quick),
        row("without time to warm up", found.straight_likely, found.straight_quick),
    ]


def fills_said(found: FillsLeft) -> list[str]:
    """Sentences beside the count of fills."""
    said = [sentence for code, sentence in found.warnings if code not in HIDDEN]
    if found.straight_likely.count > found.warmed_likely.count:
        said.append(COLDER_GIVES_MORE)
    return said


def _below(asked: Asked, answer: Answer, words: RefillWords) -> str:
    """What of the heel the dip tube's end doesn't reach."""
    bottle = asked.supply.bottle
    grams = below_tube_g(answer.pair)
    if grams:
        return (
            f"Of what it leaves behind (heel) {words.small(grams)} is liquid below the end of the dip (siphon) tube: "
            "it comes as vapour alone."
        )
    if bottle.dip_tube == "dip" and bottle.below_tube_ml is None:
        return f"How much liquid the dip (siphon) tube of {bottle.code} doesn't reach isn't written down: none is taken off."
    return ""


def beside(grams: int, words: RefillWords) -> str:
    """So much more or less, in words."""
    if grams == 0:
        return "the same"
    return f"{words.small(abs(grams))} {'more' if grams > 0 else 'less'}"
