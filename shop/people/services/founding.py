"""Found the shop: its one row, its first policy, its first manager."""

from __future__ import annotations

import uuid
from typing import Any
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from shop.base import acts, clock
from shop.base.errors import Refusal
from shop.base.models import Policy, Shop
from shop.people.models import User

# The country's rules alone: nothing of the shop's own yet. The keys are those of the rules' Policy.
FIRST_POLICY: dict[str, Any] = {
    "month_rule": None,
    "visual_interval_months": None,
    "disc_interval_months": None,
    "own_limit_per_mille": None,
    "overlays": [],
}


def found_shop(
    *,
    name: str,
    country: str,
    units: str,
    time_zone: str,
    height_m: int,
    manager_name: str,
    manager_password: str,
    authority: str = "",
) -> tuple[Shop, User]:
    """Make the shop and its first manager; raise Refusal where there is a shop already."""
    try:
        ZoneInfo(time_zone)
    except (ZoneInfoNotFoundError, ValueError):
        raise Refusal(
            f"“{time_zone}” isn't a time zone. Write one like America/Denver or Europe/London.", code="time zone", field="time_zone"
        ) from None
    shop = Shop(
        id=1, name=name, country=country, authority=authority, units=units, time_zone=time_zone, height_m=height_m,
        paper="letter" if country in ("US", "CA") else "a4",
    )
    shop.full_clean()
    manager = User(sign_in_name=sign_in_name(manager_name), name=manager_name, is_manager=True)
    manager.set_password(manager_password)
    manager.full_clean()
    with acts.begin(key=uuid.uuid4(), person=None, code="shop.founded", subject="shop") as act:
        if Shop.objects.exists():
            raise Refusal("There is a shop in this database already. One database is one shop.", code="shop exists")
        shop.save(force_insert=True)
        manager.save(force_insert=True)
        Policy.objects.create(act=act, effective_from=clock.today(shop), values=FIRST_POLICY)
    return shop, manager


def sign_in_name(name: str) -> str:
    """Return the name to sign in with that follows from a person's name."""
    return ".".join(name.split()).casefold()[:60]
