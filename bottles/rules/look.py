"""The short look that the filler owes a bottle before each fill.

What stands on the list is data of the rule set (``editions/``), each item with its
citation or marked common practice. A failed item notes a condition, which then counts
like any other until a row of its own ends it; one without a condition (a worn hose) is
put right on the spot, and the look isn't done before that.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from bottles.rules.edition import LookItem, RuleEdition
from bottles.rules.specifications import Wall


@dataclass(frozen=True, slots=True)
class LookResult:
    """What a look came to: done or not, conditions to note, items left open."""

    done: bool
    conditions: tuple[str, ...]
    open_items: tuple[str, ...]
    star_checks_done: bool


def look_for(edition: RuleEdition, *, star: bool, wall: Wall | None) -> Sequence[LookItem]:
    """The items for a bottle: those of a star only where it has one and isn't known to be
    of something else than steel.
    """
    with_star = star and wall in ("steel", None)
    return [item for item in edition.look if item.when == "always" or with_star]


def look_result(items: Sequence[LookItem], answers: Mapping[str, bool | None]) -> LookResult:
    """The result of the answers: True is in order, False isn't, None or absent isn't looked at.

    A star's own items don't hold up the look: left out, they break the star, and that
    shortens its interval instead.
    """
    conditions: dict[str, None] = {}
    left: list[str] = []
    star_done = True
    for item in items:
        answer = answers.get(item.code)
        if item.when == "star" and answer is not True:
            star_done = False
        if answer is False and item.failed is not None:
            conditions[item.failed] = None
        elif answer is not True and item.when == "always":
            left.append(item.code)
    return LookResult(not conditions and not left, tuple(conditions), tuple(left), star_done)
