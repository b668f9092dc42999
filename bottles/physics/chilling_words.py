"""Default sentence of each warning about chilling and warming by surroundings."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "never_gets_there": (
        "It never gets to that temperature: what surrounds it isn't cold, or warm, enough. Take a temperature "
        "between the bottle's and its surroundings'."
    ),
    "already_there": "The bottle is at that temperature already.",
    "all_but_there": (
        "That is within half a degree of the surroundings, where the last of it takes longest. A degree less saves much time."
    ),
    "freezer": (
        "Valve shut and outlet plugged; a freezer for bottles holds nothing else and stands in a ventilated room. "
        "Many warm bottles at once warm the freezer itself: then it takes longer."
    ),
    "wet": "Dry the bottle before it is weighed: water and frost on it count as nitrous on the scale.",
    "no_dry_ice": "Never dry ice or liquid nitrogen: they chill below what valves, seals and walls are made for.",
    "cold_hides": (
        "A cold bottle takes more than it may hold when warm, and its gauge reads low. Fill by weight alone, to the limit."
    ),
    "full_of_liquid": (
        "On the way the bottle becomes full of liquid: from there each degree adds several bar. It holds too much "
        "for that temperature: take out what is above its limit first."
    ),
    "no_flame": "Never a flame, a heat gun or hot water, and no part of a bottle above 52 °C.",
    "near_critical": "Near and above 36.4 °C these times are rough. Go by a thermometer on the bottle.",
}
