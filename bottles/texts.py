"""What an act on a bottle says in its history."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

Changes = dict[str, Any]

SENTENCES: dict[str, str] = {
    "bottle.registered": "registered it",
    "bottle.changed": "changed what is written of it",
    "bottle.tare started": "started a new tare",
    "bottle.stamp recorded": "recorded a stamp",
    "bottle.stamp struck": "struck a stamp that was read wrongly",
    "bottle.owner changed": "changed its owner",
    "bottle.condition noted": "noted that something is wrong with it",
    "bottle.condition ended": "ended what was wrong with it",
    "bottle.condemned": "condemned it",
    "bottle.retired": "took it out of the register for good",
    "bottle.checked in": "checked it in",
    "bottle.moved": "moved it",
    "bottle.wanted": "changed what it waits for",
    "bottle.handed over": "handed it over",
    "bottle.weighed": "weighed it",
    "bottle.used": "recorded what was used",
    "bottle.vented": "recorded what was vented",
    "bottle.delivered": "recorded a delivery",
    "bottle.given back": "gave it back to the supplier",
    "weighing.struck": "struck a weighing that was mistyped",
    "movement.reversed": "reversed a movement of nitrous",
    "refill.refused": "was told that it isn't filled",
    "refill.opened": "opened a refill",
    "refill.weighed": "weighed it in a refill",
    "refill.waits": "let the refill wait",
    "refill.supply changed": "took another supply bottle",
    "refill.closed": "closed the refill",
}

FIELDS: dict[str, str] = {
    "serial": "serial number",
    "capacity_typed": "water capacity",
    "capacity_basis": "how the capacity is known",
    "charge_typed": "size",
    "below_tube_typed": "liquid below the dip tube's end",
    "dip_tube": "dip (siphon) tube",
    "disc": "safety disc",
    "race_grade": "race grade",
    "permit_until": "permit holds until",
    "permit_lists_nitrous": "the permit lists nitrous oxide",
    "permit_charge_g": "permit's largest charge in grams",
    "own_limit_g": "the shop's own limit in grams",
    "last_held": "what it last held",
}
DOUBLED = {"capacity_ml", "charge_g", "below_tube_ml"}  # told by what was typed
STAMPS = {"made": "made", "test": "test", "visual": "visual inspection", "disc": "safety disc", "end": "end of service life"}


def act_sentence(code: str, changes: Changes, *, mass: Callable[[int], str], condition: Callable[[str], str]) -> str:
    """Say what an act did; `mass` and `condition` write a weight and a condition in words."""
    sentence = SENTENCES.get(code, code.partition(".")[2] or code)
    details = _details(code, changes, mass, condition)
    return f"{sentence}: {details}" if details else sentence


def _details(code: str, changes: Changes, mass: Callable[[int], str], condition: Callable[[str], str]) -> str:
    if code == "bottle.changed":
        return "; ".join(
            f"{FIELDS.get(field, field.replace('_', ' '))} from {_said(change[0])} to {_said(change[1])}"
            for field, change in changes.items()
            if field not in DOUBLED and isinstance(change, list) and len(change) == 2
        )
    if code == "bottle.tare started" and "total_g" in changes:
        return mass(changes["total_g"])
    if code.startswith("bottle.stamp") and "date" in changes:
        return f"{STAMPS.get(changes.get('kind', ''), '')} {changes['date']}".strip()
    if code.startswith("bottle.condition") and "code" in changes:
        return condition(changes["code"])
    if code == "bottle.owner changed" and "kind" in changes:
        return {"shop": "the shop's", "customer": "a customer's", "supplier": "the supplier's"}.get(changes["kind"], "")
    return ""


def _said(value: Any) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return "nothing" if value in (None, "") else f"“{value}”"
