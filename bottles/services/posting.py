"""Post to the nitrous ledger: a movement with its lines, and the balances that follow.

Called inside an act's transaction, after its bottles are locked. Guarantees:

- a movement's lines each move grams from one account to another, so nothing can fail to
  balance; zero lines leave no movement;
- what physically happened can always be recorded: where the books of a bottle hold less than
  what left it, the shortfall is booked in the same movement as found, from *unaccounted*;
- a movement is reversed once, by `booking.reverse`, at the time of what it reverses;
- balances are moved in order of account, after all bottles are locked, so that two postings
  can't wait for each other.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from django.db.models import F

from bottles.models import Account, Bottle, Line, Movement, Refill, Weighing
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.cars.models import Car
from shop.people.models import Customer


@dataclass(frozen=True, slots=True)
class Move:
    """Grams to move: from, to, how many, their ± and where the figure comes from."""

    source: Account
    target: Account
    grams: int
    origin: str  # weighed, computed, entered
    error_g: int = 0


class AlreadyReversed(Refusal):
    """This movement was reversed already. Look at the bottle's history for the reversal."""

    code = "already reversed"


def account_of(thing: Bottle | Customer | Car) -> Account:
    """Return the account of a bottle, a customer or a car, opened on first use."""
    if isinstance(thing, Bottle):
        return Account.objects.get_or_create(kind="bottle", bottle=thing)[0]
    if isinstance(thing, Customer):
        return Account.objects.get_or_create(kind="customer", customer=thing)[0]
    return Account.objects.get_or_create(kind="car", car=thing)[0]


def own_account(kind: str) -> Account:
    """Return one of the shop's own accounts: supplier, returned, line, vented, unaccounted, scale."""
    if kind not in Account.OWN:
        raise ValueError(kind)
    return Account.objects.get_or_create(kind=kind)[0]


def post(
    *,
    act: Act,
    kind: str,
    happened_at: datetime,
    moves: Sequence[Move],
    refill: Refill | None = None,
    weighing: Weighing | None = None,
    note: str = "",
    reverses: Movement | None = None,
) -> Movement | None:
    """Insert a movement and its lines and move the balances; None where nothing moves."""
    moves = [move for move in moves if move.grams]
    if not moves:
        return None
    moves = _with_what_was_found(moves)
    movement = Movement.objects.create(
        act=act, kind=kind, happened_at=happened_at, refill=refill, weighing=weighing, note=note, reverses=reverses
    )
    Line.objects.bulk_create(
        Line(
            act=act, movement=movement, source=move.source, target=move.target, grams=move.grams,
            error_g=move.error_g, origin=move.origin,
        )
        for move in moves
    )
    for key, grams in sorted(_changes(moves).items()):
        if grams:
            Account.objects.filter(pk=key).update(balance_g=F("balance_g") + grams)
    return movement


def reversed_moves(movement: Movement) -> list[Move]:
    """Return a movement's lines the other way round, where it may be reversed (once, ever).

    Raises AlreadyReversed; NotReady for a reversal itself (a reversal isn't reversed: record
    what happened anew).
    """
    if movement.reverses_id:
        raise NotReady("A reversal isn't reversed. Record what happened as a new movement.", code="reversal of a reversal")
    if Movement.objects.filter(reverses=movement).exists():
        raise AlreadyReversed
    return [
        Move(source=line.target, target=line.source, grams=line.grams, origin=line.origin, error_g=line.error_g)
        for line in movement.lines.select_related("source__bottle", "target__bottle")
    ]


def _changes(moves: Sequence[Move]) -> dict[int, int]:
    changes: dict[int, int] = defaultdict(int)
    for move in moves:
        changes[move.source.pk] -= move.grams
        changes[move.target.pk] += move.grams
    return changes


def _with_what_was_found(moves: list[Move]) -> list[Move]:
    """Add what a bottle must have held beyond its books, so that none falls below nothing."""
    changes = _changes(moves)
    bottles = Account.objects.filter(pk__in=changes, kind="bottle").in_bulk()
    found = []
    for key, account in sorted(bottles.items()):
        short = -(account.balance_g + changes[key])
        if short > 0:
            found.append(Move(source=own_account("unaccounted"), target=account, grams=short, origin="computed"))
    return moves + found
