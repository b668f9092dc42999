"""How an invented refill really goes: between the two limits that the physics computes.

What goes over is drawn from this shop's own condensation figure; the fill limit stops it where it
is reached. So the ledger of the demo holds nothing that couldn't have happened.
"""

from __future__ import annotations

import random
from dataclasses import dataclass

from bottles.physics.condensation import between
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from shop.physics.fluid import engine

VAPOUR_KG_M3 = 1.85  # of nitrous at the room's pressure; what a vented bottle still holds
# This shop's condensation figure by how the liquid enters, and how it scatters.
FIGURES, SPREAD = {"dip": 0.62, "none": 0.78}, 0.1


@dataclass(frozen=True, slots=True)
class Vessels:
    """What the physics needs of one bottle."""

    capacity_ml: int
    wall: str
    wall_g: int
    net_g: float
    temperature_k: float
    dip: str = "dip"

    def vessel(self) -> Vessel:
        """The bottle at rest."""
        least = VAPOUR_KG_M3 * self.capacity_ml / 1e6
        return Vessel(
            self.capacity_ml / 1e6, wall_heat(self.wall, self.wall_g / 1000), max(self.net_g / 1000, least),
            self.temperature_k, liquid_pickup=True,
        )  # fmt: skip


@dataclass(frozen=True, slots=True)
class Poured:
    """What went over and what the line took, in grams."""

    moved_g: float
    line_g: float
    at_limit: bool


def pour(*, source: Vessels, receiver: Vessels, room_g: float, line_volume_m3: float, rng: random.Random) -> Poured:
    """Let nitrous go over until the room is used up or nothing moves any more."""
    transfer = Transfer(source.vessel(), receiver.vessel(), line_volume_m3)
    figure = min(max(rng.gauss(FIGURES[receiver.dip], SPREAD), 0.15), 0.95)
    free_g = 1000 * between(transfer.slow_free_kg(), transfer.mixed_free_kg(), figure)
    line_g = transfer.line_kg * 1000 * rng.uniform(0.85, 1.1)
    moved_g = min(room_g, free_g)
    return Poured(moved_g, line_g if moved_g > 0 else 0.0, free_g >= room_g)


def pressure_of(vessels: Vessels) -> float:
    """The pressure in a bottle at rest [Pa, absolute]."""
    vessel = vessels.vessel()
    return pressure_and_energy(vessel.volume_m3, vessel.net_kg, vessel.temperature_k)[0]


def vapour_alone_g(capacity_ml: int, temperature_k: float) -> float:
    """What a bottle holds at the moment its last liquid is gone: the heel of a supply bottle."""
    return engine().saturation(temperature_k)[2] * capacity_ml / 1000
