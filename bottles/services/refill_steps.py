"""What happens while a refill is open: weigh, wait, go on from another supply bottle, close.

Guarantees: nitrous is posted at each weighing, closing posts nothing; a refill closes only on a
weighing with the line disconnected, at or below the limit; a wet weighing lets it close (ice only
adds to the reading) but never as *full*; what a scale said is kept whatever follows from it.
"""

from __future__ import annotations

import uuid
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from bottles.models import Draw, Refill, Supply, Weighing
from bottles.selectors.judging import judge_bottle
from bottles.selectors.refills import Course, course_of, draws_of, in_force
from bottles.services.forecasting import Answer, Asked, DangerSign
from bottles.services.learning import ask_to_learn
from bottles.services.locking import lock
from bottles.services.plan_again import plan_again
from bottles.services.refill_books import post_flows
from bottles.services.refill_refusals import Closed, NotDisconnected, Overfull, WetProvesNothing
from bottles.services.refilling import draw_on, refuse_source
from bottles.services.weighing import weigh_in
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.people.models import User
from shop.physics.units import Entry


@dataclass(frozen=True, slots=True)
class Weight:
    """What the scale says while a refill is open."""

    gross: Entry
    line_off: bool
    wet: bool = False
    supply_gross: Entry | None = None
    happened_at: datetime | None = None


@dataclass(frozen=True, slots=True)
class Weighed:
    """The weighing; whether the refill was closed by it, and else the sentence why not."""

    weighing: Weighing
    closed: bool = False
    why_not: str = ""


def weigh_refill(
    *, key: uuid.UUID, person: User | None, refill: Refill, weight: Weight, ended_by: str = "", close_when_full: bool = False
) -> Weighed:
    """Weigh the bottle being filled, post what moved, and close the refill where that was asked for.

    With `close_when_full` a weighing that proves a full fill closes it as *limit*. The weighing is
    kept even where the refill can't be closed on it. Raises Closed; NotReady where the supply bottle
    changed meanwhile; what `weigh_in` raises.
    """
    seen = draws_of(refill)
    with acts.begin(
        key=key, person=person, code="refill.weighed", subject=f"bottle:{refill.bottle.code}",
        changes={"refill": refill.pk, "line_off": weight.line_off},
    ) as act:
        refill, draws = _locked(refill, seen)
        weighing, course = _weigh(act, refill, draws, weight)
        if close_when_full and not ended_by and course.proves_full:
            ended_by = "limit"
        if not ended_by:
            return Weighed(weighing)
        try:
            _close(course, ended_by)
        except (Overfull, NotDisconnected, WetProvesNothing) as why:
            return Weighed(weighing, why_not=why.sentence)
        plan_again(act, refill.bottle.code)
    return Weighed(weighing, closed=True)


def wait(
    *, key: uuid.UUID, person: User | None, refill: Refill, version: int, until: datetime | None, note: str = ""
) -> None:
    """Let a refill wait ("chill until 15:40"), or go on where no time is given.

    Raises Closed; Stale where someone else changed it meanwhile.
    """
    if until is not None and until <= clock.now():
        raise Refusal("That time is past. Give a time to come, or leave it empty to go on.", code="past", field="until")
    if until is not None and (until - clock.now()).days >= 3:
        raise Refusal("That's longer than three days. Close the refill instead.", code="too long", field="until")
    with acts.begin(
        key=key, person=person, code="refill.waits", subject=f"bottle:{refill.bottle.code}",
        changes={"refill": refill.pk, "until": until.isoformat() if until else None, "note": note.strip()},
    ) as act:
        current, _ = _locked(refill)
        acts.update_master(current, version=version, values={"wait_until": until, "wait_note": note.strip()[:80] if until else ""})
        plan_again(act, refill.bottle.code)


def add_draw(
    *, key: uuid.UUID, person: User | None, refill: Refill, version: int, asked: Asked, answer: Answer, weight: Weight
) -> Draw:
    """Go on from another supply bottle: weigh first, so that what arrived belongs to the one before.

    Raises Closed, Overfull, DangerSign; Stale where someone else went on meanwhile; NotReady where
    the supply bottle was taken off or may not be emptied.
    """
    seen, supply = draws_of(refill), asked.supply
    draw = in_force(seen)
    with acts.begin(
        key=key, person=person, code="refill.supply changed", subject=f"bottle:{refill.bottle.code}",
        changes={"refill": refill.pk, "from": draw.source.code, "to": supply.bottle.code},
    ) as act:
        current, draws = _locked(refill, seen, also=supply)
        acts.update_master(current, version=version, values={"wait_until": None, "wait_note": ""})
        if supply.bottle_id == draw.source_id:
            raise NotReady(f"It's being filled from {supply.bottle.code} already.", code="same supply", field="supply")
        if supply.bottle_id == current.bottle_id:
            raise NotReady("A bottle isn't filled from itself. Choose a supply bottle.", code="same bottle", field="supply")
        if not Supply.objects.filter(pk=supply.pk, station_id=current.station_id).exists():
            raise NotReady(
                f"{supply.bottle.code} isn't connected to this station any more.", code="taken off", field="supply"
            )
        if answer.blocked:
            raise DangerSign(field="gauge")
        refuse_source(supply.bottle, judge_bottle(supply.bottle, shop=asked.shop))
        _, course = _weigh(act, current, draws, weight)
        if course.overfull is not None:
            raise Overfull
        new = draw_on(
            act=act, refill=current, asked=asked, answer=answer, reason="", happened_at=weight.happened_at or clock.now()
        )
        # What is posted once the line was taken over: the loss of the one before.
        post_flows(act=act, course=course_of(current), weighing=None)
        plan_again(act, refill.bottle.code)
    return new


def close_refill(*, key: uuid.UUID, person: User | None, refill: Refill, version: int, ended_by: str) -> None:
    """Close a refill on the weighing that was made with the line disconnected.

    Raises Closed, NotDisconnected, Overfull, WetProvesNothing, Stale.
    """
    with acts.begin(
        key=key, person=person, code="refill.closed", subject=f"bottle:{refill.bottle.code}",
        changes={"refill": refill.pk, "ended_by": ended_by},
    ) as act:
        current, draws = _locked(refill)
        _close(course_of(current, draws), ended_by, version=version)
        plan_again(act, refill.bottle.code)


def may_close(course: Course, ended_by: str) -> None:
    """Raise where a refill can't be closed: by its latest weighing, and as what."""
    last = course.reads[-1] if course.reads else None
    if course.overfull is not None:
        raise Overfull
    if last is None or last.step != "disconnected":
        raise NotDisconnected
    if last.wet and ended_by == "limit":
        raise WetProvesNothing(field="ended_by")


def _close(course: Course, ended_by: str, *, version: int | None = None) -> None:
    if ended_by not in dict(Refill.ENDS):
        raise Refusal("Say what ended the refill.", code="no end", field="ended_by")
    refill = course.refill
    may_close(course, ended_by)
    acts.update_master(
        refill, version=refill.version if version is None else version,
        values={
            "closed_at": max(clock.now(), course.reads[-1].happened_at), "ended_by": ended_by, "wait_until": None, "wait_note": "",
        },
    )  # fmt: skip
    ask_to_learn(refill)


def _weigh(act: Act, refill: Refill, draws: Sequence[Draw], weight: Weight) -> tuple[Weighing, Course]:
    """Insert what the scales say and post what moved; return the weighing, and the course with it."""
    station = refill.station
    if station.scale is None:
        raise NotReady(f"{station} has no scale any more. A manager can give it one.", code="no scale")
    pull = abs(station.hose_pull_g)
    weighing = weigh_in(
        act=act, bottle=refill.bottle, scale=station.scale, gross=weight.gross, wet=weight.wet,
        step="disconnected" if weight.line_off else "after", happened_at=weight.happened_at, refill=refill, settle=False,
        wider_g=0 if weight.line_off else pull,
    )  # fmt: skip
    if weight.supply_gross is not None:
        if station.supply_scale is None:
            raise Refusal("This station has no scale for its supply bottles.", code="no supply scale", field="supply_gross")
        weigh_in(
            act=act, bottle=in_force(draws).source, scale=station.supply_scale, gross=weight.supply_gross, wet=False, step="after",
            happened_at=weight.happened_at, refill=refill, settle=False,
        )  # fmt: skip
    course = course_of(refill, draws)
    post_flows(act=act, course=course, weighing=weighing)
    return weighing, course


def _locked(
    refill: Refill, seen: Sequence[Draw] = (), *, also: Supply | None = None
) -> tuple[Refill, tuple[Draw, ...]]:  # fmt: skip
    """Lock the bottles; return the refill and its draws as they stand now.

    `seen` are the draws that the desk went by. Raises Closed; NotReady where someone else went on
    from another supply bottle since then.
    """
    sources = [draw.source for draw in seen or draws_of(refill)]
    lock([refill.bottle, *sources, *([also.bottle] if also else [])])
    current = Refill.objects.select_related("bottle", "station__scale", "station__supply_scale").get(pk=refill.pk)
    if current.closed_at is not None:
        raise Closed
    draws = draws_of(current)
    if seen and in_force(draws).pk != in_force(seen).pk:
        raise NotReady(
            "Someone went on from another supply bottle meanwhile. Look at the page again, then weigh.", code="moved on"
        )
    return current, draws
