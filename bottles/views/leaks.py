"""Leak watch: the page of all stored bottles, and the part of a bottle's page."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from datetime import timedelta
from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.forms.leaks import USUAL_G, LeakForm
from bottles.models import Bottle, Condition
from bottles.rules.leaks import Drift, Noise, certainty_words, lasts, weeks_to_show
from bottles.selectors.leaks import WEEK, Overview, Watch, not_watched, overview, watch_of, watches_of
from bottles.selectors.scales import checked_scales
from bottles.views.refill_words import RefillWords, refill_words
from bottles.views.sections import Seen
from shop.base import clock
from shop.base.models import Shop
from shop.base.paging import page_of
from shop.base.permissions import EVERYONE, allow
from shop.physics.weights import format_mass

CAUTIONS = (
    "Nitrous is an oxidiser and is heavier than air: ventilate, no flame, no oil or grease, stay out of pits, don't inhale it.",
    "Take the bottle outdoors, upright, out of the sun, valve facing away from people. Gloves and eye protection: a jet freezes.",
    "Tag it, so that nobody fills it or puts it on a car.",
    "Don't tighten a valve, gauge or safety disc under pressure unless trained for it: that's for a licensed test house.",
)
MANY = 3  # bottles that drift alike on one scale, before the scale itself is suspected
LONGEST_WEEKS = 520


@allow(EVERYONE, room="counter")
def leaks(request: HttpRequest) -> HttpResponse:
    """Every stored bottle: those that lose weight first, then how soon a leak would show on the others."""
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    words = refill_words(request, shop)
    form = LeakForm(request.GET if "leak" in request.GET else None, system=words.units.name)
    leak_g = form.grams()
    if not form.is_bound:
        form = LeakForm(initial={"leak": _small(leak_g, words)}, system=words.units.name)
    found = overview()
    noted = _noted(found.raised)
    losing, grew = (
        [watch for watch in found.raised if watch.drift and watch.drift.verdict == which] for which in ("leaks", "grew")
    )
    watched = len(found.raised) + len(found.others)
    losing.sort(key=lambda watch: watch.drift.rate_g if watch.drift else 0.0)
    page = page_of(request, found.others)
    context = {
        "form": form,
        "leak": _small(leak_g, words),
        "losing": [told(watch, leak_g, words, shop) | {"noted": watch.bottle in noted} for watch in losing],
        "grew": [told(watch, leak_g, words, shop) for watch in grew],
        "cautions": CAUTIONS if losing else (),
        "alike": _alike(found),
        "page": page,
        "rows": [_row(watch, leak_g, words, shop) for watch in watches_of(list(page))],
        "watched": watched,
        "not_watched": not_watched(watched),
        "scales": _scales(leak_g, words, shop),
        "scales_head": ["Scale", "Step", "Error", "Shows after"],
        "scales_caption": f"When two dry weighings show a leak of {_small(leak_g, words)} a week",
    }
    return render(request, "bottles/leaks.html", context)


def section(request: HttpRequest, seen: Seen) -> dict[str, Any]:
    """What the leak watch says of the bottle; nothing where no weighing counts."""
    watch = watch_of(seen.bottle) if seen.standing.is_in and seen.bottle.retired_at is None else None
    if watch is None:
        return {"leak": None}
    words = refill_words(request, seen.shop)
    raised = watch.drift is not None and watch.drift.verdict == "leaks"
    return {"leak": told(watch, USUAL_G, words, seen.shop) | {"cautions": CAUTIONS if raised else ()}}


def told(watch: Watch, leak_g: int, words: RefillWords, shop: Shop) -> dict[str, Any]:
    """One bottle of the leak watch, in words."""
    drift = watch.drift
    return _brief(watch, leak_g, words, shop) | {
        "note_url": f"{reverse('bottles:condition', args=[watch.code])}?code=leak",
        "verdict": drift.verdict if drift else "once",
        "certainty": certainty_words(drift.certainty) if drift else "",
        "lasts": _lasts_words(watch, words) if drift and drift.verdict == "leaks" else "",
        "inputs": _inputs(watch, words),
    }


def _brief(watch: Watch, leak_g: int, words: RefillWords, shop: Shop) -> dict[str, Any]:
    count = len(watch.readings)
    first, last = (f"{clock.day_of(at, shop)}" for at in (watch.first_at, watch.last_at))
    weighed = f"weighed once on {watch.scale}, {last}"
    if count > 1:
        weighed = f"{count} dry weighings on {watch.scale}, {first} to {last}"
    return {
        "code": watch.code,
        "url": reverse("bottles:bottle", args=[watch.code]),
        "weigh_url": reverse("bottles:weigh", args=[watch.code]),
        "figure": _figure(watch.drift, words) if watch.drift else "",
        "weighed": weighed,
        "shows": _shows(watch, leak_g, words, shop),
    }


def _figure(drift: Drift, words: RefillWords) -> str:
    """"loses 20 g a week (15 to 25 g)"."""
    verb = {"leaks": "loses", "grew": "gains"}.get(drift.verdict)
    if verb is None:
        ends = f"{_signed(drift.low_g, words)} to {_signed(drift.high_g, words)}"
        return f"{_signed(drift.rate_g, words)} a week (between {ends})"
    near, far = sorted((abs(drift.low_g), abs(drift.high_g)))
    return f"{verb} {_small(abs(drift.rate_g), words)} a week (between {_small(near, words)} and {_small(far, words)})"


def _lasts_words(watch: Watch, words: RefillWords) -> str:
    """How long what is in it lasts, if it goes on so."""
    if watch.drift is None or (span := lasts(watch.net_g, watch.drift)) is None:
        return ""
    latest = "perhaps never" if span.most is None or span.most > LONGEST_WEEKS else f"{_weeks(span.most)} at the latest"
    return (
        f"{words.mass(watch.net_g)} at risk: empty in about {_weeks(span.likely)} if it goes on so "
        f"({_weeks(span.least)} at the earliest, {latest})"
    )


def _shows(watch: Watch, leak_g: int, words: RefillWords, shop: Shop) -> str:
    """When a leak of so much would show, had it been there since the first of the weighings."""
    weeks = weeks_to_show(leak_g, watch.noise, watch.readings)
    amount = _small(leak_g, words)
    if weeks > LONGEST_WEEKS:
        return f"{watch.scale} is too coarse to show a leak of {amount} a week within ten years"
    at = watch.first_at + weeks * WEEK
    if at <= watch.last_at + timedelta(hours=1):
        return f"a leak of {amount} a week would have shown by now"
    if at <= clock.now():
        return f"a leak of {amount} a week shows if you weigh it on {watch.scale} now"
    return f"a leak of {amount} a week shows on {watch.scale} from {clock.day_of(at, shop)} on"


def _inputs(watch: Watch, words: RefillWords) -> list[dict[str, str]]:
    """What the figure rests on."""
    noise = watch.noise
    rows = [
        ("Scale", f"{watch.scale}: step {_small(noise.step_g, words)}, error {_small(noise.error_g, words)}"),
        ("One reading's noise", f"{_small(noise.deviation_g, words)} (standard deviation: step and repeatability)"),
        ("Two readings of one load differ by at most", _small(noise.most_g, words)),
    ]
    return [{"name": name, "value": value} for name, value in rows]


def _row(watch: Watch, leak_g: int, words: RefillWords, shop: Shop) -> dict[str, Any]:
    row = _brief(watch, leak_g, words, shop)
    # The column's head says which leak.
    shows = row["shows"].removeprefix(f"a leak of {_small(leak_g, words)} a week ")
    return row | {"figure": row["figure"] or "one weighing can't tell", "shows": shows}


def _scales(leak_g: int, words: RefillWords, shop: Shop) -> list[list[str]]:
    """How soon two weighings on each scale would show the leak."""
    rows = []
    for checked in checked_scales(shop):
        scale = checked.scale
        weeks = weeks_to_show(leak_g, Noise(scale.resolution_g, scale.error_g))
        rows.append([scale.name, scale.resolution_typed, scale.error_typed, _weeks(weeks)])
    return rows


def _alike(found: Overview) -> list[str]:
    """Scales on which most bottles drift to one side: rather the scale than so many leaks."""
    raised = Counter((watch.scale, watch.drift.verdict) for watch in found.raised if watch.drift)
    return [scale for (scale, _), count in sorted(raised.items()) if count >= MANY and 2 * count > found.looked[scale]]


def _noted(found: Iterable[Watch]) -> set[int]:
    """Bottles on which a leak is noted already."""
    losing = [watch.bottle for watch in found if watch.drift and watch.drift.verdict == "leaks"]
    if not losing:
        return set()
    rows = Condition.objects.filter(bottle__in=Bottle.objects.filter(pk__in=losing), code="leak", end__isnull=True)
    return set(rows.values_list("bottle", flat=True))


def _small(grams: float, words: RefillWords) -> str:
    """A few grams, or tenths of an ounce."""
    if words.units.name == "us":
        return format_mass(round(grams), "oz", 3) if grams < 450 else words.mass(round(grams))
    return words.small(round(grams))


def _signed(grams: float, words: RefillWords) -> str:
    sign = "−" if round(grams) < 0 else "+" if round(grams) > 0 else ""
    return f"{sign}{_small(abs(grams), words)}"


def _weeks(weeks: float) -> str:
    """A span of time that nobody takes for more exact than it is."""
    days = weeks * 7
    if days < 1.5:
        return "a day"
    if days < 14:
        return f"{round(days)} days"
    return f"{round(weeks)} weeks" if weeks < 104 else f"{weeks / 52.18:.1f} years"
