"""Where bottles are chilled in this shop: its freezers and baths, and how cold each gets."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.chilling import FREEZER, ICED_WATER, Surroundings
from bottles.physics.vessel import COLDEST
from shop.base.models import Place

# Taken where none is written down (common practice, no source).
USUAL_MK = (("a freezer", "freezer", 255_150), ("iced water", "bath", 273_150))
_ICED = (270_150, 285_150)  # a bath between these may be reckoned as iced water


@dataclass(frozen=True, slots=True)
class ColdPlace:
    """A freezer or bath; `surroundings` None where how fast it chills isn't known."""

    name: str
    coldest_k: float
    surroundings: Surroundings | None
    written_down: bool


def cold_places() -> list[ColdPlace]:
    """Return the shop's freezers and baths; where none is written down, what is usual."""
    rows = Place.objects.filter(active=True, kind__in=("freezer", "bath"), coldest_mk__isnull=False).order_by("coldest_mk", "code")
    found = [_place(place.name, place.kind, place.coldest_mk) for place in rows if place.coldest_mk is not None]
    return found or [_place(*usual, written_down=False) for usual in USUAL_MK]


def _place(name: str, kind: str, coldest_mk: int, *, written_down: bool = True) -> ColdPlace:
    kelvin = max(coldest_mk / 1000, COLDEST)
    surroundings = None
    if kind == "freezer":
        surroundings = Surroundings(FREEZER, kelvin)
    elif _ICED[0] <= coldest_mk <= _ICED[1]:
        surroundings = Surroundings(ICED_WATER, kelvin)
    return ColdPlace(name, kelvin, surroundings, written_down)
