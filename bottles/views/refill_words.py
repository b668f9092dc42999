"""Figures of refills as the person reads them: pressures and temperatures beside weights."""

from __future__ import annotations

from dataclasses import dataclass

from django.http import HttpRequest

from bottles.models import Scale
from bottles.views.wording import Words
from shop.base.models import Shop
from shop.people.models import User
from shop.physics.formatting import format_pressure, format_temperature, unit_system
from shop.physics.units import ambient_pressure
from shop.physics.weights import MassStyle, format_mass, reading_not_above


@dataclass(frozen=True, slots=True)
class RefillWords(Words):
    """Writes what a refill's pages show, in the person's own units."""

    ambient_pa: float

    def temperature(self, millikelvin: float) -> str:
        """A temperature to the degree."""
        return format_temperature(round(millikelvin), self.units.temperature)

    def pressure(self, pascal: float) -> str:
        """A pressure as a gauge shows it."""
        return format_pressure(round(pascal), self.units.pressure, self.ambient_pa)

    def small(self, grams: int, *, plus_minus_g: int | None = None) -> str:
        """A weight that may be a few grams: those in grams or ounces."""
        if abs(grams) >= 450:
            return self.mass(grams, plus_minus_g=plus_minus_g)
        return format_mass(grams, "oz" if self.units.name == "us" else "g", plus_minus_g=plus_minus_g)

    def span(self, low_g: int, high_g: int) -> str:
        """Two weights with one dash, or one where they're written alike."""
        low, high = self.mass(low_g), self.mass(high_g)
        return low if low == high else f"{low} – {high}"

    def on_scale(self, grams: int, scale: Scale | None) -> str:
        """A reading as a scale writes it, never above the weight."""
        if scale is None:
            return self.mass(grams)
        return reading_not_above(max(0, grams), style_of(scale), scale.resolution_g)

    def read(self, grams: int, scale: Scale) -> str:
        """A reading as a scale wrote it."""
        return format_mass(grams, style_of(scale), scale.resolution_g)

    def other(self, grams: int, scale: Scale | None) -> str:
        """The same weight in the other unit system, for whoever reads that."""
        style = scale.style if scale else self.units.mass
        return format_mass(grams, "kg" if style in ("lb", "lb oz") else "lb oz")


def style_of(scale: Scale) -> MassStyle:
    """A scale's way of writing."""
    return scale.style  # type: ignore[return-value]


def refill_words(request: HttpRequest, shop: Shop) -> RefillWords:
    """Words in the units of the person signed in, with the air of the shop's height."""
    person: User = request.user  # type: ignore[assignment]
    return RefillWords(unit_system(person.units or shop.units), ambient_pressure(float(shop.height_m)))
