"""What leaves a bottle outside a refill: used by a car, vented; and a movement reversed.

How much went is told by a person, or by the scale: contents before less what it says now.
"""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from datetime import datetime

from bottles.models import Account, Bottle, Movement, Scale, Weighing
from bottles.physics.weighing import net_uncertainty
from bottles.selectors.history import history_of
from bottles.services.booking import book
from bottles.services.booking import reverse as reverse_now
from bottles.services.locking import lock
from bottles.services.plan_again import plan_again
from bottles.services.posting import Move, account_of, own_account
from bottles.services.refusals import locked
from bottles.services.weighing import refuse_in_refill, weigh_in
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.cars.models import Car
from shop.people.models import User
from shop.physics.units import Entry


@dataclass(frozen=True, slots=True)
class OnScale:
    """What a scale says now: by it is told how much went."""

    scale: Scale
    gross: Entry
    wet: bool = False


def use(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    car: Car,
    amount: Entry | None = None,
    weighed: OnScale | None = None,
    happened_at: datetime | None = None,
    note: str = "",
) -> Movement:
    """Record what a car used from a bottle: an amount, or what is gone by the scale.

    Raises Retired; NotReady while it's in an open refill; Refusal where neither or both are
    given, or the scale says that nothing went.
    """
    with acts.begin(key=key, person=person, code="bottle.used", subject=f"bottle:{bottle.code}", reason=note.strip()) as act:
        bottle = _ready(bottle)
        return _out(
            act=act, kind="use", bottle=bottle, target=account_of(car), amount=amount, weighed=weighed,
            happened_at=happened_at, note=note,
        )


def vent(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    reason: str,
    amount: Entry | None = None,
    weighed: OnScale | None = None,
    happened_at: datetime | None = None,
) -> Movement:
    """Record what was let out of a bottle into the open air, where and why.

    Raises what `use` raises; Refusal without a reason.
    """
    if not reason.strip():
        raise Refusal("Say where it was let out and why.", code="no reason", field="reason")
    with acts.begin(
        key=key, person=person, code="bottle.vented", subject=f"bottle:{bottle.code}", reason=reason.strip()
    ) as act:
        bottle = _ready(bottle)
        return _out(
            act=act, kind="vent", bottle=bottle, target=own_account("vented"), amount=amount, weighed=weighed,
            happened_at=happened_at, note=reason,
        )


def reverse_movement(*, key: uuid.UUID, person: User | None, movement: Movement, reason: str) -> Movement:
    """Reverse a movement once, with a reason; later weighings keep their word.

    Raises AlreadyReversed; NotReady for a reversal, or where a weighing caused it (that is struck
    instead, so that books and scale go together).
    """
    if not reason.strip():
        raise Refusal("Say why it's reversed.", code="no reason", field="reason")
    subject = _subject(movement)
    with acts.begin(
        key=key, person=person, code="movement.reversed", subject=subject, reason=reason.strip(),
        changes={"movement": movement.pk},
    ) as act:
        lock(_bottles_of(movement))
        if movement.weighing_id and not movement.reverses_id:
            raise NotReady(
                "A weighing caused this movement. Strike that weighing instead: what it moved is reversed with it.",
                code="strike the weighing",
            )
        done = reverse_now(act=act, movement=movement)
        if done is None:
            raise NotReady("Nothing is left to reverse here.", code="nothing to reverse")
        plan_again(act)
        return done


def gone(*, bottle: Bottle, weighing: Weighing) -> tuple[int, int]:
    """Return what a weighing says has gone from the books' contents, and the ± of that difference."""
    history = history_of(bottle)
    at = next(one for one in (history.latest, *history.ruling) if one and one.weighing_id == weighing.pk)
    return history.level_at(at.key) - at.net_g, net_uncertainty(at.error_g, history.books_error(at))


def _ready(bottle: Bottle) -> Bottle:
    now = locked(bottle)
    refuse_in_refill(now)
    return now


def _out(
    *,
    act: Act,
    kind: str,
    bottle: Bottle,
    target: Account,
    amount: Entry | None,
    weighed: OnScale | None,
    happened_at: datetime | None,
    note: str,
) -> Movement:
    happened_at = happened_at or clock.now()
    if (amount is None) == (weighed is None):
        raise Refusal(
            "Say either how much went, or what the scale says now; not both.", code="one of two", field="amount"
        )
    kept: Weighing | None = None
    if weighed is not None:
        kept = weigh_in(
            act=act, bottle=bottle, scale=weighed.scale, gross=weighed.gross, wet=weighed.wet, step="stored",
            happened_at=happened_at, settle=False,
        )
        history = history_of(bottle)
        at = history.latest
        if at is None or at.weighing_id != kept.pk or not history.known_before(at):
            raise Refusal(
                "The bottle was weighed later than that, or never before, so this weighing can't tell how much went. "
                "Give the amount instead.", code="scale can't tell", field="gross",
            )
        grams, error = gone(bottle=bottle, weighing=kept)
        origin = "weighed"
        if grams <= 0:
            raise Refusal(
                "By the scale nothing went: it says as much as the books hold, or more. Read it again.", code="nothing went",
                field="gross",
            )
    else:
        assert amount is not None
        grams, error, origin = amount.stored, 0, "entered"
        if grams == 0:
            raise Refusal("Nothing went, so there is nothing to record. Type how much.", code="nothing went", field="amount")
    movement = book(
        act=act, kind=kind, happened_at=happened_at, weighing=kept, order=act.pk, note=note.strip()[:200],
        moves=[Move(source=account_of(bottle), target=target, grams=grams, origin=origin, error_g=error)],
    )
    assert movement is not None
    plan_again(act, bottle.code)
    return movement


def _bottles_of(movement: Movement) -> list[Bottle]:
    lines = movement.lines.select_related("source__bottle", "target__bottle")
    return [account.bottle for line in lines for account in (line.source, line.target) if account.bottle]


def _subject(movement: Movement) -> str:
    bottles = _bottles_of(movement)
    return f"bottle:{bottles[0].code}" if bottles else "books"
