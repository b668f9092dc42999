"""Check in, move, hand over: where a bottle is and with whom, always known.

A bottle that isn't ready isn't handed over: what it waits for is worked out before the act's
transaction by the caller's judgement, and what can change meanwhile (an open refill, the last
weighing) is read again inside it.
"""

from __future__ import annotations

import uuid
from datetime import datetime

from bottles.models import Bottle, Custody, Refill, Standing, Supply
from bottles.services.cleaning import clean
from bottles.services.locking import lock
from bottles.services.plan_again import plan_again
from bottles.services.standing import restate
from bottles.services.weighing import refuse_in_refill
from shop.base import acts, clock
from shop.base.errors import NotReady
from shop.base.models import Act, Place
from shop.cars.models import Car
from shop.people.models import User

GOES_OUT = ("out", "car", "loan", "test", "supplier")


def check_in(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    place: Place,
    brought_by: str,
    wanted: str = "",
    promised_at: datetime | None = None,
    happened_at: datetime | None = None,
) -> Custody:
    """Take a bottle in: who brought it, what is wanted and by when.

    Raises NotReady where it's in already, or retired.
    """
    with acts.begin(key=key, person=person, code="bottle.checked in", subject=f"bottle:{bottle.code}") as act:
        lock([bottle])
        _refuse_retired(bottle)
        standing = restate(bottle)
        if standing.is_in:
            raise NotReady(f"{bottle.code} is in already: {_where(standing)}. Move it instead.", code="in already")
        return _record(
            act=act, bottle=bottle, kind="in", place=place, with_whom=brought_by, wanted=wanted,
            promised_at=promised_at, happened_at=happened_at,
        )


def move(
    *, key: uuid.UUID, person: User | None, bottle: Bottle, place: Place, happened_at: datetime | None = None
) -> Custody:
    """Put a bottle that is in at another place; what it waits for stays.

    Raises NotReady where it isn't in, or hangs on a station.
    """
    with acts.begin(key=key, person=person, code="bottle.moved", subject=f"bottle:{bottle.code}") as act:
        lock([bottle])
        standing = restate(bottle)
        last = standing.custody
        if last is None or not standing.is_in:
            raise NotReady(f"{bottle.code} isn't in the shop. Check it in first.", code="not in")
        _refuse_connected(bottle)
        return _record(
            act=act, bottle=bottle, kind="moved", place=place, with_whom=last.with_whom, wanted=last.wanted,
            promised_at=last.promised_at, happened_at=happened_at,
        )


def want(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    wanted: str,
    promised_at: datetime | None,
) -> Custody:
    """Change what a bottle that is in waits for; empty says that it's done.

    Raises NotReady where it isn't in, or retired.
    """
    with acts.begin(key=key, person=person, code="bottle.wanted", subject=f"bottle:{bottle.code}") as act:
        lock([bottle])
        _refuse_retired(bottle)
        standing = restate(bottle)
        last = standing.custody
        if last is None or not standing.is_in:
            raise NotReady(f"{bottle.code} isn't in the shop. Check it in first.", code="not in")
        return _record(
            act=act, bottle=bottle, kind="moved", place=last.place, with_whom=last.with_whom, wanted=wanted,
            promised_at=promised_at, happened_at=None,
        )


def hand_over(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    kind: str,
    to_whom: str,
    limit_g: int | None,
    car: Car | None = None,
    happened_at: datetime | None = None,
    reason: str = "",
) -> Custody:
    """Give a bottle out: to its owner, onto a car, on loan, to the test house.

    Raises NotReady where it isn't in, is being filled or feeds a refill, hangs on a station, or weighs
    more than its limit allows; where it's the supplier's and would be sent to a test; and without a
    reason where it stands in quarantine, or goes to the test house and was never weighed.
    """
    if kind not in GOES_OUT:
        raise ValueError(kind)
    with acts.begin(
        key=key, person=person, code="bottle.handed over", subject=f"bottle:{bottle.code}", reason=reason
    ) as act:
        lock([bottle])
        standing = restate(bottle)
        if not standing.is_in:
            raise NotReady(f"{bottle.code} isn't in the shop, so it can't be handed over.", code="not in")
        if Refill.objects.filter(bottle=bottle, closed_at__isnull=True).exists():
            raise NotReady(
                f"{bottle.code} is being filled. Weigh it with the line disconnected and close the refill first.",
                code="open refill",
            )
        _refuse_connected(bottle)
        refuse_in_refill(bottle)
        place = standing.custody.place if standing.custody else None
        if place is not None and place.kind == "quarantine" and not reason.strip():
            raise NotReady(
                f"{bottle.code} is in quarantine. Say why it may leave, and tell whoever takes it what is wrong with it.",
                code="quarantine",
                field="reason",
            )
        weighed = standing.weighing
        if kind == "test" and standing.ownership is not None and standing.ownership.kind == "supplier":
            raise NotReady(
                f"{bottle.code} is the supplier's: it isn't tested here, it's swapped. Return it to the supplier.",
                code="suppliers bottle", field="kind",
            )
        if kind == "test" and weighed is None and not reason.strip():
            raise NotReady(
                f"Nobody weighed {bottle.code}, so what it holds isn't known. Weigh it, or say how the test house was told.",
                code="contents not stated", field="reason",
            )
        if limit_g is not None and weighed is not None and weighed.net_g > limit_g:
            raise NotReady(
                f"{bottle.code} holds more than its limit: let nitrous out outdoors and weigh it again at or below the limit.",
                code="overfull",
            )
        return _record(
            act=act, bottle=bottle, kind=kind, place=None, car=car, with_whom=to_whom, wanted="", promised_at=None,
            happened_at=happened_at,
        )


def _record(
    *,
    act: Act,
    bottle: Bottle,
    kind: str,
    place: Place | None,
    with_whom: str,
    wanted: str,
    promised_at: datetime | None,
    happened_at: datetime | None,
    car: Car | None = None,
) -> Custody:
    custody = Custody(
        act=act, bottle=bottle, kind=kind, place=place, car=car, with_whom=with_whom, wanted=wanted,
        promised_at=promised_at, happened_at=happened_at or clock.now(),
    )
    clean(custody)
    custody.save()
    restate(bottle)
    plan_again(act, bottle.code)
    return custody


def _refuse_retired(bottle: Bottle) -> None:
    if Bottle.objects.filter(pk=bottle.pk, retired_at__isnull=False).exists():
        raise NotReady(
            f"{bottle.code} is out of service for good. Its number isn't used again; keep it apart and tell its owner.",
            code="retired",
        )


def _refuse_connected(bottle: Bottle) -> None:
    hangs = Supply.objects.filter(bottle=bottle).select_related("station").first()
    if hangs is not None:
        raise NotReady(f"{bottle.code} is connected to {hangs.station}. Take it off there first.", code="on a station")


def _where(standing: Standing) -> str:
    custody = standing.custody
    return str(custody.place) if custody and custody.place else "in the shop"
