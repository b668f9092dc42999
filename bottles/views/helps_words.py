"""What would help a short fill, as its page says it: what to do, what it gives, what it costs, what to mind."""

from __future__ import annotations

from math import ceil, floor
from typing import Any

from bottles.physics.chilling import Chilling
from bottles.physics.remedies import (
    CHILL,
    EVERY,
    FULLER,
    LIKELY,
    PURGE,
    QUICK,
    VENT_FILLING,
    VENT_FIRST,
    WAIT,
    WARM,
    Remedy,
)
from bottles.services.forecast_details import Helps
from bottles.views.refill_words import RefillWords
from shop.physics.units import value_in

FULL = {QUICK: "full if vapour condenses quickly", LIKELY: "full, likely", EVERY: "full in every case"}
SHORT = {
    QUICK: "still a short fill", LIKELY: "likely still a short fill", EVERY: "still a short fill if vapour is slow to condense",
}  # fmt: skip
DO = {
    VENT_FIRST: "Vent it to the room before filling",
    PURGE: "Purge the air out of it first",
    WAIT: "Give it time: both bottles kept at their temperatures, for as long as it takes",
}
NOT_WRITTEN = (
    "No freezer or bath of the shop says how cold it gets, so a freezer at {freezer} and iced water are taken (common practice)."
)


def helps_context(found: Helps, words: RefillWords) -> dict[str, Any] | None:
    """Everything that *would help* shows; None where nothing is needed."""
    remedies = found.found.remedies
    codes = {code for code, _ in found.found.warnings}
    if codes & {"full_anyway", "receiver_full", "source_unknown"}:
        return None
    chill = [each for each in remedies if each.kind == CHILL]
    rows = [_chill(chill, found, words)] if chill else []
    for kind in (VENT_FIRST, PURGE, WAIT, VENT_FILLING, FULLER, WARM):
        same = [each for each in remedies if each.kind == kind]
        if same:
            rows.append(_row(same, words))
    assumed = chill and not all(place.written_down for place in found.places)
    return {
        "rows": rows, "said": [sentence for _, sentence in found.found.warnings],
        "assumed": NOT_WRITTEN.format(freezer=colder(found.places[0].coldest_k, words)) if assumed else "",
        "chills": any(each.fills for each in chill),
    }  # fmt: skip


def colder(kelvin: float, words: RefillWords) -> str:
    """A temperature that must not be passed upwards: rounded down to the degree."""
    unit = words.units.temperature
    # As much is the rounding of what was entered: 0 °F is kept as 255,372 mK.
    return f"{floor(value_in(round(kelvin * 1000), unit) + 0.001)} {unit}".replace("-", "\N{MINUS SIGN}")


def span_of_time(found: Chilling) -> str:
    """Between what a time lies, where it gets there."""
    assert found.quick_s is not None and found.slow_s is not None
    if found.slow_s < 60.0:
        return "at once"
    quick, slow = _time(found.quick_s), _time(found.slow_s)
    if quick == slow:
        return quick
    return f"{quick.removesuffix(' min') if slow.endswith(' min') else quick} to {slow}"


def _chill(chill: list[Remedy], found: Helps, words: RefillWords) -> dict[str, Any]:
    filling = [each for each in chill if each.fills]
    if not filling:
        best = max(chill, key=lambda each: each.gain_kg)
        assert best.temperature_k is not None
        what = f"Chill it to {colder(best.temperature_k, words)}, as cold as it gets here: {_more(best, words)}"
    else:
        parts = [f"to {colder(each.temperature_k, words)}: {FULL[each.case]}" for each in filling if each.temperature_k]
        what = "Chill it " + "; ".join(parts)
    row = {"what": what + ".", "caution": chill[0].caution, "times": []}
    if found.chill_k is not None and found.times:
        to = colder(found.chill_k, words)
        times = [f"in {name}: {span_of_time(time)}" for name, time in found.times if time.quick_s is not None]
        row["times"] = [f"To {to} {times[0]}", *times[1:]] if times else []
    return row


def _row(same: list[Remedy], words: RefillWords) -> dict[str, Any]:
    first = same[0]
    if first.kind == VENT_FILLING:
        parts = [f"{_up(each.mass_kg, words)}, {FULL[each.case]}" if each.fills else f"{_up(each.mass_kg, words)}: "
                 f"{_more(each, words)}" for each in _apart(same, words)]  # fmt: skip
        what = f"Let vapour out while it fills: {'; '.join(parts)}. That nitrous is lost"
    elif first.kind == FULLER:
        least = _up(first.mass_kg, words)
        what = f"Take a fuller supply bottle: with {least} or more in it, as warm as this one, {FULL[first.case]}"
    elif first.kind == WARM:
        assert first.temperature_k is not None
        gives = FULL[first.case] if first.fills else _more(first, words)
        to = colder(first.temperature_k, words)
        what = f"Warm the supply bottle to {to} by a listed device, where local code permits it: {gives}"
    elif first.kind == WAIT:
        what = f"{DO[first.kind]}: {'full in the end' if first.fills else _more(first, words)}"
    else:
        what = f"{DO[first.kind]}: {'; '.join(_ends(same, words))}"
        if first.cost_kg > 0.0:
            what += f"; {words.small(ceil(first.cost_kg * 1000))} of nitrous is lost"
    # What a fuller supply bottle is to hold stands in its row already.
    return {"what": what + ".", "caution": "" if first.kind == FULLER else first.caution, "times": []}


def _apart(same: list[Remedy], words: RefillWords) -> list[Remedy]:
    """Without those that read alike: then the most cautious case alone says it."""
    last = {_up(each.mass_kg, words): each for each in same}
    return [each for each in same if last[_up(each.mass_kg, words)] is each]


def _ends(same: list[Remedy], words: RefillWords) -> list[str]:
    """What it holds in the end: in which case it's full, and how much more in it is likely where it isn't."""
    full = [each for each in same if each.fills]
    rest = same[-1] if not same[-1].fills else None
    said = [FULL[full[-1].case]] if full else []
    return [*said, f"{words.small(floor(rest.gain_kg * 1000))} more in it at the end, {SHORT[rest.case]}"] if rest else said


def _more(remedy: Remedy, words: RefillWords) -> str:
    return f"{words.small(floor(remedy.gain_kg * 1000))} more goes over, {SHORT[remedy.case]}"


def _up(kilograms: float | None, words: RefillWords) -> str:
    return words.small(ceil((kilograms or 0.0) * 1000))


def _time(seconds: float) -> str:
    minutes = seconds / 60.0
    if minutes < 1.0:
        return "a minute"
    if minutes < 90.0:
        step = 1 if minutes < 10 else 5
        return f"{max(1, round(minutes / step)) * step} min"
    return f"{round(minutes / 30.0) / 2:g} h"
