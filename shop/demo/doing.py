"""Do the steps: each through the service that a page would call, the clock standing at its time.

A step whose act is there was done: it's passed by. So the work goes on wherever it was cut off.
"""

from __future__ import annotations

import uuid
from collections.abc import Callable, Iterable, Iterator
from contextlib import suppress
from dataclasses import dataclass, field
from datetime import datetime
from typing import Any

from bottles.models import Bottle, Scale
from bottles.selectors.judging import judge_bottle
from shop.base import clock
from shop.base.errors import AlreadyDone
from shop.base.models import Act, Place, Shop
from shop.cars.models import Car
from shop.demo.steps import Step
from shop.people.models import Customer, User
from shop.physics.units import Entry, parse_mass


@dataclass
class Doer:
    """What doing needs at hand: the shop, who is who, and which key a step's act has."""

    shop: Shop
    key_of: Callable[[str], uuid.UUID]
    people: dict[str, User] = field(default_factory=dict)
    limits: dict[str, int | None] = field(default_factory=dict)  # of a bottle: no step changes one

    def person(self, sign_in: str) -> User:
        """Return who does a step."""
        if sign_in not in self.people:
            self.people[sign_in] = User.objects.get(sign_in_name=sign_in)
        return self.people[sign_in]

    def limit_g(self, bottle: Bottle) -> int | None:
        """Return a bottle's fill limit, judged once."""
        if bottle.code not in self.limits:
            self.limits[bottle.code] = judge_bottle(bottle, shop=self.shop).limit.grams
        return self.limits[bottle.code]

    def common(self, step: Step) -> dict[str, Any]:
        """Return what every service takes."""
        return {"key": self.key_of(step.name), "person": self.person(step.by)}


Deed = Callable[[Doer, Step], object]
_deeds: dict[str, Deed] = {}


def deed(verb: str) -> Callable[[Deed], Deed]:
    """Register what does a verb."""

    def register(function: Deed) -> Deed:
        _deeds[verb] = function
        return function

    return register


def do_all(steps: Iterable[Step], *, shop: Shop, key_of: Callable[[str], uuid.UUID]) -> Iterator[Step]:
    """Do one step after the other and give each back once it's done, whoever did it."""
    # Deeds register themselves; they stand above this module, so they're named here alone.
    from shop.demo import deeds_books, deeds_refills, deeds_register  # noqa: F401

    done = set(Act.objects.values_list("key", flat=True))
    doer = Doer(shop, key_of)
    for step in steps:
        if key_of(step.name) not in done:
            # Where another worker was first, what it wrote holds.
            with clock.pretend(step.at), suppress(AlreadyDone):
                _deeds[step.verb](doer, step)
        yield step


def mass(text: str) -> Entry:
    """Read a weight that a step carries; its unit stands in it."""
    return parse_mass(text, default_unit="kg")


def bottle_of(step: Step, name: str = "bottle") -> Bottle:
    """Return the bottle that a step names."""
    return Bottle.objects.get(code=step.values[name])


def scale_of(step: Step) -> Scale:
    """Return the scale that a step names."""
    return Scale.objects.get(code=step.values["scale"])


def place_of(code: str) -> Place:
    """Return a place by its code."""
    return Place.objects.get(code=code)


def customer_of(name: str) -> Customer | None:
    """Return a customer by name; none for the shop's own."""
    return Customer.objects.get(name=name) if name else None


def car_of(pair: list[str]) -> Car | None:
    """Return a car by its number and class."""
    return Car.objects.get(number=pair[0], car_class=pair[1]) if pair else None


def instant(text: str) -> datetime | None:
    """Return a time that a step carries; none where it's empty."""
    return datetime.fromisoformat(text) if text else None
