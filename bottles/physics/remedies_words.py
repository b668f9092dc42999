"""Default sentence of each warning about what would help a short fill."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "receiver_full": (
        "The bottle to fill already holds its limit or more. Don't add to it; above its limit it must come down first."
    ),
    "full_anyway": "It fills in every case: nothing else is needed. Fill on the scale and close at its reading.",
    "nothing_helps": (
        "Nothing that can be done to these two bottles gives a full fill. Take a fuller supply bottle, or fill in two turns."
    ),
    "source_unknown": "The supply bottle's weight isn't known: weigh it first, then this can say what would help.",
    "chill": (
        "In a freezer or iced water; no dry ice or liquid nitrogen. A cold bottle takes more than it may hold: "
        "fill on the scale, close at its reading. Dry it before the weighing."
    ),
    "vent_first": (
        "Outdoors, away from people and anything that burns; never breathe it. What comes out freezes skin and makes "
        "fires fierce."
    ),
    "purge": "Air must come out first: purge with nitrous outdoors, away from people and anything that burns.",
    "wait": (
        "Both bottles kept at their temperatures, on the scale, with somebody beside them: joined bottles are never left alone."
    ),
    "vent_filling": (
        "Vapour let out outdoors, a little at a time, on the scale; never breathe it. It freezes skin and makes fires "
        "fierce. Flow doesn't cease by itself then: close at the reading."
    ),
    "fuller_supply": "Another supply bottle with at least so much in it, as warm as this one.",
    "warm_supply": (
        "Never above 52 °C on any part, never by flame, heat gun or hot water: only in a warm room, or by a listed "
        "device with a thermostat, and only where local code permits it. A fuller supply is safer."
    ),
}
