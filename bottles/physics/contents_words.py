"""Default sentence of each warning about a bottle's contents."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "liquid_unknown": (
        "While any liquid is left, pressure and temperature can't tell how much. Weigh the bottle to know."
    ),
    "no_liquid": (
        "The gauge is below the vapour pressure at this temperature: no liquid is left, or a "
        "reading is wrong. Weigh the bottle."
    ),
    "above_vapour_pressure": (
        "Danger sign. The gauge is above the vapour pressure at this temperature: the bottle is "
        "overfilled and full of liquid, air or push gas is inside, or a reading is wrong. Don't "
        "warm it, don't add to it, weigh it now."
    ),
    "supercritical": (
        "Above 36.4 °C there is neither liquid nor vapour, and pressure climbs fast with "
        "temperature. Let the bottle cool before it is judged or filled."
    ),
    "beyond_any_fill": (
        "No fill could show this pressure at this temperature: air or push gas is inside, or a "
        "reading is wrong. Don't warm it, don't add to it, weigh it now."
    ),
    "over_limit": (
        "The bottle holds more than its fill limit. Don't warm it, don't add to it; keep it "
        "cool and bring it down to its limit, weighing as you go."
    ),
    "full_of_liquid": (
        "At this temperature the bottle is full of liquid: each degree more adds several bar. Don't warm it."
    ),
    "reads_above_weight": (
        "The gauge is above what this weight should show at this temperature: air or push gas "
        "is inside, the contents are warmer than read, or the weight, tare or gauge is wrong. "
        "Don't warm it, don't add to it; read and weigh again."
    ),
    "reads_below_weight": (
        "The gauge is below what this weight should show at this temperature: the contents are "
        "colder than read, or the weight, tare or gauge is wrong. Read and weigh again."
    ),
    "near_critical": (
        "Between 34.5 °C and 39.5 °C, near the critical point, masses from pressure are rough. Go by weight."
    ),
    "too_hot": (
        "The bottle is above 52 °C, which no bottle may reach. Take away the heat, keep clear "
        "of its safety disc and let it cool."
    ),
}
