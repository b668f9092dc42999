"""A plain peer of the forecast: the same limits by stepping, with CoolProp's high-level calls alone.

What anyone would write first: both bottles marched in equal steps of mass, each step's temperature
found from mass and energy by secant steps. Nothing of the project's own physics is used. It answers
less than the forecast does: the three limits and what each reading is worth, no warmest start and
no least supply.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

FLUID = "HEOS::NitrousOxide"
STEPS = 200  # over what the receiver could hold
NEARLY = 1e-4  # K, where a temperature counts as found


@dataclass(frozen=True)
class Bottle:
    volume: float  # m3
    wall: float  # J/K
    mass: float  # kg
    temperature: float  # K


@dataclass(frozen=True)
class Answer:
    """Masses that go over without a fill limit, and what a reading's tolerance is worth [kg]."""

    mixed: float
    wall_condensing: float
    held: float
    readings: dict[str, float]


def told(source: Bottle, receiver: Bottle, *, degree: float = 1.0, gram: float = 0.02, air: float = 0.0) -> Answer:
    """Step everything."""
    quick = mixed(source, receiver)
    changed = {
        "source temperature": (replace(source, temperature=source.temperature + degree), receiver),
        "source weight": (replace(source, mass=source.mass + gram), receiver),
        "receiver temperature": (source, replace(receiver, temperature=receiver.temperature + degree)),
        "receiver start": (source, replace(receiver, mass=2.0 * receiver.mass)),
    }
    readings = {name: abs(mixed(*both) - quick) for name, both in changed.items()}
    return Answer(quick, wall_condensing(source, receiver), held(source, receiver), readings)


def mixed(source: Bottle, receiver: Bottle) -> float:
    """Each bottle uniform with its wall: what has gone over when the pressures are equal."""
    step = receiver.volume * _of("D", "T", min(source.temperature, receiver.temperature), "Q", 0) / STEPS
    giving, taking = _Settling(source), _Settling(receiver)
    moved, gap = 0.0, giving.pressure() - taking.pressure()
    while gap > 0.0 and giving.mass > 2 * step:
        heat = giving.outlet() * step
        giving.change(-step, -heat)
        taking.change(step, heat)
        before, gap = gap, giving.pressure() - taking.pressure()
        moved += step
    return moved - step * (-gap / (before - gap)) if gap < 0.0 < moved else moved


def wall_condensing(source: Bottle, receiver: Bottle) -> float:
    """What arrives parts into liquid, which lies apart, and vapour, which condenses on the wall alone."""
    step = receiver.volume * _of("D", "T", min(source.temperature, receiver.temperature), "Q", 0) / STEPS
    giving, above = _Settling(source), _Settling(receiver)
    moved, gap = 0.0, giving.pressure() - above.pressure()
    while gap > 0.0 and giving.has_liquid() and above.volume > 0.02 * receiver.volume:
        heat, pressure = giving.outlet(), above.pressure()
        giving.change(-step, -heat * step)
        liquid, vapour = _of("H", "P", pressure, "Q", 0), _of("H", "P", pressure, "Q", 1)
        stays = min(max((vapour - heat) / (vapour - liquid), 0.0), 1.0) * step
        grown = stays / _of("D", "P", pressure, "Q", 0)
        above.volume -= grown
        above.change(step - stays, (step - stays) * vapour + pressure * grown)
        above.drip()
        before, gap = gap, giving.pressure() - above.pressure()
        moved += step
    return moved - step * (-gap / (before - gap)) if gap < 0.0 < moved else moved


def held(source: Bottle, receiver: Bottle) -> float:
    """Both kept at their temperatures."""
    step = receiver.volume * _of("D", "T", receiver.temperature, "Q", 0) / STEPS
    moved = 0.0
    while moved + step < source.mass:
        giving = _of("P", "D", (source.mass - moved) / source.volume, "T", source.temperature)
        if giving <= _of("P", "D", (receiver.mass + moved) / receiver.volume, "T", receiver.temperature):
            break
        moved += step
    return moved


class _Settling:
    """A bottle on its way: mass and energy, and the temperature at which they settle."""

    def __init__(self, bottle: Bottle) -> None:
        self.volume, self.wall, self.mass, self.t = bottle.volume, bottle.wall, bottle.mass, bottle.temperature
        self.energy = self.mass * _of("U", "D", self.density, "T", self.t) + self.wall * self.t
        self.rise = 0.0
        self.dry = False

    @property
    def density(self) -> float:
        return self.mass / self.volume

    def pressure(self) -> float:
        return _of("P", "D", self.density, "T", self.t)

    def has_liquid(self) -> bool:
        """Whether liquid is left to give; once it's out, the mist that cooling makes isn't given."""
        self.dry = self.dry or self.density <= _of("D", "T", self.t, "Q", 1)
        return not self.dry

    def outlet(self) -> float:
        """Enthalpy of what leaves: liquid while there is any, then vapour."""
        return _of("H", "T", self.t, "Q", 0 if self.has_liquid() else 1)

    def change(self, mass: float, energy: float) -> None:
        """Take in, or give, mass with its energy; find the temperature by secant steps."""
        self.mass += mass
        self.energy += energy
        old, began = self.t, self.t
        f_old = self._over(old)
        new = old + (self.rise or -f_old / (self.wall + 1500.0 * self.mass))
        for _ in range(20):
            f_new = self._over(new)
            if abs(new - old) < NEARLY or f_new == f_old:
                break
            old, f_old, new = new, f_new, new - f_new * (new - old) / (f_new - f_old)
        self.t, self.rise = new, new - began

    def drip(self) -> None:
        """Let what has condensed on the wall run down."""
        vapour, liquid = _of("D", "T", self.t, "Q", 1), _of("D", "T", self.t, "Q", 0)
        if vapour < self.density < liquid:
            drops = (self.mass - vapour * self.volume) / (1.0 - vapour / liquid)
            self.mass -= drops
            self.volume -= drops / liquid
            self.energy -= drops * _of("U", "T", self.t, "Q", 0)

    def _over(self, t: float) -> float:
        return self.mass * _of("U", "D", self.density, "T", t) + self.wall * t - self.energy


def _of(wanted: str, first: str, one: float, second: str, other: float) -> Any:
    from CoolProp.CoolProp import PropsSI

    return PropsSI(wanted, first, one, second, other, FLUID)
