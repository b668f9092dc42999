"""The sections of a bottle's page, in order: a template part, and the function that fills it.

Each function takes (request, seen) and returns the variables of its part; what several of them need
is read once and stands in `seen`. They are imported when the page is drawn, so that a section may
belong to any module of views.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from django.http import HttpRequest
from django.utils.module_loading import import_string

from bottles.models import Bottle, Standing
from bottles.rules.fitness import Judgement
from bottles.selectors.judging import Rulebook, rulebook
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, Role

SECTIONS: list[tuple[str, str]] = [
    ("bottles/_judgement.html", "bottles.views.judgement.section"),
    ("bottles/_contents.html", "bottles.views.contents.section"),
    ("bottles/_leak.html", "bottles.views.leaks.section"),
    ("bottles/_refills.html", "bottles.views.refills.section"),
    ("bottles/_register.html", "bottles.views.register_section.section"),
]

# The answer stands above what can be done; all else below.
ANSWERS = [template for template, _ in SECTIONS if template == "bottles/_judgement.html"]


@dataclass(frozen=True, slots=True)
class Seen:
    """The bottle of the page, what stands of it, and how it's judged."""

    bottle: Bottle
    standing: Standing
    shop: Shop
    book: Rulebook
    judgement: Judgement


@dataclass(frozen=True, slots=True)
class Action:
    """One thing that can be done with a bottle: its page, its words, who may, and where the bottle must be."""

    page: str
    words: str
    roles: frozenset[Role] = EVERYONE
    needs_in: bool | None = None  # True: only while it's in the shop; False: only while it's out


ACTIONS: list[Action] = [
    Action("bottles:check_in", "Check in", needs_in=False),
    Action("bottles:weigh", "Weigh"),
    Action("bottles:fill", "Forecast and fill", needs_in=True),
    Action("bottles:hand_over", "Hand over", needs_in=True),
    Action("bottles:move", "Move", needs_in=True),
    Action("bottles:condition", "Note damage"),
]


def drawn(request: HttpRequest, bottle: Bottle, standing: Standing, shop: Shop) -> dict[str, Any]:
    """The variables of every section of the page, each under a name of its own."""
    book = rulebook(shop)
    seen = Seen(bottle, standing, shop, book, book.judge_all([bottle], {bottle.pk: standing})[bottle.pk])
    context: dict[str, Any] = {}
    for template, function in SECTIONS:
        told = import_string(function)(request, seen)
        if doubled := told.keys() & context.keys():
            raise ValueError(f"{template} and a section before it both set {', '.join(sorted(doubled))}")
        context |= told
    return context
