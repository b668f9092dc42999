"""What stands behind a forecast, as its page says it: its width, other starts, the course, the fills left."""

from __future__ import annotations

from typing import Any

from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED
from bottles.services.forecast_details import StartWorth, starts_compared
from bottles.views.forecast_part import Worked
from bottles.views.refill_words import RefillWords

STARTS = {
    VENTED: "Vented to the room",
    OWN_VAPOUR: "Still full of its own vapour, no liquid",
    AIR: "Open before, air not purged",
    WEIGHED: "As it weighs now",
}
START_HEAD = ["How it starts", "Holds at first", "Goes over, likely", "Holds at the end", "Beside now"]


def details_part(found: Worked, words: RefillWords) -> dict[str, Any]:
    """The variables of the details' part, or why there are none."""
    answer = found.answer
    if answer is None or answer.transferred.reaches_limit == "already" or answer.blocked:
        said = found.trouble or [f"It waits for: {', '.join(found.waits)}." if found.waits else "There is nothing to go over."]
        return {"details": None, "details_trouble": said}
    return {"details": {"starts": _starts(starts_compared(answer.pair), words), "start_head": START_HEAD}}


def _starts(found: list[StartWorth], words: RefillWords) -> list[list[str]]:
    """A row for each start; the first is the bottle as it is."""
    rows = []
    for one in found:
        rows.append([
            STARTS[one.kind], words.small(one.begins_g), words.mass(one.likely_g), words.mass(one.holds_g),
            "as it is" if one is found[0] else beside(one.holds_g - found[0].holds_g, words),
        ])  # fmt: skip
    return rows


def beside(grams: int, words: RefillWords) -> str:
    """So much more or less, in words."""
    if grams == 0:
        return "the same"
    return f"{words.small(abs(grams))} {'more' if grams > 0 else 'less'}"
