"""A stored pressure or temperature, as a form shows it to whoever may save it again."""

from __future__ import annotations

from shop.physics import units
from shop.physics.errors import QuantityError


def pressure_shown_back(stored: int, typed: str, *, unit: str, ambient_pa: float) -> str:
    """Return a pressure as it was typed, where typing it again still means the same; else in a unit."""
    try:
        same = units.parse_pressure(typed, default_unit=unit, ambient_pa=ambient_pa).stored == stored
    except QuantityError:
        same = False
    return typed if same else units.in_own_unit(stored, unit, ambient_pa=ambient_pa)


def temperature_shown_back(stored: int, typed: str, *, unit: str) -> str:
    """Return a temperature as it was typed, where typing it again still means the same; else in a unit."""
    try:
        same = units.parse_temperature(typed, default_unit=unit).stored == stored
    except QuantityError:
        same = False
    return typed if same else units.in_own_unit(stored, unit)
