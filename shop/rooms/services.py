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


def add_place(*, person: User, key: uuid.UUID, values: dict[str, Any]) -> Place:
    """Add a place where a bottle can stand; raises Refusal where its code is taken."""
    new = Place(**values)
    new.clean_fields()
    with acts.begin(key=key, person=person, code="place.added", subject=f"place:{new.code}"):
        _refuse_taken(new.code)
        new.save(force_insert=True)
    return new


def change_place(*, person: User, key: uuid.UUID, place: Place, version: int, values: dict[str, Any]) -> None:
    """Change a place; its code stays, since acts and labels name it."""
    with acts.begin(
        key=key, person=person, code="place.changed", subject=f"place:{place.code}", changes=acts.changed(place, values)
    ):
        acts.update_master(place, version=version, values=values)


def _refuse_taken(code: str) -> None:
    if Place.objects.filter(code__iexact=code).exists():
        raise Refusal(f"There is a place “{code}” already. Take another code.", code="place taken", field="code")
