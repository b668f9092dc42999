"""Things that tests stand on, each valid by itself: CustomerFactory(), BottleFactory(code="T-0412").

A fact needs an act; an act made here was the program's own.
"""

from __future__ import annotations

import uuid
from datetime import UTC, date, datetime
from typing import Any

import factory
from factory.django import DjangoModelFactory

from bottles.models import (
    Bottle,
    Condition,
    Custody,
    Decision,
    Draw,
    Movement,
    Ownership,
    Refill,
    Scale,
    Stamp,
    Station,
    Supply,
    Tare,
    Weighing,
)
from bottles.services.posting import Move, account_of, own_account, post
from bottles.services.standing import restate
from shop.base.models import Act, Place, Policy
from shop.cars.models import Car
from shop.people.models import Consent, Customer, User

THEN = datetime(2026, 3, 2, 15, 0, tzinfo=UTC)


class ActFactory(DjangoModelFactory):
    class Meta:
        model = Act

    key = factory.LazyFunction(uuid.uuid4)
    person = None
    code = "test.made"
    subject = "test"


class UserFactory(DjangoModelFactory):
    """A person without a usable password: sign them in with client_of."""

    class Meta:
        model = User

    sign_in_name = factory.Sequence(lambda n: f"person.{n}")
    name = factory.Sequence(lambda n: f"Person {n}")
    password = "!"
    is_front_desk = True


class CustomerFactory(DjangoModelFactory):
    class Meta:
        model = Customer

    name = factory.Sequence(lambda n: f"Customer {n}")


class ConsentFactory(DjangoModelFactory):
    class Meta:
        model = Consent

    act = factory.SubFactory(ActFactory)
    customer = factory.SubFactory(CustomerFactory)
    purpose = "fill"
    given = True
    on = date(2026, 3, 2)


class CarFactory(DjangoModelFactory):
    class Meta:
        model = Car

    number = factory.Sequence(lambda n: str(100 + n))
    car_class = "Sprint"
    customer = factory.SubFactory(CustomerFactory)


class PlaceFactory(DjangoModelFactory):
    class Meta:
        model = Place

    code = factory.Sequence(lambda n: f"P{n}")
    name = factory.Sequence(lambda n: f"shelf {n}")
    kind = "shelf"


class PolicyFactory(DjangoModelFactory):
    class Meta:
        model = Policy

    act = factory.SubFactory(ActFactory)
    effective_from = date(2026, 1, 1)
    values = factory.LazyFunction(dict)


class BottleFactory(DjangoModelFactory):
    """A registered bottle, nothing else known: give it an owner and a place with the functions below."""

    class Meta:
        model = Bottle

    code = factory.Sequence(lambda n: f"T-{1000 + n}")
    maker = "Invented Vessels"
    serial = factory.Sequence(lambda n: f"IV{n:05}")
    mark = "DOT-3AL1800"
    capacity_ml = 6800
    capacity_basis = "stamped"
    act = factory.SubFactory(ActFactory)


class ScaleFactory(DjangoModelFactory):
    class Meta:
        model = Scale

    code = factory.Sequence(lambda n: f"SC-{n}")
    name = factory.Sequence(lambda n: f"scale {n}")
    resolution_g = 10
    resolution_typed = "10 g"
    error_g = 20
    error_typed = "20 g"
    capacity_g = 60_000
    capacity_typed = "60 kg"


class StationFactory(DjangoModelFactory):
    class Meta:
        model = Station

    code = factory.Sequence(lambda n: f"ST{n}")
    name = factory.Sequence(lambda n: f"station {n}")
    scale = factory.SubFactory(ScaleFactory)
    hose_length_um = 1_500_000
    hose_length_typed = "1.5 m"
    hose_bore_um = 4_800
    hose_bore_typed = "4.8 mm"


class SupplyFactory(DjangoModelFactory):
    """A supply bottle on a station, weighed; give it what else a test asks for."""

    class Meta:
        model = Supply

    station = factory.SubFactory(StationFactory)

    @factory.lazy_attribute
    def bottle(self) -> Bottle:
        found = BottleFactory(use="supply", capacity_ml=29_000, wall="steel", dip_tube="dip", mark="DOT-3AA2015")
        owned(found)
        placed(found, "in")
        weighed(found, gross_g=48_500, tare_g=33_500)
        return found


class DecisionFactory(DjangoModelFactory):
    class Meta:
        model = Decision

    act = factory.SubFactory(ActFactory)
    bottle = factory.SubFactory(BottleFactory)
    on = date(2026, 3, 2)
    edition = "us-2026-01"
    edition_sha256 = "0" * 64
    inputs = factory.LazyFunction(dict)
    may_fill = "yes"
    may_empty = "yes"
    limit_g = 4_614
    binds = "filling density"
    reasons = factory.LazyFunction(list)


class RefillFactory(DjangoModelFactory):
    """An open refill with its first weighing and draw; say from what: source=bottle."""

    class Meta:
        model = Refill
    act = factory.SubFactory(ActFactory)
    decision = factory.SubFactory(DecisionFactory)
    bottle = factory.SelfAttribute("decision.bottle")
    station = factory.SubFactory(StationFactory)
    method = "pressure"
    limit_g = 4_614
    target_g = 4_614
    stop_at_g = 11_010
    opened_at = THEN

    @classmethod
    def _create(cls, model_class: Any, *args: Any, **kwargs: Any) -> Refill:
        source = kwargs.pop("source", None)  # not a column: what it draws on
        made: Refill = super()._create(model_class, *args, **kwargs)
        tare = Tare.objects.create(act=made.act, bottle=made.bottle, since=THEN, total_g=6_420, error_g=10, basis="weighed")
        Weighing.objects.create(
            act=made.act, bottle=made.bottle, scale=made.station.scale, tare=tare, step="before", gross_g=6_720, typed="6720 g",
            net_g=300, error_g=24, happened_at=THEN,
        )  # fmt: skip
        restate(made.bottle)
        Draw.objects.create(act=made.act, refill=made, source=source or BottleFactory(use="supply"), happened_at=THEN)
        return made


class StampFactory(DjangoModelFactory):
    class Meta:
        model = Stamp

    act = factory.SubFactory(ActFactory)
    bottle = factory.SubFactory(BottleFactory)
    kind = "test"
    year = 2024
    month = 6
    typed = "06/2024"


class ConditionFactory(DjangoModelFactory):
    class Meta:
        model = Condition

    act = factory.SubFactory(ActFactory)
    bottle = factory.SubFactory(BottleFactory)
    code = "dent"
    seen_on = date(2026, 3, 2)


def owned(bottle: Bottle, customer: Customer | None = None, *, supplier: str = "") -> Bottle:
    """Say whose the bottle is: a customer's, a supplier's, else the shop's."""
    kind = "customer" if customer else "supplier" if supplier else "shop"
    Ownership.objects.create(
        act=ActFactory(), bottle=bottle, kind=kind, customer=customer, supplier=supplier, since=date(2026, 1, 1)
    )
    restate(bottle)
    return bottle


def placed(bottle: Bottle, kind: str = "in", **where: Any) -> Bottle:
    """Say where the bottle is: placed(bottle, "in", place=shelf), placed(bottle, "car", car=car)."""
    if kind in Custody.INSIDE and "place" not in where:
        where["place"] = PlaceFactory()
    Custody.objects.create(act=ActFactory(), bottle=bottle, kind=kind, **{"happened_at": THEN} | where)
    restate(bottle)
    return bottle


def weighed(bottle: Bottle, *, gross_g: int, tare_g: int, error_g: int = 28, scale: Scale | None = None) -> Weighing:
    """Say what a scale said of the bottle, with a tare of its own."""
    tare = Tare.objects.create(act=ActFactory(), bottle=bottle, since=THEN, total_g=tare_g, error_g=10, basis="weighed")
    found = Weighing.objects.create(
        act=ActFactory(), bottle=bottle, scale=scale or ScaleFactory(), tare=tare, step="arrival", gross_g=gross_g,
        typed=f"{gross_g} g", net_g=gross_g - tare_g, error_g=error_g, happened_at=THEN,
    )  # fmt: skip
    restate(bottle)
    return found


def delivered(bottle: Bottle, *, grams: int) -> Movement:
    """Post so much from the supplier into the bottle."""
    moves = [Move(own_account("supplier"), account_of(bottle), grams, "entered")]
    made = post(act=ActFactory(), kind="delivery", happened_at=THEN, moves=moves)
    assert made is not None
    return made
