"""What an invented bottle is: sizes, walls, lists of what hangs on it, stamps counted back from today.

Weights of walls are rules of thumb of a like kind (so much a litre of capacity), not anybody's data.
"""

from __future__ import annotations

import zlib
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from shop.demo.kit import Kit
from shop.rules.month import Month

G_A_ML = {"aluminium": 0.79, "steel": 1.15, "composite": 0.45}
# Capacity, and the label in pounds and in kilograms; the label keeps below 68 % of the water.
SIZES = {
    "2.5": (1_700, "2.5", "1.1"),
    "5": (3_400, "5", "2.2"),
    "10": (6_800, "10", "4.5"),
    "12": (8_200, "12", "5.4"),
    "15": (10_200, "15", "6.8"),
    "20": (13_600, "20", "9.0"),
    "60": (40_700, "60", "27.0"),
}
VALVE_G, GAUGE_G, RING_G, SUPPLY_VALVE_G = 460, 120, 210, 690


@dataclass(frozen=True, slots=True)
class Spec:
    """One bottle of the register. Months are counted back from today's; None: not there or not legible."""

    code: str
    size: str = "10"
    wall: str = "aluminium"
    owner: str = "shop"  # shop, supplier, or a customer's name
    use: str = "car"
    mark: str | None = None  # None: the country's usual one for this wall
    serial: str | None = None  # None: made up from the code; "": not legible
    maker: int = 0
    since_days: int = 700  # registered so many days ago
    made_ago: int | None = None
    tests_ago: tuple[int, ...] = ()
    star: bool = False
    plus: bool = False
    visual_ago: int | None = None
    disc_ago: int | None = None
    end_in: int | None = None  # its service life ends in so many months; negative: ended
    year_only: bool = False
    tare: bool = True
    capacity: bool = True
    labelled: bool = True
    inferred: bool = False
    dip: str = "dip"
    alloy: str = ""
    note: str = ""
    permit: str = ""
    permit_lists: bool | None = None  # None: not looked up
    permit_days: int | None = None  # valid for so many days from today
    own_limit_g: int | None = None
    last_held: str = "nitrous"
    race_grade: bool | None = None
    bottle_typed: str = ""  # where its own weight must come out to the gram
    confirmed: tuple[str, ...] = field(default=())

    @property
    def capacity_ml(self) -> int:
        """Its water capacity, whether anybody read it or not."""
        return SIZES[self.size][0]

    def wall_g(self) -> int:
        """What the bare bottle weighs."""
        return round(self.capacity_ml * G_A_ML[self.wall] / 10) * 10 + (250 if self.use != "supply" else 2_000)

    def parts(self, kit: Kit) -> list[tuple[str, str]]:
        """What is on it when it's weighed, as typed."""
        bottle = self.bottle_typed or kit.mass(self.wall_g())
        if self.use == "supply":
            return [("bottle", bottle), ("valve", kit.mass(SUPPLY_VALVE_G))]
        parts = [("bottle", bottle), ("valve", kit.mass(VALVE_G))]
        if self.size not in ("2.5", "5"):
            parts.append(("gauge", kit.mass(GAUGE_G)))
        if self.use == "car":
            parts.append(("ring", kit.mass(RING_G)))
        return parts

    def mark_in(self, kit: Kit) -> str:
        """Its specification mark."""
        if self.mark is not None:
            return self.mark
        if self.star:
            return kit.star_steel
        return {"aluminium": kit.aluminium, "steel": kit.steel, "composite": kit.composite}[self.wall]

    def label(self, kit: Kit) -> str:
        """The labelled size as typed."""
        _, pounds, kilograms = SIZES[self.size]
        return kit.label(pounds, kilograms) if self.labelled else ""

    def values(self, kit: Kit, month: Month) -> Mapping[str, Any]:
        """Everything that is told of it on the day it's registered, as plain data."""
        capacity = self.capacity and not self.inferred
        stamps = []
        if self.made_ago is not None:
            stamps.append(("made", kit.stamp(month - self.made_ago)))
        for number, ago in enumerate(self.tests_ago):
            last = number == len(self.tests_ago) - 1
            date = str((month - ago) // 12) if self.year_only and last else kit.stamp(month - ago)
            stamps.append(("test", date + ("*" if self.star and last else "") + ("+" if self.plus and last else "")))
        if self.visual_ago is not None:
            stamps.append(("visual", kit.stamp(month - self.visual_ago)))
        if self.disc_ago is not None:
            stamps.append(("disc", kit.stamp(month - self.disc_ago)))
        if self.end_in is not None:
            stamps.append(("end", kit.stamp(month + self.end_in)))
        return {
            "code": self.code, "maker": self.maker, "mark": self.mark_in(kit), "wall": self.wall,
            "serial": made_up_serial(self.code) if self.serial is None else self.serial,
            "capacity_typed": (f"{self.capacity_ml / 1000:.1f} L" if self.capacity_ml >= 10_000 or kit.metric
                               else f"{self.capacity_ml} mL") if capacity else "",
            "charge_typed": self.label(kit), "dip_tube": self.dip, "use": self.use, "owner": self.owner, "alloy": self.alloy,
            "note": self.note,
            "permit": self.permit, "permit_lists": self.permit_lists, "permit_days": self.permit_days,
            "own_limit_g": self.own_limit_g, "last_held": self.last_held, "race_grade": self.race_grade,
            "disc": "" if self.use == "supply" else "3000 psi" if not kit.metric else "207 bar",
            "outlet": "CGA 326" if self.use == "supply" and not kit.metric else "",
            "parts": self.parts(kit) if self.tare else [], "stamps": stamps, "confirmed": list(self.confirmed),
        }  # fmt: skip


def made_up_serial(code: str) -> str:
    """Return a serial number that follows from the code and from nothing else."""
    number = zlib.crc32(code.encode("ascii"))
    return f"{'ABDEHKNR'[number % 8]}{100_000 + number // 8 % 900_000}"
