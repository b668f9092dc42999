"""Default sentence of each warning about two joined bottles."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "close_valves": (
        "Shut both valves. Joined bottles at different temperatures go on moving nitrous into the colder one, "
        "unwatched and by no scale."
    ),
    "passes_limit": (
        "The bottle that takes passes its fill limit. Shut the valves now; weigh it, and bring it down to its "
        "limit before it warms."
    ),
    "full_of_liquid": (
        "The bottle that takes can become full of liquid: then each degree adds several bar and its safety disc "
        "may burst. Shut the valves now and keep it cold until it has come down to its limit."
    ),
    "limit_unknown": "The fill limit of the bottle that takes isn't known, so that nobody can tell whether it's passed.",
    "equal": "Both bottles stand at one temperature and one pressure: nothing flows. Warm or chill neither while joined.",
    "equal_pressures": "Both bottles stand at one pressure: nothing flows now. It may once their temperatures change.",
    "vapour": "Vapour goes over, slowly, and condenses in the colder bottle; it doesn't stop because it is slow.",
    "later": (
        "The quick flow ceases early, but it isn't the end: as the bottles come back to their temperatures more goes over."
    ),
    "near_critical": "Near and above 36.4 °C these figures are rough. Shut the valves and let the bottles cool.",
}
