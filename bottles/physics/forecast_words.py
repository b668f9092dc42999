"""Default sentence of each warning about a forecast."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "receiver_full": (
        "The bottle to fill already holds its limit or more. Don't add to it; above its limit it must come down first."
    ),
    "no_flow": (
        "The supply bottle isn't above the bottle to fill in pressure: nothing goes over, and "
        "an open valve may let it flow back. Chill the bottle to fill, or use a fuller supply."
    ),
    "can_pass_limit": (
        "Left open, more than the limit would go over. Watch the scale and close at its "
        "reading; don't wait for the flow to cease."
    ),
    "liquid_runs_out": ("The supply bottle's liquid runs out before the end; what follows is vapour, slowly."),
    "no_source_liquid": (
        "No liquid leaves the supply bottle: either none is left, or it has no dip tube and "
        "stands upright. Vapour alone goes over, slowly, until pressures are equal; a cautious figure doesn't count on it."
    ),
    "left_below_tube": (
        "The supply bottle's dip tube doesn't reach its last liquid: that stays behind, and what "
        "comes after is vapour, slowly. Change to another supply bottle."
    ),
    "source_unknown": ("The supply bottle's weight isn't known, so the span is wide. Weigh it to narrow it."),
    "air": (
        "Air that was never purged takes up room and pressure: less goes over and the gauge "
        "reads high afterwards. Purge the bottle first."
    ),
    "near_critical": (
        "Near and above 36.4 °C liquid and vapour become one and these figures are rough. Let the bottles cool first."
    ),
    "freezes": (
        "So much so fast would cool a bottle to -90.8 °C, where nitrous freezes: these figures end "
        "there. Check the walls' weights; go slowly."
    ),
    "condensation_prior": (
        "How much vapour condenses isn't known for this shop yet: the likely figure is midway "
        "between two limits (common practice, no source) until refills are logged."
    ),
}
