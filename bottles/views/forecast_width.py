"""What makes the width of a forecast, and which one measurement would narrow it most, in words."""

from __future__ import annotations

from math import ceil, sqrt

from bottles.physics.forecast_band import CONDENSATION, MORE_REFILLS
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED
from bottles.services.forecasting import TAKEN, Answer
from bottles.views.refill_words import RefillWords

HEAD = ["From, and how well it's known", "By itself"]
SUPPLY_WEIGHT, OWN_WEIGHT, START = "source weight", "receiver weight", "receiver start"
PARTS = {
    CONDENSATION: "how much vapour condenses",
    "source temperature": "the supply bottle's temperature",
    SUPPLY_WEIGHT: "the supply bottle's weight",
    "receiver temperature": "the temperature of the bottle to fill",
    OWN_WEIGHT: "the weight of the bottle to fill",
    START: "how the bottle to fill starts",
}
BEGUN = {
    VENTED: "taken as vented to the room, not more than an atmosphere left (common practice)",
    OWN_VAPOUR: "taken as full of its own vapour, ±25 % (common practice)",
    AIR: "taken as full of air",
    WEIGHED: "as it weighs",
}
WORTH_G = 10  # what changes the span by less is no reason to measure again


def width_rows(answer: Answer, words: RefillWords) -> list[list[str]]:
    """A row for each part of the width, the widest first: what, how much by itself, how well it's known."""
    rows = []
    for name, kilograms in answer.transferred.width:
        said = words.small(round(kilograms * 1000))
        alone = "next to nothing" if said == words.small(0) else f"±{said}"
        rows.append([PARTS[name], alone, _known(name, answer, words)])
    return rows


def narrowing(answer: Answer, words: RefillWords) -> str:
    """The sentence that names what would narrow the span most; empty where nothing would."""
    best = answer.transferred.narrows
    if best is None or answer.high_g - answer.low_g < WORTH_G:
        return ""
    worth = [(name, grams) for name, grams in _worth(answer) if grams >= WORTH_G]
    if best == MORE_REFILLS:
        said = "Only more refills of this shop, each weighed to its end, narrow it much: it hangs on how much vapour condenses."
        measured = next(((name, grams) for name, grams in worth if name != CONDENSATION), None)
        if measured:
            said += f" Of what can be measured now: {_lower(_measure(measured[0], answer))}, by about {words.small(measured[1])}."
        return said
    part = START if best == OWN_WEIGHT and START in dict(answer.transferred.width) else best
    if part == OWN_WEIGHT and part not in dict(worth):
        # Its tare is what is unsure, not the scale: something else narrows, or nothing.
        part = next((name for name, _ in worth if name != CONDENSATION), "")
    if not part:
        return ""
    by = dict(worth).get(part)
    return f"{_measure(part, answer)}: it would narrow the span{f' by about {words.small(by)}' if by else ' most'}."


def degrees(kelvin: float, words: RefillWords) -> str:
    """A difference of temperature, rounded up to the degree."""
    if words.units.temperature == "°F":
        return f"{ceil(kelvin * 1.8 - 1e-9)} °F"
    return f"{ceil(kelvin - 1e-9)} °C"


def _worth(answer: Answer) -> list[tuple[str, int]]:
    """By how much the span would shrink if one part were read exactly, the most first; parts join as a root of squares."""
    parts = answer.transferred.width
    whole = sum(kilograms**2 for _, kilograms in parts)
    span = answer.high_g - answer.low_g
    share = 2000 * sqrt(whole)
    found = []
    for name, kilograms in parts:
        goes = (1.0 - _stays(name, answer) ** 2) * kilograms**2
        found.append((name, round(span * (1.0 - sqrt(max(whole - goes, 0.0) / whole))) if share else 0))
    return sorted(found, key=lambda part: part[1], reverse=True)


def _stays(name: str, answer: Answer) -> float:
    """What share of a part is left when it's read exactly: a tare's own ± stays on whatever scale."""
    own = answer.own
    return own.tare_error_g / own.error_g if name == OWN_WEIGHT and own is not None and own.error_g else 0.0


def _known(name: str, answer: Answer, words: RefillWords) -> str:
    pair, readings = answer.pair, answer.readings
    if name == CONDENSATION:
        figure = answer.transferred.condensation
        return f"figure {figure.figure:.2f} ±{2 * figure.deviation:.2f}, {figure.origin}"
    if name == SUPPLY_WEIGHT:
        if pair.source_range_kg is not None:
            return "between what its readings allow"
        assert answer.source is not None
        return f"±{words.small(answer.source.error_g)}, {answer.source.origin}"
    if name == OWN_WEIGHT:
        return f"±{words.small(round(pair.tolerances.receiver_kg * 1000))}, {answer.own.origin if answer.own else 'weighed'}"
    if name == START:
        return BEGUN[pair.start.kind]
    how = readings.taken if name == "source temperature" else readings.bottle_taken
    taken = next(said for code, said, _ in TAKEN if code == how)
    return f"±{degrees(pair.tolerances.thermometer_k, words)}, {taken}"


def _measure(name: str, answer: Answer) -> str:
    """What to do about one part."""
    readings = answer.readings
    if name == SUPPLY_WEIGHT:
        weighed = answer.source is not None and answer.source.origin == "weighed now"
        return "Weigh the supply bottle on a finer scale" if weighed else "Weigh the supply bottle"
    if name == OWN_WEIGHT:
        return "Weigh the bottle to fill on a finer scale"
    if name == START:
        return "Weigh the bottle to fill and say so, in place of how it starts"
    which, how = {
        "source temperature": ("supply bottle's temperature", readings.taken),
        "receiver temperature": ("temperature of the bottle to fill", readings.bottle_taken),
    }[name]
    if how == "air":
        return f"Take the {which} on its wall, not in the air"
    return f"Take the {which} with a finer thermometer"


def _lower(sentence: str) -> str:
    return sentence[0].lower() + sentence[1:]
