"""Figures of the register as the person reads them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from django.http import HttpRequest

from bottles.models import Bottle, Tare
from shop.base.models import Shop
from shop.people.models import User
from shop.physics.formatting import UnitSystem, format_mass, format_volume, unit_system

_written = lru_cache(maxsize=8192)(format_mass)  # lists say the same weights again and again


@dataclass(frozen=True, slots=True)
class Words:
    """Writes weights and capacities in the person's own units."""

    units: UnitSystem

    def mass(self, grams: int, *, plus_minus_g: int | None = None) -> str:
        """A weight, with its ± where it has one."""
        return _written(grams, self.units.mass, self._step(plus_minus_g), plus_minus_g=plus_minus_g)

    def capacity(self, bottle: Bottle) -> str:
        """The water capacity, in litres beside cubic inches where those are read."""
        if bottle.capacity_ml is None:
            return "capacity unknown"
        litres = format_volume(bottle.capacity_ml, "L")
        if self.units.name == "us":
            return f"{format_volume(bottle.capacity_ml, 'in3')} ({litres})"
        return litres

    def tare(self, tare: Tare | None) -> str:
        """The tare with its ±."""
        return self.mass(tare.total_g, plus_minus_g=tare.error_g) if tare else "no tare"

    def _step(self, plus_minus_g: int | None) -> int | None:
        # Ten grams of ± are shown to ten grams; kilograms by default stop there anyway.
        return 5 if plus_minus_g is not None and plus_minus_g < 10 and self.units.mass == "kg" else None


def words_for(request: HttpRequest, shop: Shop) -> Words:
    """Words in the units that the person signed in reads."""
    person: User = request.user  # type: ignore[assignment]
    return Words(unit_system(person.units or shop.units))
