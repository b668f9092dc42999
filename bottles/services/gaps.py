"""A gap between the scale and the books: how large, whether it speaks, and where it went.

What a weighing says is `bottles.rules.books`; here stands what only the register knows: whose the
bottle was then, whether it was out, which car it was on. Beyond the rule:

- the shop's own bottle that was on a car and came back lighter was used by that car;
- where only a delivery's ticket spoke so far, the gap is the supplier's.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import cast

from bottles.models import Account, Bottle, Condition, ConditionEnd, Ownership
from bottles.physics.weighing import net_uncertainty
from bottles.rules.books import compare
from bottles.rules.facts import OwnerKind
from bottles.selectors.history import History, Spoken
from bottles.selectors.whose import last_out, owner_at
from bottles.services.posting import account_of, own_account
from shop.base import clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.physics.weights import format_mass

UNKNOWN = "contents unknown"


class NeedsReason(Refusal):
    """The books and the scale differ by more than their ±, and the bottle never left. Say why."""

    code = "needs a reason"


@dataclass(frozen=True, slots=True)
class Gap:
    """What the scale says beyond the books (below nothing: short), and the ± of that difference."""

    grams: int
    error_g: int
    opening: bool = False

    @property
    def speaks(self) -> bool:
        """Whether it's beyond the ±, so that the books follow."""
        return self.opening or abs(self.grams) > self.error_g


@dataclass(frozen=True, slots=True)
class Side:
    """The account on the other side of a gap; whether a reason is owed; whether contents are unknown."""

    account: Account
    asks: bool = False
    unknown: bool = False


def gap_of(history: History, at: Spoken) -> Gap:
    """Return how a weighing differs from the books as they stood when it happened."""
    gap = at.net_g - history.level_at(at.key)
    if not history.known_before(at):
        return Gap(gap, at.error_g, opening=True)
    return Gap(gap, net_uncertainty(at.error_g, history.books_error(at)))


def other_side(bottle: Bottle, history: History, at: Spoken, gap: Gap, *, anew: bool = False) -> Side:
    """Return where the grams of a gap went to, or came from; `anew`: nobody is there to be asked.

    Raises NotReady where a bottle that was with the supplier came back heavier: that's a delivery.
    """
    owner = owner_at(bottle, at.key[0])
    customer = owner.customer if owner and owner.kind == "customer" else None
    if not gap.opening and history.rests_on_ticket(at):
        return Side(own_account("supplier"))
    since = history.last_ruling(at.key)
    out = last_out(bottle, since.key[0] if since else None, at.key[0])
    heavier = gap.grams > 0
    if heavier and not gap.opening and out is not None and out.kind == "supplier" and not anew:
        raise NotReady(
            f"{bottle.code} was with the supplier and came back heavier: record its delivery instead.", code="record the delivery"
        )
    if not heavier and customer is None and out is not None and out.car is not None:
        return Side(account_of(out.car))
    answer = compare(
        books_g=None if gap.opening else max(0, -gap.grams), net_g=max(0, gap.grams), e_net_g=0, e_books_g=0,
        was_out=out is not None, owner=_kind(owner, opening=gap.opening),
    )
    other = answer.source if heavier else answer.target
    account = account_of(customer) if other == "customer" and customer else own_account(other or "unaccounted")
    return Side(account, asks=answer.finding == "needs a reason", unknown=answer.contents_unknown)


def _kind(owner: Ownership | None, *, opening: bool) -> OwnerKind | None:
    if owner is None:  # registered without one: its nitrous came from the supplier once, as the shop's own did
        return "shop" if opening else None
    return cast(OwnerKind, owner.kind)


LIKELY_WHY = {
    "short": "a leak, a run that wasn't logged, a spill",
    "over": "a refill that wasn't logged, something on it that its tare list doesn't name, ice",
}


def refuse_without_reason(bottle: Bottle, history: History, at: Spoken, gap: Gap, reason: str) -> None:
    """Raise NeedsReason with what is short or over, where none was given."""
    if reason.strip():
        return
    short = "short" if gap.grams < 0 else "over"
    raise NeedsReason(
        f"The books say {in_both(history.level_at(at.key))}, the scale {in_both(at.net_g)}: {in_both(abs(gap.grams))} "
        f"{short}, beyond the ± of {in_both(gap.error_g)}. Weigh it again; if that stays, say why: {LIKELY_WHY[short]}.",
        field="reason",
    )


def note_unknown(*, act: Act, bottle: Bottle, at: Spoken) -> None:
    """Note that nobody here knows what is in the bottle, unless that is noted already."""
    if not Condition.objects.filter(bottle=bottle, code=UNKNOWN, end__isnull=True).exists():
        Condition.objects.create(
            act=act, bottle=bottle, code=UNKNOWN, seen_on=clock.day_of(at.key[0]),
            note="It came back heavier than it left: filled elsewhere.",
        )


def end_unknown(*, act: Act, bottle: Bottle, noted_by: int, how: str) -> None:
    """End the note that an act made, where what it rested on is struck or explained."""
    for condition in Condition.objects.filter(bottle=bottle, act_id=noted_by, code=UNKNOWN, end__isnull=True):
        ConditionEnd.objects.create(act=act, condition=condition, how=how[:200])


def in_both(grams: int) -> str:
    """Return grams for a refusal's sentence, in both ways of writing."""
    return f"{format_mass(grams, 'kg')} ({format_mass(grams, 'lb')})"
