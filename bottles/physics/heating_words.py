"""Default sentence of each warning about warming a bottle."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "already_there": "The bottle already shows this pressure or more. Don't warm it.",
    "never_gets_there": (
        "With this power the bottle never gets there: it loses as much to the room. Wrap it, "
        "or use a stronger heater made for bottles."
    ),
    "above_52": (
        "That takes more than 52 °C, which no bottle may reach. Don't warm it so far; fill it instead, by weight."
    ),
    "full_of_liquid": (
        "On the way the bottle becomes full of liquid: from there each degree adds several "
        "bar. Stay with it and stop early."
    ),
    "boils_dry": ("On the way the last liquid boils off: from there pressure hardly rises. Refill the bottle instead."),
    "near_critical": "Near and above 36.4 °C these figures are rough. Go by the gauge.",
}
