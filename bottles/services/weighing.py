"""Weigh a bottle, and strike a weighing that was mistyped.

A weighing keeps the tare in force when it happened, the scale's ± and its last check by then;
its net is never worked out again. What it says of the books is `settling`'s.
"""

from __future__ import annotations

import uuid
from datetime import datetime

from django.db import IntegrityError, transaction

from bottles.models import Bottle, Delivery, Draw, Refill, Scale, Standing, Tare, Weighing, WeighingStrike
from bottles.physics import weighing as physics
from bottles.selectors.history import history_of
from bottles.selectors.refills import course_of
from bottles.selectors.scales import last_check, scale_uncertainty
from bottles.services.booking import book, reverse
from bottles.services.gaps import end_unknown
from bottles.services.locking import lock
from bottles.services.plan_again import plan_again
from bottles.services.posting import Move, account_of, own_account
from bottles.services.refill_books import post_flows
from bottles.services.refusals import locked
from bottles.services.settling import settle as settle_books
from bottles.services.standing import restate, restate_weighing
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.people.models import User
from shop.physics.errors import Contradiction
from shop.physics.units import Entry

# The largest supply bottle on a scale, where a wet bottle's capacity isn't known (common practice).
WET_CAPACITY_ML = 50_000


class AlreadyStruck(NotReady):
    """This weighing was struck already. The bottle's page shows by whom and why."""

    code = "struck already"


def weigh(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    scale: Scale,
    gross: Entry,
    wet: bool = False,
    step: str = "stored",
    happened_at: datetime | None = None,
    reason: str = "",
) -> Weighing:
    """Record what a scale says of a bottle, and settle the books by it.

    Raises Retired; NotReady while the bottle is being filled or feeds an open refill (it's
    weighed there); and what `weigh_in` raises.
    """
    with acts.begin(
        key=key, person=person, code="bottle.weighed", subject=f"bottle:{bottle.code}", reason=reason.strip()
    ) as act:
        bottle = locked(bottle)
        refuse_in_refill(bottle)
        kept = weigh_in(
            act=act, bottle=bottle, scale=scale, gross=gross, wet=wet, step=step, happened_at=happened_at, reason=reason
        )
        plan_again(act, bottle.code)
    return kept


def weigh_in(
    *,
    act: Act,
    bottle: Bottle,
    scale: Scale,
    gross: Entry,
    wet: bool,
    step: str,
    happened_at: datetime | None = None,
    refill: Refill | None = None,
    settle: bool = True,
    reason: str = "",
    wider_g: int = 0,
) -> Weighing:
    """Insert a weighing within an act's transaction, its bottle locked; settle the books unless told not to.

    `wider_g` widens the ± by what else is uncertain, such as a hose that pulls at the scale.

    Raises Refusal for a figure that can't be right (beyond the scale's capacity, below the tare, a
    time to come), NotReady where the bottle had no tare then or the scale failed its last check,
    NeedsReason where books and scale differ and the bottle never left.
    """
    happened_at = happened_at or clock.now()
    tare = tare_at(bottle, happened_at)
    check = last_check(scale, happened_at)
    if not scale.active:
        raise NotReady(f"{scale.name} is out of use. Use another scale.", code="scale out of use", field="scale")
    if check is not None and not check.passed:
        raise NotReady(
            f"{scale.name} failed its last check with a known weight. Use another scale, or check it again.",
            code="scale failed its check", field="scale",
        )
    if happened_at > clock.now():
        raise Refusal("This is still to come. Give the time at which it happened.", code="in the future", field="happened_at")
    if gross.stored > scale.capacity_g + scale.error_g:
        raise Refusal(
            f"{scale.name} can't weigh that much: it ends at {scale.capacity_typed}. Read it again, or use a larger scale.",
            code="beyond the scale", field="gross",
        )
    error = physics.net_uncertainty(scale_uncertainty(scale), tare.error_g) + wider_g
    if wet:
        error = physics.wet_uncertainty(error, physics.wet_allowance(bottle.capacity_ml or WET_CAPACITY_ML))
    try:
        net = physics.net(gross.stored, tare.total_g, error)
    except Contradiction as wrong:
        raise Refusal(wrong.sentence, code=wrong.code, field="gross") from None
    kept = Weighing(
        act=act, bottle=bottle, scale=scale, check_row=check, tare=tare, refill=refill, step=step, gross_g=gross.stored,
        typed=gross.typed, net_g=net, error_g=error, wet=wet, happened_at=happened_at,
    )
    kept.save()
    if settle:
        settle_books(act=act, bottle=bottle, only=kept, reason=reason)
    restate_weighing(bottle)
    return kept


def tare_at(bottle: Bottle, at: datetime) -> Tare:
    """Return the tare in force at a moment; raise NotReady where there was none."""
    tares = Tare.objects.filter(bottle=bottle)
    tare = tares.filter(since__lte=at).order_by("-since", "-id").first()
    if tare is not None:
        return tare
    if tares.exists():
        raise NotReady(
            "The bottle's tare list begins later than that. Enter what was fitted then, or leave the time empty for now.",
            code="no tare then", field="happened_at",
        )
    raise NotReady("The bottle has no tare yet, so a scale can't tell what's in it. Enter its tare first.", code="no tare")


def refuse_in_refill(bottle: Bottle) -> None:
    """Raise NotReady where the bottle is in an open refill: it's weighed on that refill's page."""
    if Refill.objects.filter(bottle=bottle, closed_at__isnull=True).exists():
        raise NotReady(f"{bottle.code} is being filled: weigh it on its refill's page.", code="open refill")
    feeds = Draw.objects.filter(source=bottle, refill__closed_at__isnull=True).select_related("refill__bottle").first()
    if feeds is not None:
        raise NotReady(
            f"{bottle.code} feeds the open refill of {feeds.refill.bottle.code}: weigh it on that refill's page, or close it.",
            code="open refill",
        )


def strike(
    *,
    key: uuid.UUID,
    person: User | None,
    weighing: Weighing,
    reason: str,
    right: Entry | None = None,
) -> Weighing | None:
    """Strike a mistyped weighing; with `right`, put in its place what the scale really said.

    What it had moved is reversed in the same act, what later weighings had set is set anew, and
    the latest weighing left speaks for the books. A delivery that rested on it is posted again:
    by the right figure, else by its ticket.

    Raises AlreadyStruck; Refusal without a reason, or where a delivery would be left without a figure.
    """
    if not reason.strip():
        raise Refusal("Say why it's struck: what was mistyped, which bottle was on the scale.", code="no reason", field="reason")
    bottle = weighing.bottle
    refill = weighing.refill or Refill.objects.filter(act_id=weighing.act_id, bottle=bottle).first()
    with acts.begin(
        key=key, person=person, code="weighing.struck", subject=f"bottle:{bottle.code}", reason=reason.strip(),
        changes={"weighing": weighing.pk},
    ) as act:
        lock([bottle, *_others(weighing, refill)])
        try:
            with transaction.atomic():
                WeighingStrike.objects.create(act=act, weighing=weighing)
        except IntegrityError:
            raise AlreadyStruck from None
        kept = None
        if right is not None:
            kept = weigh_in(
                act=act, bottle=bottle, scale=weighing.scale, gross=right, wet=weighing.wet, step=weighing.step,
                happened_at=weighing.happened_at, refill=refill, settle=False,
            )
        _undo(act, weighing, kept)
        if refill is not None:
            now = Refill.objects.get(pk=refill.pk)  # someone else may have closed it before the lock
            post_flows(act=act, course=course_of(now), weighing=kept)
        settle_books(act=act, bottle=bottle, reason=reason)
        standing: Standing = restate(bottle)
        plan_again(act, bottle.code)
        return standing.weighing if right is None else kept


def _others(weighing: Weighing, refill: Refill | None) -> list[Bottle]:
    """Return the other bottles that its movements touched, or that its refill drew on."""
    lines = [
        line
        for movement in weighing.movements.all()
        for line in movement.lines.select_related("source__bottle", "target__bottle")
    ]
    drawn = [draw.source for draw in refill.draws.select_related("source")] if refill else []
    return [*drawn, *(account.bottle for line in lines for account in (line.source, line.target) if account.bottle)]


def _undo(act: Act, weighing: Weighing, right: Weighing | None) -> None:
    """Reverse what a weighing had moved, newest first; what happened whatever it said is posted anew.

    A delivery is posted anew before the first is reversed, so that what was drawn since then has
    something to be drawn from all the while; a return after it.
    """
    standing = weighing.movements.filter(reversal__isnull=True).exclude(kind="reversal")
    # What a refill moved is worked out anew from its weighings left: only the difference is posted.
    standing = standing.exclude(refill__isnull=False, kind__in=("refill", "vent"))
    for movement in standing.select_related("weighing", "refill").order_by("-id"):
        if movement.kind == "delivery":
            _deliver_anew(act, weighing, right)
        reverse(act=act, movement=movement)
        if movement.kind == "returned":
            _return_anew(act, weighing, right)
    end_unknown(act=act, bottle=weighing.bottle, noted_by=weighing.act_id, how="the weighing that showed it was struck")


def _deliver_anew(act: Act, weighing: Weighing, right: Weighing | None) -> None:
    """Post a delivery by the right figure, else by its ticket."""
    delivery = Delivery.objects.filter(weighing=weighing).first()
    if right is not None:
        grams, error, origin = max(0, right.net_g), right.error_g, "weighed"
    elif delivery is not None and delivery.ticket_net_g:
        grams, error, origin = delivery.ticket_net_g, 0, "entered"
    else:
        raise Refusal(
            "A delivery rests on this weighing and its ticket gave no weight. Type what the scale really said.",
            code="delivery without a figure", field="right",
        )
    target = account_of(weighing.bottle)
    book(
        act=act, kind="delivery", happened_at=weighing.happened_at, weighing=right, note=act.reason[:200],
        moves=[Move(source=own_account("supplier"), target=target, grams=grams, origin=origin, error_g=error)],
    )


def _return_anew(act: Act, weighing: Weighing, right: Weighing | None) -> None:
    """Post what went back to the supplier: by the right figure, else what the books held."""
    own = account_of(weighing.bottle)
    level = history_of(weighing.bottle).level_at((weighing.happened_at, act.pk))
    grams, error, origin = (max(0, right.net_g), right.error_g, "weighed") if right is not None else (level, 0, "computed")
    moves = [Move(source=own, target=own_account("returned"), grams=grams, origin=origin, error_g=error)]
    if gap := grams - level:
        pair = (own_account("unaccounted"), own)
        source, target = pair if gap > 0 else pair[::-1]
        moves.insert(0, Move(source=source, target=target, grams=abs(gap), origin=origin, error_g=error))
    book(act=act, kind="returned", happened_at=weighing.happened_at, weighing=right, moves=moves, note=act.reason[:200])
