"""How a bottle must stand or lie, from its dip (siphon) tube and its use.

Nitrous leaves as liquid only where the opening inside lies under the liquid. A tube that
reaches the far end takes liquid from there; without one the valve itself has to be at the
low end. All of this is common practice, no source; the maker's label comes first.

>>> how_it_lies("supply", "dip").sentence
'Stands upright: its tube takes liquid from the bottom.'
"""

from __future__ import annotations

from dataclasses import dataclass

from shop.rules.origin import Origin

HELD = "Held by two chains or straps, one above and one below the middle."


@dataclass(frozen=True, slots=True)
class Lying:
    """How it must stand or lie, what goes wrong otherwise, and what that rests on."""

    sentence: str
    otherwise: str
    held: str
    basis: Origin = "common practice"


_SUPPLY = {
    "dip": Lying(
        "Stands upright: its tube takes liquid from the bottom.",
        "Upside down it gives vapour only, until the liquid reaches the tube's end.",
        HELD,
    ),
    "none": Lying(
        "Upside down, in a stand made for it: without a tube only the valve end gives liquid.",
        "Upright it gives vapour only and cools itself; what goes over is little and slow.",
        f"{HELD} Never propped by hand or against a wall.",
    ),
    "unknown": Lying(
        "Not known: read its collar or label for a dip (siphon) tube, or ask the supplier.",
        "Set up the wrong way it gives vapour where liquid is expected.",
        HELD,
    ),
}
_CAR = {
    "dip": Lying(
        "In the car the tube's end lies at the low and rearward end: valve forward and higher, label up.",
        "Under acceleration liquid moves rearward; with the tube's end elsewhere the engine gets vapour.",
        "Held by two brackets; its valve carries nothing.",
    ),
    "none": Lying(
        "In the car the valve end is the low and rearward end: without a tube only it gives liquid.",
        "Any other way the engine gets vapour.",
        "Held by two brackets; its valve carries nothing.",
    ),
    "unknown": Lying(
        "Not known: weigh it and look at its label, or see at the next emptying whether there is a tube.",
        "Fitted the wrong way the engine gets vapour.",
        "Held by two brackets; its valve carries nothing.",
    ),
}
_OTHER = {
    "dip": Lying(
        "Stored upright and held. Upright its valve gives liquid: mind that when venting.",
        "Upside down its valve gives vapour.",
        "Held so that it can't fall.",
    ),
    "none": Lying(
        "Stored upright and held. Upright its valve gives vapour.",
        "Upside down its valve gives liquid: mind that when venting.",
        "Held so that it can't fall.",
    ),
    "unknown": Lying(
        "Stored upright and held. Whether its valve gives liquid or vapour isn't known: expect liquid.",
        "",
        "Held so that it can't fall.",
    ),
}


def how_it_lies(use: str, dip_tube: str) -> Lying:
    """How a bottle of this use must stand or lie; an unknown tube stays unknown."""
    known = dip_tube if dip_tube in ("dip", "none") else "unknown"
    return {"supply": _SUPPLY, "car": _CAR}.get(use, _OTHER)[known]
