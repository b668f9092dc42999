"""Post a movement at the time at which it happened, whenever it's recorded.

Entered late, it changes what the books said at every weighing after it. A weighing that rules
spoke already of what was in the bottle then, so what it had set is reversed and set anew: a vent
that was forgotten takes its grams back out of *unaccounted*, and today's books stay as they are.
Guarantees:

- at the first ruling weighing whose gap would pass its ±, the books are set to what they were
  there, so nothing changes after it;
- no level falls below nothing at any time, not only at the end: what must have been in the
  bottle beyond its books is booked as found, from *unaccounted*, in the same movement or, where
  something later went out, just before that.

Called inside an act's transaction, after its bottles are locked.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

from django.db.models import Q

from bottles.models import Account, Bottle, Line, Movement, Refill, Weighing
from bottles.physics.weighing import net_uncertainty
from bottles.selectors.history import History, Spoken, history_of
from bottles.services.gaps import Gap, end_unknown, note_unknown, other_side
from bottles.services.posting import Move, account_of, own_account, post, reversed_moves
from shop.base.models import Act

FOUND = "found: more went out then than the books held"
LATE = "set anew: something earlier was entered late, reversed or struck"


def book(
    *,
    act: Act,
    kind: str,
    happened_at: datetime,
    moves: Sequence[Move],
    refill: Refill | None = None,
    weighing: Weighing | None = None,
    note: str = "",
    reverses: Movement | None = None,
    order: int | None = None,
) -> Movement | None:
    """Post a movement and, where it's entered late, set anew what a later weighing had set.

    `order` is the act in whose place it stands among movements of the same instant: its own,
    where none is given; that of its weighing or of what it reverses.
    """
    moves = [move for move in moves if move.grams]
    key = (happened_at, order or act.pk)
    redos: list[_Redo] = []
    found: list[tuple[Account, datetime, int]] = []
    for account, grams in _bottles_in(moves):
        bottle = account.bottle
        if bottle is None or not grams or not _is_late(bottle, happened_at, reversal=reverses is not None):
            continue
        history = history_of(bottle)
        at = next((one for one in history.ruling if one.key > key and not _holds(history, one, grams)), None)
        at_once, later = history.shortfalls(key, at.key if at else None, grams)
        if at_once:
            moves.append(Move(source=own_account("unaccounted"), target=account, grams=at_once, origin="computed"))
        found += [(account, when, short) for when, short in later]
        changed = grams + at_once + sum(short for _, short in later)
        if at and changed:
            redos.append(_Redo(bottle, history, at, changed, reverses))
    steps = [step for redo in redos for step in redo.steps()]
    # What adds comes first and what takes away last, so that no balance dips on the way.
    for account, when, short in found:
        _post_found(act, account, when, short)
    for step in steps:
        if step.grams > 0:
            step.do(act)
    movement = post(
        act=act, kind=kind, happened_at=happened_at, moves=moves, refill=refill, weighing=weighing, note=note,
        reverses=reverses,
    )
    for step in steps:
        if step.grams < 0:
            step.do(act)
    return movement


def reverse(*, act: Act, movement: Movement) -> Movement | None:
    """Reverse a movement once, at the time of what it reverses: it never happened so.

    Raises AlreadyReversed; NotReady for a reversal itself.
    """
    first = movement.weighing.act_id if movement.weighing else movement.act_id
    return book(
        act=act, kind="reversal", happened_at=movement.happened_at, moves=reversed_moves(movement),
        refill=movement.refill, reverses=movement, order=first, note=act.reason[:200],
    )


@dataclass(frozen=True, slots=True)
class _Redo:
    """A weighing whose setting of the books is done anew, to the level that it had."""

    bottle: Bottle
    history: History
    at: Spoken
    changed_g: int  # what the late movement does to the bottle before it
    reverses: Movement | None

    def steps(self) -> list[_Step]:
        """Return the reversals of what the weighing had set, and the one movement in their place."""
        set_by: dict[int, int] = {}
        for change in self.history.own_changes(self.at):
            set_by[change.movement_id] = set_by.get(change.movement_id, 0) + change.grams
        rows = Movement.objects.select_related("weighing").in_bulk(list(set_by))
        steps = [_Step(self, -grams, rows[pk]) for pk, grams in sorted(set_by.items())]
        return [*steps, _Step(self, sum(set_by.values()) - self.changed_g)]

    def is_opening(self) -> bool:
        """Whether nothing else is known of the contents before the weighing, so that it opens the books."""
        if self.reverses is None or self.history.last_ruling(self.at.key):
            return False
        return not any(
            change.key <= self.at.key and not change.reversal
            and change.weighing_id != self.at.weighing_id and change.movement_id != self.reverses.pk
            for change in self.history.changes
        )  # fmt: skip


@dataclass(frozen=True, slots=True)
class _Step:
    """One movement of a redo, by what it does to the bottle."""

    redo: _Redo
    grams: int
    reverses: Movement | None = None

    def do(self, act: Act) -> None:
        """Reverse what the weighing had set, or set it anew."""
        if self.reverses is not None:
            post(
                act=act, kind="reversal", happened_at=self.reverses.happened_at, moves=reversed_moves(self.reverses),
                reverses=self.reverses, note=LATE,
            )
            end_unknown(act=act, bottle=self.redo.bottle, noted_by=self.reverses.act_id, how=LATE)
            return
        bottle, at = self.redo.bottle, self.redo.at
        gap = Gap(self.grams, at.error_g, opening=self.redo.is_opening())
        side = other_side(bottle, self.redo.history, at, gap, anew=True)
        own = account_of(bottle)
        source, target = (side.account, own) if self.grams > 0 else (own, side.account)
        post(
            act=act, kind="opening" if gap.opening else "adjust", happened_at=at.key[0], note=act.reason[:200] or LATE,
            weighing=Weighing.objects.get(pk=at.weighing_id),
            moves=[Move(source=source, target=target, grams=abs(self.grams), origin="weighed", error_g=at.error_g)],
        )
        if side.unknown and gap.speaks:
            note_unknown(act=act, bottle=bottle, at=at)


def _post_found(act: Act, account: Account, when: datetime, grams: int) -> None:
    """Post what must have been in a bottle just before something took it."""
    moves = [Move(source=own_account("unaccounted"), target=account, grams=grams, origin="computed")]
    post(act=act, kind="adjust", happened_at=when - timedelta(microseconds=1), moves=moves, note=FOUND)


def _holds(history: History, at: Spoken, grams: int) -> bool:
    """Whether a weighing's gap stays within its ± when the level before it changes by so much."""
    gap = at.net_g - (history.level_at(at.key) + grams)
    return abs(gap) <= net_uncertainty(at.error_g, history.books_error(at))


def _bottles_in(moves: Sequence[Move]) -> list[tuple[Account, int]]:
    """Return the bottles' accounts of some moves, in order of key, with what happens to each."""
    accounts: dict[int, Account] = {}
    grams: dict[int, int] = {}
    for move in moves:
        for account, sign in ((move.source, -1), (move.target, 1)):
            if account.kind == "bottle":
                accounts[account.pk] = account
                grams[account.pk] = grams.get(account.pk, 0) + sign * move.grams
    return [(accounts[key], grams[key]) for key in sorted(accounts)]


def _is_late(bottle: Bottle, happened_at: datetime, *, reversal: bool) -> bool:
    """Whether something of the bottle is recorded that happened later (for a reversal: or then)."""
    later = "gte" if reversal else "gt"
    return (
        Weighing.objects.filter(bottle=bottle, strike__isnull=True, **{f"happened_at__{later}": happened_at}).exists()
        or Line.objects.filter(Q(source__bottle=bottle) | Q(target__bottle=bottle))
        .filter(**{f"movement__happened_at__{later}": happened_at})
        .exists()
    )
