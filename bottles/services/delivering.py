"""Supply bottles that come full and go back: by our scale where it spoke, else by the ticket.

An "empty" supply bottle still holds a sixth to a third of a charge as vapour (common practice):
what goes back is on the books.
"""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from datetime import datetime

from django.db.models import Q

from bottles.models import Bottle, Custody, Delivery, Line, Movement, Supply, Weighing
from bottles.selectors.history import history_of
from bottles.services.booking import book
from bottles.services.moving import OnScale
from bottles.services.plan_again import plan_again
from bottles.services.posting import Move, account_of, own_account
from bottles.services.refusals import locked
from bottles.services.standing import restate
from bottles.services.weighing import refuse_in_refill, weigh_in
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act, Place
from shop.people.models import User
from shop.physics.units import Entry


@dataclass(frozen=True, slots=True)
class Ticket:
    """What the supplier's ticket says."""

    supplier: str
    number: str
    net: Entry | None = None
    lot: str = ""
    race_grade: bool | None = None


def deliver(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    ticket: Ticket,
    place: Place,
    weighed: OnScale | None = None,
    happened_at: datetime | None = None,
) -> Delivery:
    """Record a supply bottle that came full, and check it in.

    The books take our weighing; without one the ticket's weight. What they still held when it
    went to the supplier's is booked as gone back.

    Raises Retired; NotReady where it stands here with contents, or was weighed or moved later than
    that; Refusal where neither the scale
    nor the ticket gives a weight; and what `weigh_in` raises.
    """
    happened_at = happened_at or clock.now()
    if weighed is None and (ticket.net is None or ticket.net.stored == 0):
        raise Refusal(
            "Weigh it, or type the net weight from the ticket: one of the two must say how much came.", code="no weight",
            field="ticket_net",
        )
    with acts.begin(key=key, person=person, code="bottle.delivered", subject=f"bottle:{bottle.code}") as act:
        bottle = locked(bottle)
        _refuse_out_of_order(bottle, happened_at, moved_too=False)
        standing = restate(bottle)
        holds = account_of(bottle).balance_g
        if standing.is_in and holds:
            raise NotReady(
                f"{bottle.code} stands here and isn't empty by the books. Record its return to the supplier first; if it was "
                "filled here by the supplier, record a return and then the delivery.",
                code="here already",
            )
        refuse_in_refill(bottle)
        left = history_of(bottle).level_at((happened_at, act.pk)) if holds else 0
        kept: Weighing | None = None
        net = ticket.net.stored if ticket.net else 0
        error, origin = 0, "entered"
        if weighed is not None:
            kept = weigh_in(
                act=act, bottle=bottle, scale=weighed.scale, gross=weighed.gross, wet=weighed.wet, step="arrival",
                happened_at=happened_at, settle=False,
            )
            net, error, origin = max(0, kept.net_g), kept.error_g, "weighed"
            if net == 0:
                raise Refusal("By the scale it's empty. Read it again, or check the tare.", code="empty", field="gross")
        movement = book(
            act=act, kind="delivery", happened_at=happened_at, weighing=kept, note=f"ticket {ticket.number}"[:200],
            moves=[Move(source=own_account("supplier"), target=account_of(bottle), grams=net, origin=origin, error_g=error)],
        )
        if left:  # after the delivery, so that what was drawn since then has something to be drawn from
            _post_return(act=act, bottle=bottle, happened_at=happened_at, grams=left, weighing=None)
        delivery = Delivery(
            act=act, movement=movement, bottle=bottle, supplier=ticket.supplier.strip(), ticket=ticket.number.strip(),
            ticket_net_g=ticket.net.stored if ticket.net else None, ticket_typed=ticket.net.typed if ticket.net else "",
            lot=ticket.lot.strip(), race_grade=ticket.race_grade, weighing=kept, happened_at=happened_at,
        )
        delivery.save()
        if not standing.is_in:
            Custody.objects.create(
                act=act, bottle=bottle, kind="in", place=place, with_whom=ticket.supplier.strip(), happened_at=happened_at
            )
        restate(bottle)
        plan_again(act, bottle.code)
    return delivery


def give_back(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    supplier: str,
    weighed: OnScale | None = None,
    happened_at: datetime | None = None,
    reason: str = "",
) -> Movement | None:
    """Send a bottle back to the supplier, with what it still holds.

    Weighed first, the books follow the scale (with a reason, where the gap is beyond the ±).
    Returns the movement, or None where nothing was in it.

    Raises Retired; NotReady where it isn't in, hangs on a station or is in an open refill.
    """
    happened_at = happened_at or clock.now()
    with acts.begin(
        key=key, person=person, code="bottle.given back", subject=f"bottle:{bottle.code}", reason=reason.strip()
    ) as act:
        bottle = locked(bottle)
        refuse_in_refill(bottle)
        _refuse_out_of_order(bottle, happened_at, moved_too=True)
        if not restate(bottle).is_in:
            raise NotReady(f"{bottle.code} isn't in the shop, so it can't go back from here.", code="not in")
        hangs = Supply.objects.filter(bottle=bottle).select_related("station").first()
        if hangs is not None:
            raise NotReady(f"{bottle.code} is connected to {hangs.station}. Take it off there first.", code="on a station")
        kept: Weighing | None = None
        if weighed is not None:
            kept = weigh_in(
                act=act, bottle=bottle, scale=weighed.scale, gross=weighed.gross, wet=weighed.wet, step="dispatch",
                happened_at=happened_at, reason=reason,
            )
        level = history_of(bottle).level_at((happened_at, act.pk))
        movement = _post_return(act=act, bottle=bottle, happened_at=happened_at, grams=level, weighing=kept)
        Custody.objects.create(
            act=act, bottle=bottle, kind="supplier", with_whom=supplier.strip()[:120], happened_at=happened_at
        )
        restate(bottle)
        plan_again(act, bottle.code)
    return movement


def _refuse_out_of_order(bottle: Bottle, happened_at: datetime, *, moved_too: bool) -> None:
    """Refuse a coming or going that lies before what is already known of the bottle afterwards."""
    later = (
        Custody.objects.filter(bottle=bottle, happened_at__gt=happened_at).exists()
        or Weighing.objects.filter(bottle=bottle, strike__isnull=True, happened_at__gt=happened_at).exists()
    )
    if moved_too and not later:
        lines = Line.objects.filter(Q(source__bottle=bottle) | Q(target__bottle=bottle))
        later = lines.filter(movement__happened_at__gt=happened_at).exists()
    if later:
        raise NotReady(
            f"Later than that {bottle.code} was weighed, moved or drawn from already. Give a later time, or leave it "
            "empty for now.",
            code="out of order", field="happened_at",
        )


def _post_return(
    *, act: Act, bottle: Bottle, happened_at: datetime, grams: int, weighing: Weighing | None
) -> Movement | None:
    """Post what a bottle held by then as gone back to the supplier."""
    origin, error = ("weighed", weighing.error_g) if weighing else ("computed", 0)
    return book(
        act=act, kind="returned", happened_at=happened_at, weighing=weighing, order=act.pk,
        moves=[
            Move(source=account_of(bottle), target=own_account("returned"), grams=grams, origin=origin, error_g=error)
        ],
    )
