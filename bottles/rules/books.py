"""The scale and the books of one bottle: what a weighing says, and what is then posted.

A weighing is a statement, not a movement. Where scale and books differ by no more than
the ± of the two, nothing is posted: every weighing that "corrected" the books by its own
error would swallow a slow leak gram by gram, while left alone the leak adds up until it
stands out of the ±. Beyond it one movement brings the books to the scale:

- lighter, and it was out with its customer: used by its owner, no question asked
- lighter otherwise (it never left, or it is the shop's): unaccounted for, with a reason
- heavier, and it was out: somebody else filled it; what is in it isn't known any more
- heavier, and it never left: unaccounted for, with a reason
- the books know nothing yet: the first weighing opens them, from its owner's account, or from
  the supplier's for a bottle of the shop, whose nitrous once came from there too

Whether and how much may be filled is decided by the scale alone, never by the books.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from bottles.rules.facts import OwnerKind

AccountKind = Literal[
    "bottle",
    "supplier",
    "returned",
    "customer",
    "car",
    "line",
    "vented",
    "unaccounted",
    "scale",
]
Finding = Literal["agrees", "opens", "adjusts", "needs a reason", "filled elsewhere"]


# What a bottle holds at its first weighing came with it: from its owner or the supplier.
_OPENED_FROM: dict[OwnerKind | None, AccountKind] = {"customer": "customer", "supplier": "supplier", "shop": "supplier"}


@dataclass(frozen=True, slots=True)
class BooksAnswer:
    """What a weighing means for the books.

    ``grams`` go from one kind of account to the other, of which one is the bottle; both
    are None where nothing is posted. ``tolerance_g`` is the ± of the difference.
    """

    finding: Finding
    tolerance_g: int
    source: AccountKind | None = None
    target: AccountKind | None = None
    grams: int = 0
    contents_unknown: bool = False


@dataclass(frozen=True, slots=True)
class RefillSplit:
    """A refill by its weighings, in lines that move grams (all zero or more).

    ``to_receiver`` left the supply bottle and arrived; ``to_line`` left it and didn't;
    ``found`` arrived without having left it by its own scale: the scales' own residual.
    """

    to_receiver: int
    to_line: int
    found: int


def compare(
    *,
    books_g: int | None,
    net_g: int,
    e_net_g: int,
    e_books_g: int,
    was_out: bool,
    owner: OwnerKind | None,
    reason: str = "",
) -> BooksAnswer:
    """Compare a weighing with the books and say what is to be posted.

    ``books_g`` None means never weighed: unknown, not zero. ``was_out`` says whether the
    bottle left the shop since its last weighing.
    """
    tolerance = difference_plus_minus(e_net_g, e_books_g)
    # A net a little below zero is an empty bottle within the scale's error: no account of
    # a bottle may hold less than nothing.
    net = max(0, net_g)
    if books_g is None:
        if net == 0:
            return BooksAnswer("opens", tolerance)
        return BooksAnswer("opens", tolerance, _OPENED_FROM.get(owner, "unaccounted"), "bottle", net)
    gap = net - books_g
    if abs(gap) <= tolerance:
        return BooksAnswer("agrees", tolerance)
    if gap < 0:
        if was_out and owner == "customer":
            return BooksAnswer("adjusts", tolerance, "bottle", "customer", -gap)
        return BooksAnswer(_asked(reason), tolerance, "bottle", "unaccounted", -gap)
    if was_out and owner != "supplier":
        # No reason makes it known again: somebody who knows has to say what went in.
        source: AccountKind = "customer" if owner == "customer" else "unaccounted"
        return BooksAnswer("filled elsewhere", tolerance, source, "bottle", gap, contents_unknown=True)
    return BooksAnswer(_asked(reason), tolerance, "unaccounted", "bottle", gap)


def difference_plus_minus(first_g: int, second_g: int) -> int:
    """The ± of the difference of two weighings, rounded up: √(e₁² + e₂²)."""
    square = first_g * first_g + second_g * second_g
    root = math.isqrt(square)
    return root if root * root == square else root + 1


def split_refill(*, source_loss_g: int | None, receiver_gain_g: int, line_loss_g: int = 0) -> RefillSplit:
    """Split a refill into what arrived, what the line kept, and what the scales disagree on.

    ``source_loss_g`` None means that the supply bottle isn't on a scale: its books then go
    down by what arrived and the station's own line loss. The lines add up exactly: the
    receiver's gain is to_receiver + found, and the supply's loss to_receiver + to_line.
    """
    if receiver_gain_g < 0 or line_loss_g < 0:
        raise ValueError("a refill can't take from the bottle that is filled")
    if source_loss_g is None:
        return RefillSplit(receiver_gain_g, line_loss_g, 0)
    loss = max(0, source_loss_g)
    moved = min(loss, receiver_gain_g)
    return RefillSplit(moved, loss - moved, receiver_gain_g - moved)


def _asked(reason: str) -> Finding:
    return "adjusts" if reason.strip() else "needs a reason"
