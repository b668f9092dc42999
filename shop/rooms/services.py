"""Writing what the shop is and what it decided: settings, policy, places."""

from __future__ import annotations

import uuid
from datetime import date
from typing import Any

from shop.base import acts
from shop.base.errors import Refusal
from shop.base.models import Place, Policy, Shop
from shop.people.models import User


def change_shop(*, person: User, key: uuid.UUID, shop: Shop, version: int, values: dict[str, Any]) -> None:
    """Change the shop's settings; raises Stale where someone else did meanwhile."""
    with acts.begin(
        key=key,
        person=person,
        code="shop.changed",
        subject="shop",
        changes=acts.changed(shop, values, secret=frozenset({"local_notice"})),
    ):
        acts.update_master(shop, version=version, values=values)


def decide_policy(
    *, person: User, key: uuid.UUID, effective_from: date, today: date, values: dict[str, Any], reason: str = ""
) -> Policy:
    """Decide what holds from a day on; what was judged before keeps the policy of its own day."""
    if effective_from < today:
        raise Refusal(
            "A policy can't begin in the past: what was decided then stands. Give today or a later day.",
            code="in the past", field="effective_from",
        )  # fmt: skip
    with acts.begin(key=key, person=person, code="policy.decided", subject="shop", reason=reason) as act:
        return Policy.objects.create(act=act, effective_from=effective_from, values=values)


COLDEST_MK, WARMEST_MK = 233_150, 313_150  # −40 and 40 °C
FREEZER_MK = 288_150  # 15 °C: no freezer that runs is warmer
DRY_ICE_MK = 213_150  # −60 °C: colder than any freezer for bottles
CHILLS = ("freezer", "bath")


def add_place(*, person: User, key: uuid.UUID, values: dict[str, Any]) -> Place:
    """Add a place where a bottle can stand; raises Refusal where its code is taken or its cold can't be."""
    _refuse_cold(values)
    new = Place(**values)
    new.clean_fields()
    with acts.begin(key=key, person=person, code="place.added", subject=f"place:{new.code}"):
        _refuse_taken(new.code)
        new.save(force_insert=True)
    return new


def change_place(*, person: User, key: uuid.UUID, place: Place, version: int, values: dict[str, Any]) -> None:
    """Change a place; its code stays, since acts and labels name it. Raises Refusal where its cold can't be."""
    _refuse_cold(values)
    with acts.begin(
        key=key, person=person, code="place.changed", subject=f"place:{place.code}", changes=acts.changed(place, values)
    ):
        acts.update_master(place, version=version, values=values)


def _refuse_cold(values: dict[str, Any]) -> None:
    """Refuse cold of a place that doesn't chill, and cold that no bottle is made for."""
    coldest, at_once = values.get("coldest_mk"), values.get("takes_at_once")
    odd = None
    if values.get("kind") not in CHILLS and (coldest is not None or at_once is not None):
        field = "coldest" if coldest is not None else "takes_at_once"
        odd = field, "Only a freezer or a bath chills bottles. Choose that kind, or leave this empty."
    elif coldest is not None and coldest < DRY_ICE_MK:
        odd = "coldest", (
            "That is the cold of dry ice. Valves, seals and safety discs aren't made for it, and a bottle filled so cold may be "
            "full of liquid before it's warm: chill in a freezer or in iced water."
        )
    elif coldest is not None and values.get("kind") == "freezer" and coldest > FREEZER_MK:
        odd = "coldest", "A freezer is colder than that: read a thermometer that stood in it. Check the figure and its unit."
    elif coldest is not None and not COLDEST_MK <= coldest <= WARMEST_MK:
        odd = "coldest", "A freezer or bath for bottles is between -40 and 40 °C. Check the figure and its unit."
    if odd:
        raise Refusal(odd[1], code="out of range", field=odd[0])


def _refuse_taken(code: str) -> None:
    if Place.objects.filter(code__iexact=code).exists():
        raise Refusal(f"There is a place “{code}” already. Take another code.", code="place taken", field="code")
