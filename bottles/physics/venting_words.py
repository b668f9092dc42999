"""Default sentence of each warning about venting."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "outdoors": (
        "Vent outdoors, away from people, pits, air intakes and anything that burns: nitrous is an oxidiser, "
        "makes fires fierce and displaces the air. Never breathe it. Local rules on letting it out come first."
    ),
    "cold": "What comes out freezes skin at once: insulated gloves, a face shield, nobody in front of the outlet.",
    "phase_unknown": (
        "Whether vapour or liquid comes out isn't known: look up whether the bottle has a dip tube and how it "
        "stands. Until then expect liquid: a lot at once."
    ),
    "liquid_out": "Liquid comes out first: a lot at once and very cold. Open the valve a little at a time.",
    "very_cold": (
        "The bottle gets colder than -40 °C, which seals, valves and some walls aren't made for. Vent slowly, with "
        "pauses to warm in the room."
    ),
    "liquid_stays": (
        "At that pressure there is still liquid inside, boiling as the bottle warms. With the valve shut the "
        "pressure comes back: it isn't empty until it is warm and still shows nothing."
    ),
    "solid": (
        "So low a pressure would freeze the liquid to a solid, which isn't computed; figures stop where that "
        "begins. Let the bottle warm and vent again."
    ),
    "nothing_to_vent": "The bottle is already there: nothing needs to come out.",
    "air": "Air that was never purged comes out with the vapour and this isn't computed. Purge the bottle first.",
    "near_critical": (
        "Near and above 36.4 °C liquid and vapour become one, and there is no vapour to let out alone. Let the "
        "bottles cool first."
    ),
    "no_source_liquid": "No liquid leaves the supply bottle, so that letting vapour out makes no room for any.",
    "never_full": (
        "Letting vapour out doesn't give a full fill: the supply bottle's liquid or the room runs out before. "
        "Chill the bottle to fill, or use a fuller supply."
    ),
    "watch_the_scale": (
        "While vapour is let out the flow doesn't cease by itself: it goes on past the limit. Fill on the scale, and "
        "shut the supply at its reading."
    ),
}
