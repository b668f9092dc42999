"""A forecast as its page says it: words and figures, ready to be drawn."""

from __future__ import annotations

from typing import Any

from bottles.models import Bottle, Supply, Tare
from bottles.physics.contents import Contents
from bottles.selectors.scales import scale_uncertainty
from bottles.services.forecast_details import would_help
from bottles.services.forecasting import BOOKS, Answer, Asked
from bottles.services.refilling import stop_at
from bottles.services.weighing import tare_at
from bottles.views.forecast_width import HEAD, narrowing, width_rows
from bottles.views.helps_words import helps_context
from bottles.views.pumped_words import pumped_context
from bottles.views.refill_words import RefillWords, style_of
from shop.base import clock
from shop.base.errors import Refusal
from shop.physics.errors import PhysicsError
from shop.physics.weights import format_mass

REACHES = {
    "in every case": ("yes", "The limit is reached, by the lowest figure too"),
    "likely": ("yes", "The limit is likely reached"),
    "at best": ("after", "The limit is reached at best"),
    "no": ("after", "A short fill: the limit isn't reached"),
    "already": ("no", "It holds its limit already: don't add to it"),
}
STOPPED = {
    "fill limit": "the fill limit: close by the scale",
    "pressures equal": "pressures equal: the flow ceases",
    "source out of liquid": "the supply's liquid runs out",
    "no pressure difference": "no pressure difference: nothing goes over",
}
REGIONS = {
    "saturated": "liquid and vapour together",
    "vapour": "vapour alone, no liquid",
    "liquid-full": "above the vapour pressure",
    "supercritical": "above the critical point",
    "contradictory": "the readings contradict each other",
}
HIDDEN = {"condensation_prior", "source_unknown", "can_pass_limit"}  # said elsewhere on the page
HOTTEST_C = 51.9


def forecast_context(asked: Asked, answer: Answer, words: RefillWords) -> dict[str, Any]:
    """Everything that the forecast's part of the page shows."""
    found, supply = answer.transferred, asked.supply
    kind, reached = REACHES[found.reaches_limit]
    helps = _helps(answer, words)
    if answer.target_g < asked.limit_g:
        reached = reached.replace("limit", "target")
    warnings = [sentence for code, sentence in found.warnings if code not in HIDDEN]
    reading = [sentence for code, sentence in (answer.contents.warnings if answer.contents else ())]
    said = {
        "stop": stop_figure(asked.bottle, supply, answer.target_g, words),
        "danger": [sentence.removeprefix("Danger sign. ") for sentence in reading] if answer.danger else [],
        "blocked": answer.blocked,
        "contradiction": bool(answer.contents and answer.contents.agrees is False and not answer.danger),
        "span": words.span(answer.low_g, answer.high_g) if answer.high_g else "nothing",
        "likely": words.mass(answer.likely_g) if answer.likely_g is not None and not _alike(answer, words) else "",
        "inputs": _inputs(asked, answer, words),
        "method": _method(answer),
        "kind": kind,
        "reached": reached,
        "already": found.reaches_limit == "already",
        "limits": _limits(answer, words),
        "cold": "" if _cold_said(helps, answer) else _cold(answer, words), "helps": helps,
        "left": _left(answer, supply, words),
        "line": words.small(answer.line_g),
        "line_origin": "entered" if supply.station.line_loss_g is not None else "computed",
        "reading": _reading(answer, words) if answer.contents else [],
        "reading_warnings": [] if answer.danger else reading,
        "warnings": [*warnings, *(sentence for _, sentence in answer.notes)],
        "width": width_rows(answer, words), "width_head": HEAD, "narrowing": narrowing(answer, words),
        "band": _band(answer, words),
        "prior": any(code == "condensation_prior" for code, _ in found.warnings),
    }  # fmt: skip
    return said | pumped_context(answer, supply.station, words) if answer.pumped else said


def _helps(answer: Answer, words: RefillWords) -> dict[str, Any] | None:
    """What would help, where the limit isn't reached in every case."""
    if answer.pumped or answer.blocked or answer.transferred.reaches_limit in ("in every case", "already"):
        return None
    try:
        return helps_context(would_help(answer.pair), words)
    except PhysicsError:
        return None


def stop_figure(bottle: Bottle, supply: Supply, target_g: int, words: RefillWords) -> dict[str, str]:
    """The scale reading to stop at, with how it's made; or the sentence why there is none."""
    station = supply.station
    scale = station.scale
    if scale is None:
        return {"why_not": f"{station} has no scale yet, so there is no reading to stop at."}
    try:
        tare = tare_at(bottle, clock.now())
        gross = stop_at(tare, scale, target_g=target_g, hose_pull_g=station.hose_pull_g)
    except (Refusal, PhysicsError) as refusal:
        return {"why_not": refusal.sentence}
    return stop_words(tare, gross, target_g, station, words)


def stop_words(tare: Tare, gross_g: int, target_g: int, station: Any, words: RefillWords) -> dict[str, str]:
    """A stop reading in the scale's own style, and the sum behind it."""
    scale = station.scale
    style = style_of(scale)
    # To the gram, though the scale is coarser: rounded each by itself the parts wouldn't add up to the figure.
    parts = [f"{format_mass(tare.total_g, style, 1)} tare as fitted", f"+ {format_mass(target_g, style, 1)} target"]
    parts.append(f"− {format_mass(scale_uncertainty(scale), style, 1)} the scale's ±")
    if station.hose_pull_g:
        sign = "+" if station.hose_pull_g > 0 else "−"
        parts.append(f"{sign} {format_mass(abs(station.hose_pull_g), style, 1)} pull of the hose")
    return {
        "figure": words.on_scale(gross_g, scale), "scale": str(scale), "other": words.other(gross_g, scale),
        "sum": " ".join(parts) + ", rounded down to what the scale shows",
    }  # fmt: skip


def _inputs(asked: Asked, answer: Answer, words: RefillWords) -> list[dict[str, str]]:
    readings, condensation = answer.readings, answer.transferred.condensation
    rows = [
        ("Supply bottle", f"{asked.supply.bottle.code}, {words.temperature(readings.supply_temperature.stored)}"),
        ("holds", held_words(answer, words)),
        ("Bottle to fill", f"{asked.bottle.code}, {words.temperature(readings.bottle_temperature.stored)}"),
        ("holds", words.mass(answer.start_g)),
        ("Target", words.mass(answer.target_g)),
        ("Condensation figure", f"{condensation.figure:.2f} ±{2 * condensation.deviation:.2f}, {condensation.origin}"),
    ]
    return [{"name": name, "value": value} for name, value in rows]


def _method(answer: Answer) -> str:
    figure = answer.transferred.condensation
    known = f"How much condenses is fitted from {figure.origin}."
    if figure.is_prior:
        known = "How much condenses is midway between the two until the shop's own refills tell (common practice, no source)."
    return (
        "Two bottles, each a volume with its wall; mass and energy conserved; between the transfer that mixes at once (quick) "
        f"and the one in which vapour condenses on the wall alone (slow to condense). {known} "
        "Kept at temperature is what would go over if both bottles stayed as warm as they were read, for as long as it takes."
    )


def held_words(answer: Answer, words: RefillWords) -> str:
    """What the supply bottle is taken to hold, and where that comes from."""
    held = answer.source
    if held is None:
        return "not known but for its gauge"
    return f"{words.mass(held.grams, plus_minus_g=held.error_g)} {held.origin}"


def _limits(answer: Answer, words: RefillWords) -> list[tuple[str, str, str]]:
    found = answer.transferred
    named = (("quick", found.mixed), ("slow to condense", found.wall_condensing), ("kept at temperature", found.held))
    return [(name, words.mass(round(one.moved_kg * 1000)), STOPPED[one.stopped_by]) for name, one in named if one]


def _cold_said(helps: dict[str, Any] | None, answer: Answer) -> bool:
    """Whether what would help says how cold it must be, or that no cold will do; or it's colder than that now."""
    warmest = answer.transferred.warmest_receiver_k
    return helps is not None and (helps["chills"] or warmest is None or warmest >= answer.pair.receiver_temperature_k)


def _cold(answer: Answer, words: RefillWords) -> str:
    found = answer.transferred
    if found.reaches_limit == "already" or answer.likely_g is None:
        return ""
    if found.warmest_receiver_k is None:
        if found.held and found.held.stopped_by == "fill limit":
            return (
                "No cooling beforehand will do for a full fill. Kept as cold as it is now, in its bath or freezer, for as long "
                "as it takes, it would fill."
            )
        return (
            "No cooling will do: the supply bottle doesn't hold enough for a full fill however cold this one is. Choose a fuller "
            "one, or go on from a second one in turn."
        )
    if found.warmest_receiver_k - 273.15 > HOTTEST_C:
        return "It needs no cooling for a full fill, done quickly."
    at = words.temperature(found.warmest_receiver_k * 1000)
    return (
        f"For a full fill it must be at {at} or colder when the valve is opened (quick transfer); "
        "colder still where vapour is slow to condense."
    )


def _left(answer: Answer, supply: Supply, words: RefillWords) -> str:
    if answer.source_left_g is None:
        return f"What would help, and what {supply.bottle.code} will have left, can't be said before it's weighed."
    left = f"{supply.bottle.code} will have {words.mass(answer.source_left_g)} left"
    fills = answer.transferred.full_fills
    if fills is not None and fills > 1:
        return f"{left}. At best it gives {fills} full fills like this one: done quickly, warmed up again between them."
    return f"{left}."


def _reading(answer: Answer, words: RefillWords) -> list[tuple[str, str]]:
    contents: Contents | None = answer.contents
    if contents is None:
        return []
    rows = [("Its gauge and temperature say", REGIONS[contents.region])]
    if contents.saturation_pa is not None:
        rows.append(("Vapour pressure at that temperature", words.pressure(contents.saturation_pa)))
    if contents.expected_pa is not None:
        rows.append(("By its weight the gauge should show", words.pressure(contents.expected_pa)))
    if answer.source is not None:
        origin = "weight" if answer.source.origin != BOOKS else "books"
        agrees = {True: f"reading and {origin} agree", False: f"reading and {origin} contradict each other", None: ""}
        rows.append((f"Holds, {answer.source.origin}", f"{words.mass(answer.source.grams, plus_minus_g=answer.source.error_g)}: "
                     f"{agrees[contents.agrees]}"))  # fmt: skip
    allowed = answer.pair.source_range_kg
    if allowed is not None:
        rows.append(("So it may hold", words.span(*(round(kilograms * 1000) for kilograms in allowed))))
    return rows


def _alike(answer: Answer, words: RefillWords) -> bool:
    """Whether lowest and highest are written alike."""
    return words.mass(answer.low_g) == words.mass(answer.high_g)


def _band(answer: Answer, words: RefillWords) -> dict[str, Any]:
    """Where low, likely and high stand between nothing and the room there is, for the band's drawing."""
    room = max(answer.target_g - answer.start_g, answer.high_g, 1)
    width = 600

    def place(grams: int) -> float:
        return round(20 + (width - 40) * grams / room, 1)

    low, high = place(answer.low_g), place(answer.high_g)
    free = max(0, answer.target_g - answer.start_g)
    return {
        "low": low, "width": max(2.0, round(high - low, 1)), "limit": place(free), "limit_words": words.mass(free),
        "likely": place(answer.likely_g) if answer.likely_g is not None else None, "low_words": words.mass(answer.low_g),
        "likely_words": words.mass(answer.likely_g) if answer.likely_g is not None else "", "high_words": words.mass(answer.high_g),
        "alike": _alike(answer, words),
    }  # fmt: skip
