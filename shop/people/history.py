"""Who did what to a thing, and when: the acts that name it, in words."""

from __future__ import annotations

from typing import Any

from shop.base import clock
from shop.base.models import Act, Shop
from shop.people.models import User

SHOWN = 50

WORDS = {
    "shop.founded": "founded the shop",
    "shop.changed": "changed the shop's settings",
    "policy.decided": "decided a policy",
    "place.added": "added a place",
    "place.changed": "changed the place",
    "person.added": "added a person",
    "person.changed": "changed the person",
    "person.password set": "set the password",
    "person.badge set": "gave a badge",
    "person.badge taken": "took the badge away",
    "person.code set": "set the short code",
    "person.code taken": "took the short code away",
    "person.units": "chose the units",
    "customer.added": "added a customer",
    "customer.changed": "changed the customer",
    "consent.given": "wrote down a consent",
    "consent.withdrawn": "wrote down that a consent was withdrawn",
    "car.added": "added a car",
    "car.changed": "changed the car",
}
FIELDS = {
    "name": "name", "sign_in_name": "sign-in name", "is_active": "may sign in", "is_front_desk": "front desk",
    "is_technician": "technician", "is_manager": "manager", "email": "e-mail", "phone": "phone", "note": "note",
    "car_class": "class", "customer_id": "owner", "public_address": "public address", "time_zone": "time zone",
    "height_m": "height above sea", "local_notice": "local notice", "limit_g": "limit",
    "coldest_typed": "how cold it gets", "takes_at_once": "bottles at once",
}  # fmt: skip


def history_of(subject: str, *, shop: Shop | None = None) -> list[dict[str, Any]]:
    """Return the latest acts on a thing as _history.html takes them, newest first."""
    zone = clock.zone(shop)
    acts = Act.objects.filter(subject=subject).order_by("-id")[:SHOWN]
    names = dict(User.objects.filter(pk__in={act.person_id for act in acts if act.person_id}).values_list("pk", "name"))
    return [
        {
            "recorded_at": act.recorded_at,
            "when": act.recorded_at.astimezone(zone).strftime("%Y-%m-%d %H:%M"),
            "person": names.get(act.person_id or 0, ""),
            "sentence": WORDS.get(act.code, act.code.replace(".", " ")) + _changes(act.changes),
            "reason": act.reason,
        }
        for act in acts
    ]


def _changes(changes: dict[str, Any]) -> str:
    """Say what changed, by the values that the act holds (names and addresses it doesn't hold)."""
    parts = []
    for field, change in changes.items():
        if field == "coldest_mk":  # told by what was typed
            continue
        word = FIELDS.get(field, field.replace("_", " "))
        if field == "customer":  # an act holds no names
            parts.append("owner")
        elif isinstance(change, list) and len(change) == 2 and not isinstance(change[0], list | dict):
            parts.append(f"{word} from {_said(change[0])} to {_said(change[1])}")
        elif change == "changed":
            parts.append(word)
    return ": " + "; ".join(parts) if parts else ""


def _said(value: Any) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return "nothing" if value in (None, "") else f"“{value}”"
