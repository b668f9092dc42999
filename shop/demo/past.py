"""Write the invented past as steps, while keeping what is really in each bottle.

The books only ever see what a scale shows or a person types; the truth stays here. Each method is
one thing that somebody does; the clock moves on by what it takes.
"""

from __future__ import annotations

import random
from dataclasses import dataclass, field
from datetime import date, datetime, timedelta
from typing import Any

from shop.demo.cylinders import Spec
from shop.demo.days import Days
from shop.demo.kit import Kit
from shop.demo.people import BENCH, DESK
from shop.demo.premises import scales_of, stations_of
from shop.demo.steps import Step
from shop.physics.units import parse_mass

TARE_OFF_G = 7  # by so much at most a true tare differs from its list


@dataclass
class Past:
    """The steps so far, and the truth behind them."""

    kit: Kit
    days: Days
    topic: str
    seed: int
    now: datetime = field(init=False)
    steps: list[Step] = field(default_factory=list)
    specs: dict[str, Spec] = field(default_factory=dict)
    net_g: dict[str, float] = field(default_factory=dict)  # what is really inside
    known: set[str] = field(default_factory=set)  # customers who are in the book
    _number: int = 0

    def __post_init__(self) -> None:
        """Seed everything by the day, so that one day always tells one story."""
        self.rng = random.Random(f"{self.seed} {self.days.today.isoformat()} {self.topic}")
        self.scales = scales_of(self.kit)
        self.stations = stations_of(self.kit)
        self.off_g: dict[str, float] = {}
        self.now = self.days.at(self.days.first, "08:00")

    def drain(self) -> list[Step]:
        """Hand over the steps written since the last time."""
        done, self.steps = self.steps, []
        return done

    def on(self, day: date, clock: str) -> Past:
        """Set the clock."""
        self.now = self.days.at(day, clock)
        return self

    def ago(self, days: int, clock: str) -> Past:
        """Set the clock to a time of a day counted back from today."""
        return self.on(self.days.ago(days), clock)

    def later(self, minutes: int) -> Past:
        """Let time pass."""
        self.now += timedelta(minutes=minutes)
        return self

    def write(self, verb: str, *, by: str = "", **values: Any) -> Step:
        """Write a step at the clock's time."""
        self._number += 1
        what = values.get("bottle") or values.get("code") or values.get("name") or ""
        step = Step(f"{self.topic} {self._number:05d} {verb} {what}".strip(), verb, self.now, by or BENCH.sign_in, values)
        self.steps.append(step)
        return step

    def register(self, spec: Spec, *, net_g: float = 0.0, by: str = "") -> None:
        """Write a bottle into the register; what it really holds is known here alone."""
        self.specs[spec.code] = spec
        self.net_g[spec.code] = net_g
        self.off_g[spec.code] = self.rng.uniform(-TARE_OFF_G, TARE_OFF_G)
        values = dict(spec.values(self.kit, self.days.month))
        left = values.pop("permit_days")
        values["permit_until"] = "" if left is None else self.days.ago(-left).isoformat()
        self.write("bottle.register", by=by or DESK.sign_in, **values)

    def tare_g(self, code: str) -> int:
        """The tare by its list, as it's stored."""
        return sum(parse_mass(text, default_unit="kg").stored for _, text in self.specs[code].parts(self.kit))

    def gross_g(self, code: str) -> float:
        """What the bottle really weighs, everything on."""
        return self.tare_g(code) + self.off_g[code] + self.net_g[code]

    def reading(self, code: str, scale: str, extra_g: float = 0.0) -> str:
        """What a scale shows of it."""
        return self.scales[scale].reads(self.gross_g(code) + extra_g, self.rng)

    def check_in(
        self, code: str, *, brought_by: str, place: str = "COUNTER", wanted: str = "", promised: datetime | None = None
    ) -> None:
        """Take a bottle in."""
        self.write(
            "custody.in", by=DESK.sign_in, bottle=code, place=place, brought_by=brought_by, wanted=wanted,
            promised=promised.isoformat() if promised else "",
        )  # fmt: skip

    def move(self, code: str, place: str) -> None:
        """Put it at another place."""
        self.write("custody.move", bottle=code, place=place)

    def hand_over(
        self, code: str, *, to: str, kind: str = "out", car: tuple[str, str] | None = None, limit_g: int | None = None
    ) -> None:
        """Give it out."""
        self.write("custody.out", by=DESK.sign_in, bottle=code, kind=kind, to=to, car=list(car or ()), limit_g=limit_g)

    def weigh(
        self, code: str, scale: str = "BENCH-1", *, step: str = "arrival", reason: str = "", if_asked: str = "",
        gross: str = "",
    ) -> Step:  # fmt: skip
        """Put it on a scale; `if_asked` is what is answered where the books ask for a reason."""
        return self.write(
            "weigh", bottle=code, scale=scale, gross=gross or self.reading(code, scale), step=step, reason=reason,
            if_asked=if_asked,
        )  # fmt: skip
