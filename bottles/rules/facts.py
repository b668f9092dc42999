"""What is known of a bottle when it is judged; None is unknown, never a no and never a yes.

A fact that nobody gave is listed as not judged and asked for. It never turns into a
permission: a bottle nobody weighed isn't empty, an owner nobody asked hasn't agreed.
"""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from bottles.rules.conditions import makes_due_at_once
from bottles.rules.history import History
from bottles.rules.marks import SpecMark
from bottles.rules.specifications import Wall
from bottles.rules.stamps import DateStamp
from shop.rules.month import Month
from shop.rules.origin import Origin

OwnerKind = Literal["shop", "customer", "supplier"]
Contents = Literal["nitrous oxide", "nothing yet", "other", "unknown"]


@dataclass(frozen=True, slots=True)
class Permit:
    """A special permit or certificate that a bottle is filled under."""

    lists_nitrous: bool | None = None
    expires: datetime.date | None = None
    charge_g: int | None = None
    interval_years: int | None = None


@dataclass(frozen=True, slots=True)
class Condition:
    """A condition noted and not yet ended; without its day it counts from the day asked."""

    code: str
    noted: datetime.date | None = None


@dataclass(frozen=True, slots=True)
class Facts:
    """Everything that a judgement rests on.

    ``contents`` is what the bottle last held ('nothing yet' for a new, clean one).
    ``pressure_kept`` is False for a bottle found open or without pressure.
    ``look_done`` means the filler's look for this very fill.
    ``charge_g`` is the stamped or labelled charge, ``own_limit_g`` the shop's own for this
    bottle; either may simply not exist, so their absence isn't asked for.
    """

    mark: SpecMark | None = None
    wall: Wall | None = None
    made: DateStamp | None = None
    tests: tuple[DateStamp, ...] | None = None
    star_kept: bool | None = None
    service_life_end: Month | None = None
    permit: Permit | None = None
    marks_legible: bool | None = None
    alloy_6351: bool | None = None

    capacity_ml: int | None = None
    capacity_basis: Origin = "entered"
    tare_known: bool | None = None
    charge_g: int | None = None
    charge_origin: Origin = "entered"
    own_limit_g: int | None = None

    net_g: int | None = None
    net_plus_minus_g: int = 0
    contents: Contents | None = None
    owner: OwnerKind | None = None
    consent: bool | None = None

    condemned: bool | None = None
    conditions: tuple[Condition, ...] | None = None
    pressure_kept: bool | None = None
    dried_and_purged: bool | None = None
    look_done: bool | None = None
    star_check_done: bool | None = None
    in_open_refill: bool | None = None
    visual: Month | None = None
    disc: Month | None = None

    def history(self, on: datetime.date) -> History:
        """Its dates, for the rules of requalification."""
        damage = [condition.noted or on for condition in self.conditions or () if makes_due_at_once(condition.code)]
        return History(
            made=self.made,
            tests=self.tests,
            star_kept=self.star_kept,
            service_life_end=self.service_life_end,
            permit_interval_years=self.permit.interval_years if self.permit else None,
            condition_noted=min(damage, default=None),
        )


def kept_form(facts: Facts) -> Mapping[str, object]:
    """The facts as plain data, to be kept beside the decision that rested on them."""
    form: dict[str, object] = {}
    for name in Facts.__dataclass_fields__:
        value = getattr(facts, name)
        if isinstance(value, SpecMark):
            value = value.typed
        elif isinstance(value, DateStamp):
            value = _stamp_form(value)
        elif isinstance(value, Permit):
            value = {
                "lists_nitrous": value.lists_nitrous,
                "expires": value.expires.isoformat() if value.expires else None,
                "charge_g": value.charge_g,
                "interval_years": value.interval_years,
            }
        elif name == "tests" and value is not None:
            value = [_stamp_form(stamp) for stamp in value]
        elif name == "conditions" and value is not None:
            value = [[each.code, each.noted.isoformat() if each.noted else None] for each in value]
        form[name] = value
    return form


def _stamp_form(stamp: DateStamp) -> dict[str, object]:
    """A stamp as understood: its typed text alone may lack the star that was ticked beside it."""
    return {
        "typed": stamp.typed, "year": stamp.year, "month": stamp.month, "star": stamp.star, "plus": stamp.plus,
        "letters": list(stamp.letters), "facility": stamp.facility,
    }  # fmt: skip
