"""The invented shop's places, scales and stations, and how its scales read."""

from __future__ import annotations

import random
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from fractions import Fraction
from typing import Any

from bottles.physics.weighing import net_uncertainty
from shop.demo.kit import Kit
from shop.physics.unit_table import LB_G
from shop.physics.units import parse_mass

# code, name, kind, outdoors
PLACES: tuple[tuple[str, str, str, bool], ...] = (
    ("COUNTER", "Counter", "counter", False),
    ("RACK-A", "Rack A, customers' bottles", "shelf", False),
    ("RACK-B", "Rack B, shop's bottles", "shelf", False),
    ("FREEZER", "Chest freezer", "freezer", False),
    ("BATH", "Ice bath", "bath", False),
    ("FILL-1", "Filling station 1", "station", False),
    ("FILL-2", "Filling station 2", "station", False),
    ("HOLD", "Quarantine shelf", "quarantine", False),
    ("CAGE", "Outdoors cage, supply bottles", "shelf", True),
    ("CAGE-Q", "Outdoors cage, quarantine", "quarantine", True),
)
# What chills: how cold it gets in °C, how many bottles it takes at once.
CHILLS = {"FREEZER": (-18, 4), "BATH": (1, 2)}
_OUNCE_G = Fraction(LB_G) / 16


@dataclass(frozen=True, slots=True)
class ScaleOf:
    """A scale: how it writes, what it tells apart, how wrong it may be."""

    code: str
    name: str
    style: str
    step: Fraction  # in its own unit: lb, oz or kg
    resolution: str
    error: str
    capacity: str

    @property
    def unit_g(self) -> Fraction:
        """Grams in the unit of its steps."""
        return {"kg": Fraction(1000), "lb": Fraction(LB_G), "lb oz": _OUNCE_G}[self.style]

    @property
    def resolution_g(self) -> int:
        """What it tells apart, as stored."""
        return parse_mass(self.resolution, default_unit="kg").stored

    @property
    def error_g(self) -> int:
        """How wrong it may be, as stored."""
        return parse_mass(self.error, default_unit="kg").stored

    @property
    def uncertainty_g(self) -> int:
        """The ± of one reading, as the books take it."""
        return net_uncertainty(self.error_g, (self.resolution_g + 1) // 2)

    def shows(self, grams: float) -> str:
        """Write what it shows of a weight, to its own step."""
        steps = round(Fraction(grams) / self.unit_g / self.step)
        value = steps * self.step
        if self.style == "lb oz":
            pounds, ounces = divmod(value, 16)
            return f"{pounds} lb {float(ounces):g} oz"
        return f"{float(value):.2f} {self.style}"

    def reads(self, grams: float, rng: random.Random) -> str:
        """Write what it shows of a true weight: within a third of its error, to its own step."""
        return self.shows(grams + rng.uniform(-0.33, 0.33) * self.error_g)

    def values(self) -> Mapping[str, Any]:
        """What is entered of it."""
        return {
            "code": self.code, "name": self.name, "style": self.style, "resolution": self.resolution, "error": self.error,
            "capacity": self.capacity,
        }  # fmt: skip


def scales_of(kit: Kit) -> dict[str, ScaleOf]:
    """Return the three scales by code: two benches, and the floor scale for supply bottles."""
    if kit.metric:
        found = (
            ScaleOf("BENCH-1", "Bench scale 1", "kg", Fraction(1, 100), "10 g", "20 g", "30 kg"),
            ScaleOf("BENCH-2", "Bench scale 2", "kg", Fraction(1, 50), "20 g", "30 g", "60 kg"),
            ScaleOf("FLOOR", "Floor scale", "kg", Fraction(1, 20), "50 g", "100 g", "150 kg"),
        )
    else:
        found = (
            ScaleOf("BENCH-1", "Bench scale 1", "lb", Fraction(1, 50), "0.02 lb", "0.04 lb", "66 lb"),
            ScaleOf("BENCH-2", "Bench scale 2", "lb oz", Fraction(1), "1 oz", "1 oz", "130 lb"),
            ScaleOf("FLOOR", "Floor scale", "lb", Fraction(1, 10), "0.1 lb", "0.2 lb", "330 lb"),
        )
    return {scale.code: scale for scale in found}


@dataclass(frozen=True, slots=True)
class StationOf:
    """A filling station: its scales, its hose, what the hose adds to the reading."""

    code: str
    name: str
    place: str
    scale: str
    supply_scale: str
    hose_length: str
    hose_bore: str
    hose_pull: str
    hose_pull_g: int
    line_loss: str

    def values(self) -> Mapping[str, Any]:
        """What is entered of it."""
        return asdict(self)


def stations_of(kit: Kit) -> dict[str, StationOf]:
    """Return the two stations by code; only the first has a scale under its supply bottle."""
    if kit.metric:
        found = (
            StationOf("ST-1", "Station 1", "FILL-1", "BENCH-1", "FLOOR", "1.8 m", "6 mm", "30 g", 30, ""),
            StationOf("ST-2", "Station 2", "FILL-2", "BENCH-2", "", "1.2 m", "6 mm", "", 0, "40 g"),
        )
    else:
        found = (
            StationOf("ST-1", "Station 1", "FILL-1", "BENCH-1", "FLOOR", "6 ft", ".25 in", "1 oz", 28, ""),
            StationOf("ST-2", "Station 2", "FILL-2", "BENCH-2", "", "4 ft", ".25 in", "", 0, "1.5 oz"),
        )
    return {station.code: station for station in found}
