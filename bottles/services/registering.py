"""Register a bottle, and complete or correct what is written of it.

Guarantees:

- a bottle is registered whole (itself, its owner, its tare, its stamps) or not at all;
- a code is never used twice; where none is typed the next free one is taken as it's saved;
- the same maker, mark and serial number are one bottle, however they are capitalised;
- what can't be true is refused; what is unusual is taken once a person has confirmed it.
"""

from __future__ import annotations

import uuid
from collections.abc import Collection, Sequence
from dataclasses import asdict, dataclass, replace
from datetime import date, datetime
from typing import Any

from django.db import IntegrityError, transaction

from bottles.models import Bottle
from bottles.rules.facts import Facts
from bottles.rules.marks import read_mark
from bottles.rules.register import infer_capacity
from bottles.selectors.codes import as_code, is_code, next_code
from bottles.selectors.judging import rulebook
from bottles.selectors.twins import twins_of
from bottles.services.cleaning import clean
from bottles.services.contradictions import refuse_contradictions, unusual
from bottles.services.owners import Owner, write_owner
from bottles.services.refusals import BottleKnown, CodeTaken, locked
from bottles.services.stamps import SeenStamp, write_stamp
from bottles.services.standing import restate
from bottles.services.tares import NewTare, write_tare
from shop.base import acts, clock
from shop.base.errors import Refusal
from shop.base.models import Act, Shop
from shop.people.models import User

TRIES = 20  # of finding a free code, where several desks register at the same moment


@dataclass(frozen=True, slots=True)
class Particulars:
    """What is stamped or known of the vessel itself; empty where it's not known or not legible."""

    serial: str = ""
    mark: str = ""
    maker: str = ""
    capacity_ml: int | None = None
    capacity_basis: str = "unknown"
    capacity_typed: str = ""
    charge_g: int | None = None
    charge_typed: str = ""
    wall: str = "unknown"
    alloy: str = ""
    dip_tube: str = "unknown"
    below_tube_ml: int | None = None
    below_tube_typed: str = ""
    outlet: str = ""
    disc: str = ""
    use: str = "car"
    permit: str = ""
    permit_charge_g: int | None = None
    permit_until: date | None = None
    permit_lists_nitrous: bool | None = None
    own_limit_g: int | None = None
    last_held: str = ""
    race_grade: bool | None = None
    note: str = ""

    def tidy(self) -> Particulars:
        """The same with one space where there were several, as it's kept and compared."""
        return replace(
            self, serial=_one_space(self.serial), mark=_one_space(self.mark), maker=_one_space(self.maker),
            alloy=_one_space(self.alloy),
        )


@dataclass(frozen=True, slots=True)
class FirstFacts:
    """What is told of a bottle on the day it's registered, beside what is stamped on it."""

    owner: Owner
    tare: NewTare | None = None
    stamps: Sequence[SeenStamp] = ()
    since: datetime | None = None  # from when these hold; now, where none is given


def register_bottle(
    *,
    key: uuid.UUID,
    person: User | None,
    particulars: Particulars,
    first: FirstFacts,
    code: str = "",
    confirmed: Collection[str] = (),
) -> Bottle:
    """Write a bottle into the register with what is known of it so far.

    Raises BottleKnown, CodeTaken, Contradicted, Unconfirmed (with every warning; give the codes
    of those that hold as `confirmed`), Refusal.
    """
    code = as_code(code)
    if code and not is_code(code):
        raise Refusal(
            "A code is letters, digits and dashes, 20 at most, as a label carries them.", code="not a code", field="code"
        )
    particulars = _with_capacity(particulars.tidy())
    _refuse_below_tube(particulars)
    since = first.since or clock.now()
    # What an act is about stands in it from the start, so a code still to be found is found before.
    subject = code or next_code(particulars.use)
    for _ in range(TRIES):
        try:
            with acts.begin(key=key, person=person, code="bottle.registered", subject=f"bottle:{subject}") as act:
                bottle = _create(act, subject, particulars)
                write_owner(act=act, bottle=bottle, owner=first.owner, since=clock.day_of(since))
                if first.tare:
                    write_tare(act=act, bottle=bottle, tare=first.tare, since=since)
                for stamp in first.stamps:
                    write_stamp(act=act, bottle=bottle, stamp=stamp)
                refuse_contradictions(bottle, confirmed=confirmed)
                restate(bottle)
            return bottle
        except CodeTaken:
            if code:
                raise
            subject = next_code(particulars.use)
    raise CodeTaken("Others are registering bottles at this moment. Save again.", field="code")


def change_bottle(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    version: int,
    particulars: Particulars,
    confirmed: Collection[str] = (),
) -> None:
    """Complete or correct what is written of a bottle; its history keeps what stood before.

    Raises Stale where someone else saved since the form was drawn; Retired; else as registering.
    """
    particulars = _with_capacity(particulars.tidy())
    _refuse_below_tube(particulars)
    values: dict[str, Any] = asdict(particulars)
    with acts.begin(
        key=key, person=person, code="bottle.changed", subject=f"bottle:{bottle.code}", changes=acts.changed(bottle, values)
    ):
        bottle = locked(bottle)
        _refuse_known(particulars, but=bottle)
        before = unusual(bottle)
        acts.update_master(bottle, version=version, values=values)
        clean(bottle)
        refuse_contradictions(bottle, confirmed=confirmed, before=before)
        restate(bottle)


def _one_space(text: str) -> str:
    return " ".join(text.split())


def _with_capacity(particulars: Particulars) -> Particulars:
    """Infer the capacity from the labelled size where nobody read it, and say that it's inferred."""
    if particulars.capacity_ml is not None or not particulars.charge_g:
        return particulars
    mark = read_mark(particulars.mark) if particulars.mark else None
    inferred = infer_capacity(particulars.charge_g, Facts(mark=mark), rulebook(Shop.objects.get()).edition)
    if inferred is None:
        return particulars
    return replace(particulars, capacity_ml=inferred.capacity_ml, capacity_basis="inferred")


def _refuse_below_tube(particulars: Particulars) -> None:
    """Refuse liquid below a tube that isn't there, or more of it than a tube to the low end can leave."""
    left = particulars.below_tube_ml
    if left is None:
        return
    if particulars.dip_tube != "dip":
        raise Refusal(
            "Only a dip tube leaves liquid below its end. Choose that the bottle has one, or leave this empty.",
            code="no dip tube", field="below_tube",
        )
    if particulars.capacity_ml is not None and 2 * left >= particulars.capacity_ml:
        raise Refusal(
            "A dip tube reaches into the lower half of its bottle. Check the figure and its unit.",
            code="below tube too much", field="below_tube",
        )


def _create(act: Act, code: str, particulars: Particulars) -> Bottle:
    _refuse_known(particulars, but=None)
    bottle = Bottle(act=act, code=code, **asdict(particulars))
    clean(bottle)
    try:
        with transaction.atomic():
            bottle.save(force_insert=True)
    except IntegrityError:
        # Either another desk took the code a moment ago, or it registered this very bottle.
        _refuse_known(particulars, but=None)
        raise CodeTaken(
            f"{code} belongs to another bottle. Leave it empty for the next free one.", field="code"
        ) from None
    return bottle


def _refuse_known(particulars: Particulars, *, but: Bottle | None) -> None:
    twins = twins_of(
        maker=particulars.maker, mark=particulars.mark, serial=particulars.serial, but=but.pk if but else None
    )
    if twins.same is not None:
        raise BottleKnown(twins.same)
