"""Default sentence of each warning about how many fills a supply bottle has left."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "no_full_fill": "The supply bottle doesn't give one full fill of this bottle as it stands.",
    "cools_itself": (
        "Without time to warm between fills the supply bottle gives fewer: each one cools it. Let it stand in the room, "
        "or take turns with another."
    ),
    "too_cold": "The supply bottle would be colder than -40 °C: figures stop there. Let it warm.",
    "receiver_full": "The bottle to fill already holds its limit or more, so that there is no fill to count.",
    "near_critical": "Near and above 36.4 °C liquid and vapour become one and these figures are rough. Let the bottles cool first.",
    "condensation_prior": (
        "How much vapour condenses isn't known for this shop yet: the likely count rests on a figure midway between "
        "two limits (common practice, no source) until refills are logged."
    ),
}
