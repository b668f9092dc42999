"""Who works in the invented shop, and how they first sign in."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from dataclasses import dataclass
from datetime import date
from zoneinfo import ZoneInfo

from shop.base import clock
from shop.base.founding import new_password
from shop.base.models import Shop
from shop.base.permissions import ROLE_WORDS, Role
from shop.demo.days import founding
from shop.demo.kit import kit_for
from shop.people.models import User
from shop.people.services import add_person, found_shop, set_code, set_password
from shop.people.services.founding import sign_in_name

SHOP_NAME = "Ardenbeck Race Works"


@dataclass(frozen=True, slots=True)
class Worker:
    """Someone who signs in; the short code only says who acts on a page that is open already."""

    name: str
    roles: tuple[Role, ...]
    code: str

    @property
    def sign_in(self) -> str:
        """The name to sign in with."""
        return sign_in_name(self.name)

    @property
    def role_words(self) -> str:
        """The roles in words."""
        return " and ".join(ROLE_WORDS[role] for role in self.roles)


DESK = Worker("Nadia Okonvela", (Role.FRONT_DESK,), "4071")
BENCH = Worker("Tomasz Brzezak", (Role.TECHNICIAN,), "5528")
BOSS = Worker("Grace Lindstrand", (Role.MANAGER,), "9163")
BOTH = Worker("Ravi Castellane", (Role.FRONT_DESK, Role.TECHNICIAN), "3846")
DEPUTY = Worker("Inez Haldor", (Role.TECHNICIAN, Role.MANAGER), "7290")
WORKERS = (DESK, BENCH, BOSS, BOTH, DEPUTY)


def demo_people(
    *,
    country: str = "US",
    units: str = "",
    time_zone: str = "",
    height_m: int | None = None,
    today: date | None = None,
    password: Callable[[], str] = new_password,
) -> list[tuple[str, str, str]]:
    """Found the invented shop with the people who work in it.

    Returns their roles in words, sign-in names and passwords. The shop comes last: cut off before
    it, the next start finds no shop and goes through this again, giving new passwords.
    """
    kit = kit_for(country)
    zone_name = time_zone or kit.time_zone
    zone = ZoneInfo(zone_name)
    found = []
    with clock.pretend(founding(today or clock.now().astimezone(zone).date(), zone)):
        for worker in WORKERS:
            secret = password()
            if worker is not BOSS:
                _let_in(worker, secret)
            found.append((worker, secret))
        _, boss = found_shop(
            name=SHOP_NAME, country=country, units=units or kit.units, time_zone=zone_name,
            height_m=kit.height_m if height_m is None else height_m, manager_name=BOSS.name,
            manager_password=next(secret for worker, secret in found if worker is BOSS),
        )  # fmt: skip
        set_code(person=boss, key=uuid.uuid4(), who=boss, code=BOSS.code)
    return [(worker.role_words, worker.sign_in, secret) for worker, secret in found]


def the_shop_is_ours() -> bool:
    """Whether this database holds the invented shop."""
    return Shop.objects.filter(name=SHOP_NAME).exists()


def _let_in(worker: Worker, secret: str) -> None:
    someone = User.objects.filter(sign_in_name=worker.sign_in).first()
    if someone is None:
        someone = add_person(
            person=None, key=uuid.uuid4(), name=worker.name, sign_in=worker.sign_in, roles=worker.roles, password=secret,  # type: ignore[arg-type]
        )
    else:
        set_password(person=None, key=uuid.uuid4(), who=someone, password=secret)  # type: ignore[arg-type]
    set_code(person=None, key=uuid.uuid4(), who=someone, code=worker.code)  # type: ignore[arg-type]
