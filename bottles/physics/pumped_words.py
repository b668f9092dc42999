"""Default sentence of each warning about a pumped refill."""

from __future__ import annotations

from collections.abc import Mapping

SENTENCES: Mapping[str, str] = {
    "never_dry": "Never run the pump dry: stop it when the supply bottle's liquid is out, before it draws vapour.",
    "never_dead_headed": "Never run the pump against a closed valve: what it can't move it heats, and hot nitrous can decompose.",
    "oil_free": "Only a pump that is free of oil and made for nitrous oxide. Any oil in it can burn explosively.",
    "highest_unknown": (
        "The pump's highest delivery pressure isn't known, so that it stops nothing here. Read its plate before it runs."
    ),
    "lowest_unknown": (
        "The pump's lowest inlet pressure isn't known, so that it stops nothing here. Read its plate before it runs."
    ),
    "no_source_liquid": (
        "No liquid leaves the supply bottle: either none is left, or it has no dip tube and stands upright. Don't "
        "start the pump."
    ),
    "liquid_runs_out": "The supply bottle's liquid is out before the limit. Stop the pump there.",
    "delivery_limit": "The pump's highest delivery pressure ends it before the limit. Chill the bottle to fill.",
    "inlet_limit": (
        "The pump's lowest inlet pressure ends it before the limit: the supply bottle cools as it gives. Let it warm in the room."
    ),
    "receiver_full": (
        "The bottle to fill already holds its limit or more. Don't add to it; above its limit it must come down first."
    ),
    "full_of_liquid": (
        "The bottle to fill would be full of liquid before that limit is reached, and its pressure would jump. "
        "Check the limit, the tare and the capacity."
    ),
    "pump_warms": (
        "The pump warms the liquid by more than 5 °C. Watch its temperature, and rest it: hot nitrous can decompose."
    ),
    "saturated_inlet": (
        "The supply's liquid is at its boiling point: it makes vapour in a warm or narrow inlet. Keep the pump below "
        "and as cold as the supply, as its maker says."
    ),
    "near_critical": "Near and above 36.4 °C liquid and vapour become one and these figures are rough. Let the bottles cool first.",
}
