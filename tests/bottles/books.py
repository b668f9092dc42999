"""A small shop to weigh in: a scale, bottles of each owner, and the sums of its books."""

from __future__ import annotations

import uuid
from datetime import UTC, datetime, timedelta

from django.db.models import Sum

from bottles.models import Account, Bottle, Custody, Line, Ownership, Scale, Tare
from bottles.selectors.history import history_of
from bottles.services import weighing
from bottles.services.standing import restate
from shop.base.models import Act, Place
from shop.people.models import Customer
from shop.physics.units import Entry, parse_mass

START = datetime(2026, 3, 2, 8, 0, tzinfo=UTC)
TARE_G = 6_420
TARE_ERROR_G = 10
SCALE_ERROR_G = 20
SCALE_STEP_G = 10
# √(20² + 5²) = 20.6 → 21; √(21² + 10²) = 23.3 → 24
NET_ERROR_G = 24


def key() -> uuid.UUID:
    return uuid.uuid4()


def after(hours: float) -> datetime:
    return START + timedelta(hours=hours)


def entry(text: str, unit: str = "kg") -> Entry:
    return parse_mass(text, default_unit=unit)


def grams(value: int) -> Entry:
    return parse_mass(f"{value} g", default_unit="kg")


def act(code: str = "test") -> Act:
    return Act.objects.create(key=key(), code=code, subject="test")


def scale(code: str = "B", **changes: object) -> Scale:
    values = {
        "code": code, "name": f"scale {code}", "resolution_g": SCALE_STEP_G, "resolution_typed": "10 g",
        "error_g": SCALE_ERROR_G, "error_typed": "20 g", "capacity_g": 60_000, "capacity_typed": "60 kg", "style": "kg",
    }  # fmt: skip
    return Scale.objects.create(**values | changes)


def place(code: str = "C") -> Place:
    return Place.objects.get_or_create(code=code, defaults={"name": "Counter", "kind": "counter"})[0]


def bottle(
    code: str = "T-0001", *, owner: str = "customer", is_in: bool = True, tare: bool = True, capacity_ml: int = 6_800
) -> Bottle:
    row = act()
    made = Bottle.objects.create(code=code, capacity_ml=capacity_ml, capacity_basis="stamped", act=row, serial=code)
    customer = Customer.objects.create(name=f"Owner of {code}") if owner == "customer" else None
    Ownership.objects.create(act=row, bottle=made, kind=owner, customer=customer, since=(START - timedelta(days=30)).date())
    if tare:
        Tare.objects.create(
            act=row, bottle=made, since=START - timedelta(days=30), total_g=TARE_G, error_g=TARE_ERROR_G, basis="weighed"
        )
    if is_in:
        come_in(made, START - timedelta(days=1))
    restate(made)
    return made


def come_in(made: Bottle, at: datetime) -> None:
    Custody.objects.create(act=act(), bottle=made, kind="in", place=place(), with_whom="x", happened_at=at)
    restate(made)


def go_out(made: Bottle, at: datetime, kind: str = "out", car: object = None) -> None:
    Custody.objects.create(act=act(), bottle=made, kind=kind, with_whom="x", happened_at=at, car=car)
    restate(made)


def weigh(made: Bottle, on: Scale, net_g: int, at: datetime, **more: object) -> object:
    """Weigh a bottle that holds so much, on the tare that all of these have."""
    return weighing.weigh(key=key(), person=None, bottle=made, scale=on, gross=grams(TARE_G + net_g), happened_at=at, **more)


def holds(made: Bottle) -> int:
    """What the books say is in a bottle now."""
    found = Account.objects.filter(bottle=made).first()
    return found.balance_g if found else 0


def balance(kind: str) -> int:
    """The balance of all accounts of a kind."""
    return Account.objects.filter(kind=kind).aggregate(all=Sum("balance_g"))["all"] or 0


def check_books() -> None:
    """Every balance equals its lines, everything sums to zero, no bottle is ever below nothing."""
    total = 0
    for account in Account.objects.all():
        came = Line.objects.filter(target=account).aggregate(all=Sum("grams"))["all"] or 0
        went = Line.objects.filter(source=account).aggregate(all=Sum("grams"))["all"] or 0
        assert account.balance_g == came - went, account
        total += account.balance_g
        if account.bottle:
            assert account.balance_g >= 0
            history = history_of(account.bottle)
            if history.changes:
                assert history.lowest((START - timedelta(days=9999), 0)) >= 0, account
                assert history.level_at((START + timedelta(days=9999), 0)) == account.balance_g
    assert total == 0
