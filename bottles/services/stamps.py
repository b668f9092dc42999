"""Record a stamp seen on the bottle; strike one that was read wrongly."""

from __future__ import annotations

import uuid
from collections.abc import Collection
from dataclasses import dataclass

from django.db import IntegrityError, transaction

from bottles.models import Bottle, Stamp, StampStrike
from bottles.rules.stamps import DateStamp
from bottles.services.cleaning import clean
from bottles.services.contradictions import refuse_contradictions, unusual
from bottles.services.refusals import locked
from bottles.services.standing import restate
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.people.models import User
from shop.rules import month as months

ONCE = ("made", "end")  # a bottle is made once and ends once


@dataclass(frozen=True, slots=True)
class SeenStamp:
    """A stamp as read, and whose it is."""

    kind: str
    date: DateStamp
    facility: str = ""


def record_stamp(
    *, key: uuid.UUID, person: User | None, bottle: Bottle, stamp: SeenStamp, confirmed: Collection[str] = ()
) -> Stamp:
    """Record one stamp, as typed and as understood.

    Raises Retired; Contradicted where it can't be true beside the others (a test before the
    bottle was made).
    """
    with acts.begin(
        key=key, person=person, code="bottle.stamp recorded", subject=f"bottle:{bottle.code}",
        changes={"kind": stamp.kind, "date": stamp.date.text},
    ) as act:
        bottle = locked(bottle)
        before = unusual(bottle)
        kept = write_stamp(act=act, bottle=bottle, stamp=stamp)
        refuse_contradictions(bottle, confirmed=confirmed, before=before)
        restate(bottle)
    return kept


def write_stamp(*, act: Act, bottle: Bottle, stamp: SeenStamp) -> Stamp:
    """Insert a stamp within an act's transaction."""
    if stamp.kind != "end" and stamp.date.at > months.of_date(clock.today()):
        raise Refusal(
            f"{stamp.date.text} is still to come. Read the stamp again.", code="stamp in the future", field="date"
        )
    there = Stamp.objects.filter(bottle=bottle, kind=stamp.kind, strike__isnull=True)
    if stamp.kind in ONCE and (first := there.first()):
        raise NotReady(
            f"“{first.get_kind_display()}” is recorded already, as {first.typed}. Strike that one first if it was read wrongly.",
            code="stamped once", field="kind",
        )
    # The same stamp read twice is one stamp.
    if there.filter(year=stamp.date.year, month=stamp.date.month).exists():
        raise NotReady(f"{stamp.date.text} is recorded already. Look at the rows above.", code="stamp known", field="date")
    kept = Stamp(
        act=act, bottle=bottle, kind=stamp.kind, year=stamp.date.year, month=stamp.date.month, star=stamp.date.star,
        plus=stamp.date.plus, facility=stamp.facility or stamp.date.facility or "", typed=stamp.date.typed,
    )
    clean(kept)
    kept.save()
    return kept


def strike_stamp(*, key: uuid.UUID, person: User | None, stamp: Stamp, reason: str) -> StampStrike:
    """Strike a stamp that was read wrongly: it stays to be seen and counts no more.

    Raises Retired; NotReady where it was struck already; Refusal where no reason is given.
    """
    if not reason.strip():
        raise Refusal("Say why: the reason stays beside the stamp.", code="no reason", field="reason")
    bottle = stamp.bottle
    with acts.begin(
        key=key, person=person, code="bottle.stamp struck", subject=f"bottle:{bottle.code}", reason=reason.strip(),
        changes={"kind": stamp.kind, "date": stamp.typed},
    ) as act:
        locked(bottle)
        try:
            with transaction.atomic():
                strike = StampStrike.objects.create(act=act, stamp=stamp)
        except IntegrityError:
            raise NotReady("This stamp was struck already.", code="struck already") from None
        restate(bottle)
    return strike
