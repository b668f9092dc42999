"""Two joined bottles: which gives, which takes, and whether it takes too much. Nothing is saved."""

from __future__ import annotations

from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from bottles.forms.joined import JoinedForm
from bottles.physics.joined import Passing
from bottles.services.joining import JoinedAnswer, work_out_joined
from bottles.views.of_bottle import bottle_or_404
from bottles.views.refill_words import RefillWords, refill_words
from shop.base.errors import Refusal
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, allow
from shop.physics.errors import PhysicsError

CAUTIONS = (
    "Joined bottles aren't left alone: nobody reads a scale, and the colder one goes on taking.",
    "Nitrous is an oxidiser, its liquid freezes skin: gloves and eye protection on, doors open, no flame, no oil or grease.",
    "A bottle above its limit is brought down before it warms, outdoors, by someone trained for it.",
)
STOPPED = {
    "pressures equal": "pressures equal",
    "source out of liquid": "liquid out",
    "full of liquid": "full of liquid",
    "no pressure difference": "no difference",
}
WORST = ("passes_limit", "full_of_liquid")


@allow(EVERYONE, room="counter")
def joined(request: HttpRequest, code: str) -> HttpResponse:
    """Ask which other bottle and how warm both are; say what flows."""
    bottle = bottle_or_404(code)
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    words = refill_words(request, shop)
    asked = "own_temperature" in request.GET
    form = JoinedForm(
        request.GET if asked else None, initial={"other": request.GET.get("other", "").replace("\0", "")[:20]}, bottle=bottle,
        system=words.units.name, ambient_pa=words.ambient_pa,
    )  # fmt: skip
    told: dict[str, Any] | None = None
    if asked and form.is_valid():
        try:
            told = _told(work_out_joined(shop, form.ends()), words)
        except Refusal as refusal:
            form.add_error(refusal.field if refusal.field in form.fields else None, refusal.sentence)
        except PhysicsError as refusal:
            form.add_error(None, refusal.sentence)
    return render(request, "bottles/joined.html", {"bottle": bottle, "form": form, "told": told, "cautions": CAUTIONS})


def _told(answer: JoinedAnswer, words: RefillWords) -> dict[str, Any]:
    found, warnings = answer.found, dict(answer.found.warnings)
    codes = [end.bottle.code for end in answer.ends]
    worst = [warnings.pop(code) for code in WORST if code in warnings]
    notes = list(warnings.values())
    if answer.walls_guessed:
        which = " and ".join(answer.walls_guessed)
        notes.append(f"What {which} is made of isn't known: aluminium and steel were both tried, the fuller is told.")
    told: dict[str, Any] = {"worst": worst, "notes": notes, "inputs": _inputs(answer, words)}
    if answer.giver is None or found.quick is None or found.long is None:
        return told | {"kind": "after", "word": "Nothing flows now"}
    gives, takes = answer.giver, 1 - answer.giver
    limit_g = answer.limits_g[takes]
    kind = "no" if worst else "after"
    passes = found.long.over_limit_kg or found.quick.over_limit_kg
    word = f"{codes[takes]} passes its limit" if passes else f"{codes[takes]} fills up" if worst else f"{codes[takes]} takes"
    return told | {
        "kind": kind,
        "word": word,
        "way": f"{'Liquid' if found.phase == 'liquid' else 'Vapour'} flows from {codes[gives]} to {codes[takes]}.",
        "head": ["", "quick", "if left joined"],
        "rows": _rows((found.quick, found.long), codes[gives], codes[takes], limit_g, words),
    }


def _rows(
    ends: tuple[Passing, Passing], gives: str, takes: str, limit_g: int | None, words: RefillWords
) -> list[list[str]]:
    def row(name: str, tell: Any) -> list[str]:
        return [name, *(tell(end) for end in ends)]

    def grams(kilograms: float) -> str:
        return words.mass(round(kilograms * 1000))

    rows = [
        row("goes over", lambda end: grams(end.outcome.moved_kg)),
        row(f"{gives} then holds", lambda end: grams(end.outcome.source_left_kg)),
        row(f"{takes} then holds", lambda end: grams(end.outcome.receiver_final_kg)),
    ]
    if limit_g:
        rows.append(row(f"{takes} may hold at most", lambda end: words.mass(limit_g)))
        rows.append(row("past its limit by", lambda end: grams(end.over_limit_kg) if end.over_limit_kg else "not past it"))
    rows += [
        row(f"{gives} is then at", lambda end: words.temperature(end.outcome.source_final_k * 1000)),
        row(f"{takes} is then at", lambda end: words.temperature(end.outcome.receiver_final_k * 1000)),
        row(f"gauge on {takes}", lambda end: words.pressure(end.outcome.receiver_final_pa)),
        row("ends with", lambda end: STOPPED[end.ends_by]),
        row(
            f"{takes} is full of liquid from",
            lambda end: "now" if end.full_of_liquid else words.temperature(end.full_at_k * 1000) if end.full_at_k else "never",
        ),
    ]
    return rows


def _inputs(answer: JoinedAnswer, words: RefillWords) -> list[dict[str, str]]:
    """What each held and how warm it was."""
    return [
        {
            "name": end.bottle.code,
            "value": f"{words.mass(max(0, known.grams or 0), plus_minus_g=known.error_g)} "
            f"({'weighed' if known.still_as_weighed else 'by the books'}), {words.temperature(end.temperature_mk)}, "
            f"valve {'low' if end.inverted else 'up'}",
        }
        for end, known in zip(answer.ends, answer.known, strict=True)
    ]
