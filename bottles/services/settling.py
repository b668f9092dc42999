"""Bring the books to the scale.

Only a weighing that is the latest when it's recorded sets the books. An older one that is entered
late stays a statement: the younger one has spoken already. If that one is struck, the latest one
left speaks. Called inside an act's transaction, after its bottles are locked.
"""

from __future__ import annotations

from bottles.models import Bottle, Movement, Weighing
from bottles.selectors.history import history_of
from bottles.services.booking import book
from bottles.services.gaps import gap_of, note_unknown, other_side, refuse_without_reason
from bottles.services.posting import Move, account_of
from shop.base.models import Act


def settle(*, act: Act, bottle: Bottle, reason: str = "", only: Weighing | None = None) -> Movement | None:
    """Bring the books to the bottle's latest weighing, if its gap is beyond the ±.

    With `only` nothing happens unless that is the weighing that speaks.

    Raises NeedsReason, with how much is short or over; NotReady where a bottle that was with the
    supplier came back heavier: that is a delivery.
    """
    history = history_of(bottle)
    at = history.latest
    if at is None or (only is not None and at.weighing_id != only.pk) or history.ruling[-1:] != [at]:
        return None
    gap = gap_of(history, at)
    if not gap.speaks:
        return None
    side = other_side(bottle, history, at, gap)
    if side.asks:
        refuse_without_reason(bottle, history, at, gap, reason)
    own = account_of(bottle)
    source, target = (side.account, own) if gap.grams > 0 else (own, side.account)
    movement = book(
        act=act, kind="opening" if gap.opening else "adjust", happened_at=at.key[0], order=at.key[1],
        weighing=Weighing.objects.get(pk=at.weighing_id), note=reason.strip()[:200],
        moves=[Move(source=source, target=target, grams=abs(gap.grams), origin="weighed", error_g=gap.error_g)],
    )
    if side.unknown:
        note_unknown(act=act, bottle=bottle, at=at)
    return movement
