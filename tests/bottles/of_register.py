"""Bottles for tests of the register: by the service, and as a person types them."""

from __future__ import annotations

import uuid
from datetime import date
from typing import Any

from bottles.models import Bottle
from bottles.rules.stamps import read_stamp
from bottles.services.owners import Owner
from bottles.services.registering import FirstFacts, Particulars, register_bottle
from bottles.services.stamps import SeenStamp
from bottles.services.tares import NewTare, Part
from shop.physics.units import parse_mass

# The five things off an invented bottle, and whose it is, as they are typed at the counter.
TYPED = {
    "serial": "88213",
    "mark": "DOT-3AL1800",
    "test_stamp": "06/2024",
    "tare": "14.2 lb",
    "capacity": "",
    "size": "10 lb",
    "owner": "shop",
    "use": "car",
    "code": "",
}


def form_data(**typed: Any) -> dict[str, Any]:
    """What a browser posts: the five things, changed where a test says so; each with a key of its own."""
    return {"form_key": str(uuid.uuid4())} | TYPED | typed


def bottle(person: Any = None, *, code: str = "", owner: Owner | None = None, **told: Any) -> Bottle:
    """Register a bottle that contradicts nothing."""
    tare = told.pop("tare", "14.2 lb")
    stamps = told.pop("stamps", {"test": "06/2024"})
    particulars = {
        "serial": "88213", "mark": "DOT-3AL1800", "capacity_ml": 6800, "capacity_basis": "stamped", "capacity_typed": "6.8 L",
    }  # fmt: skip
    return register_bottle(
        key=uuid.uuid4(),
        person=person,
        code=code,
        particulars=Particulars(**(particulars | told)),
        first=FirstFacts(
            owner=owner or Owner("shop"),
            tare=new_tare(bottle=tare) if tare else None,
            stamps=[seen(kind, typed) for kind, typed in stamps.items()],
        ),
    )


def new_tare(basis: str = "stamped", **weights: str) -> NewTare:
    """A list of things with their weights as typed."""
    return NewTare(
        parts=tuple(Part(thing, parse_mass(typed, default_unit="kg")) for thing, typed in weights.items()), basis=basis
    )


def seen(kind: str, typed: str, today: date = date(2030, 1, 1)) -> SeenStamp:
    """A stamp as read."""
    return SeenStamp(kind, read_stamp(typed, year_first=False, today=today))
