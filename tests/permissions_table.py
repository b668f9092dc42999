"""Who may open which page: every named address, once. Add a row when you add a page.

A row: the address's name, who may open it, and where it needs them the arguments of its address
out of the small world that `World` lays. `OPEN` needs no sign-in. `get` is what the right person
gets: 200 a page, 302 on to another, 405 where it only takes forms. `query` is added to the address.
A row whose answer isn't a page of HTML (a file, a part of a page) says so with html=False.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from shop.base.models import Job
from shop.base.permissions import BENCH, DESK, EVERYONE, MANAGERS, Role
from tests import factories

OPEN = None


class World:
    """One of each thing that a page's address can name. Needs the shop. Add what your page needs."""

    def __init__(self) -> None:
        self.person = factories.UserFactory(name="Ines Aldermoor")
        self.customer = factories.CustomerFactory(name="Ostrander", phone="555 0100")
        self.consent = factories.ConsentFactory(customer=self.customer)
        self.car = factories.CarFactory(number="27", customer=self.customer)
        self.place = factories.PlaceFactory(code="SHELF", limit_g=20_000)
        self.bottle = factories.BottleFactory(code="T-0412", serial="88213")
        factories.owned(self.bottle, self.customer)
        factories.placed(self.bottle, "in", place=self.place)
        self.stamp = factories.StampFactory(bottle=self.bottle)
        self.condition = factories.ConditionFactory(bottle=self.bottle)
        self.fitted = factories.placed(factories.BottleFactory(code="T-0413"), "car", car=self.car)
        self.weighing = factories.weighed(self.fitted, gross_g=10_940, tare_g=6_420)
        self.movement = factories.delivered(self.fitted, grams=4_520)
        self.job = Job.objects.create(kind="ledger.check", key="2026-03-02")
        self.supply = factories.SupplyFactory()
        self.refill = factories.RefillFactory(station=self.supply.station, source=self.supply.bottle)


@dataclass(frozen=True)
class Page:
    """One row."""

    name: str
    roles: frozenset[Role] | None
    args: Callable[[World], dict[str, Any]] = lambda world: {}
    get: int = 200
    query: str = ""
    html: bool = True


def _of_person(world: World) -> dict[str, Any]:
    return {"pk": world.person.pk}


def _of_customer(world: World) -> dict[str, Any]:
    return {"pk": world.customer.pk}


def _of_car(world: World) -> dict[str, Any]:
    return {"pk": world.car.pk}


def _of_bottle(world: World) -> dict[str, Any]:
    return {"code": world.bottle.code}


PEOPLE = [
    Page("healthz", OPEN, html=False),
    Page("people:sign_in", OPEN),
    Page("people:sign_out", OPEN, get=405),
    Page("people:me", EVERYONE),
    Page("people:own_units", EVERYONE),
    Page("people:own_password", EVERYONE),
    Page("people:own_code", EVERYONE),
    Page("people:people", MANAGERS),
    Page("people:person_new", MANAGERS),
    Page("people:person", MANAGERS, _of_person),
    Page("people:person_password", MANAGERS, _of_person),
    Page("people:person_badge", MANAGERS, _of_person),
    Page("people:person_code", MANAGERS, _of_person),
    Page("people:customers", EVERYONE),
    Page("people:customer_new", DESK),
    Page("people:customer_change", DESK, _of_customer),
    Page("people:consent_new", DESK, _of_customer),
]

CARS = [
    Page("cars:cars", EVERYONE),
    Page("cars:car_new", EVERYONE),
    Page("cars:car_change", EVERYONE, _of_car),
]

ROOMS = [
    Page("rooms:home", EVERYONE, get=302),
    Page("rooms:counter", EVERYONE),
    Page("rooms:bay", BENCH),
    Page("rooms:office", MANAGERS),
    Page("rooms:find", EVERYONE, query="q=T-04"),
    Page("rooms:matches", EVERYONE, query="q=T-04", html=False),
    Page("rooms:customer", EVERYONE, _of_customer),
    Page("rooms:car", EVERYONE, _of_car),
    Page("rooms:settings", MANAGERS),
    Page("rooms:settings_change", MANAGERS),
    Page("rooms:policies", MANAGERS),
    Page("rooms:policy_new", MANAGERS),
    Page("rooms:places", MANAGERS),
    Page("rooms:place_new", MANAGERS),
    Page("rooms:jobs", MANAGERS),
    Page("rooms:job", EVERYONE, lambda world: {"pk": world.job.pk}),
    Page("rooms:job_cancel", EVERYONE, lambda world: {"pk": world.job.pk}, get=405),
    Page("rooms:check_books", MANAGERS),
    Page("rooms:place", MANAGERS, lambda world: {"pk": world.place.pk}),
]

REGISTER = [
    Page("bottles:bottles", EVERYONE),
    Page("bottles:register", EVERYONE),
    Page("bottles:bottle", EVERYONE, _of_bottle),
    Page("bottles:history", EVERYONE, _of_bottle),
    Page("bottles:edit", EVERYONE, _of_bottle),
    Page("bottles:tare", EVERYONE, _of_bottle),
    Page("bottles:stamps", EVERYONE, _of_bottle),
    Page("bottles:strike_stamp", EVERYONE, lambda world: {"code": world.bottle.code, "pk": world.stamp.pk}),
    Page("bottles:owner", DESK, _of_bottle),
    Page("bottles:condition", EVERYONE, _of_bottle),
    Page("bottles:end_condition", BENCH, lambda world: {"code": world.bottle.code, "pk": world.condition.pk}),
    Page("bottles:check_in", EVERYONE, _of_bottle),
    Page("bottles:move", EVERYONE, _of_bottle),
    Page("bottles:wanted", EVERYONE, _of_bottle),
    Page("bottles:hand_over", EVERYONE, _of_bottle),
    Page("bottles:condemn", MANAGERS, _of_bottle),
    Page("bottles:retire", MANAGERS, _of_bottle),
]

REFILLS = [
    Page("bottles:stations", EVERYONE),
    Page("bottles:station_add", MANAGERS),
    Page("bottles:station", MANAGERS, lambda world: {"pk": world.supply.station.pk}),
    Page("bottles:connect", EVERYONE, lambda world: {"pk": world.supply.station.pk}),
    Page("bottles:disconnect", EVERYONE, lambda world: {"pk": world.supply.pk}),
    Page("bottles:fill", EVERYONE, _of_bottle),
    Page("bottles:forecast_live", EVERYONE, _of_bottle, html=False),
    Page("bottles:course_live", EVERYONE, _of_bottle, html=False),
    Page("bottles:joined", EVERYONE, _of_bottle),
    Page("bottles:plan", DESK),
    Page("bottles:plan_new", DESK),
    Page("bottles:refills", EVERYONE),
    Page("bottles:refill", EVERYONE, lambda world: {"pk": world.refill.pk}),
    Page("bottles:refill_wait", EVERYONE, lambda world: {"pk": world.refill.pk}),
    Page("bottles:refill_supply", EVERYONE, lambda world: {"pk": world.refill.pk}),
    Page("bottles:refill_close", EVERYONE, lambda world: {"pk": world.refill.pk}),
    Page("bottles:learning", EVERYONE),
    Page("bottles:receipt", EVERYONE, lambda world: {"pk": world.refill.pk}),
]

BOOKS = [
    Page("bottles:weigh", EVERYONE, _of_bottle),
    Page("bottles:strike_weighing", EVERYONE, lambda world: {"pk": world.weighing.pk}),
    Page("bottles:deliver", EVERYONE, _of_bottle),
    Page("bottles:give_back", EVERYONE, _of_bottle),
    Page("bottles:use", EVERYONE, _of_bottle),
    Page("bottles:vent", EVERYONE, _of_bottle),
    Page("bottles:scales", EVERYONE),
    Page("bottles:scale_add", MANAGERS),
    Page("bottles:scale_change", MANAGERS, lambda world: {"pk": world.weighing.scale_id}),
    Page("bottles:scale_check", EVERYONE, lambda world: {"pk": world.weighing.scale_id}),
    Page("bottles:balance", MANAGERS),
    Page("bottles:movement", MANAGERS, lambda world: {"pk": world.movement.pk}),
    Page("bottles:reverse_movement", MANAGERS, lambda world: {"pk": world.movement.pk}),
    Page("bottles:stock_take", EVERYONE),
    Page("bottles:leaks", EVERYONE, query="leak=10 g"),
]

TABLE: list[Page] = [*PEOPLE, *CARS, *ROOMS, *REGISTER, *BOOKS, *REFILLS]
