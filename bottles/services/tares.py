"""Start a new tare: a dated list of what is on the bottle when it's weighed.

A new list starts a new tare; weighings made before it keep the tare they were judged with.
"""

from __future__ import annotations

import uuid
from collections.abc import Collection
from dataclasses import dataclass
from datetime import datetime

from bottles.models import Bottle, Tare, TarePart
from bottles.rules import tares as rules
from bottles.services.cleaning import clean
from bottles.services.contradictions import refuse_contradictions, unusual
from bottles.services.refusals import Unconfirmed, locked
from bottles.services.standing import latest_weighing, restate
from shop.base import acts, clock
from shop.base.errors import Refusal
from shop.base.models import Act
from shop.people.models import User
from shop.physics.units import Entry
from shop.rules.reason import Reason

LIGHTEST_G = 100
HEAVIEST_G = 400_000


@dataclass(frozen=True, slots=True)
class Part:
    """One thing that is on the bottle, with its weight as it was typed."""

    thing: str
    weight: Entry


@dataclass(frozen=True, slots=True)
class NewTare:
    """A list of things as it comes from a form: what it rests on, its ± where that was given."""

    parts: tuple[Part, ...]
    basis: str
    error_g: int | None = None  # None: worked out from how finely the figures were written
    scale_error_g: int = 0

    @property
    def total_g(self) -> int:
        """The sum of the things."""
        return sum(part.weight.stored for part in self.parts)

    @property
    def uncertain_g(self) -> int:
        """The ± of the sum: as given, else from the figures."""
        if self.error_g is not None:
            return self.error_g
        return rules.together(
            rules.error_of(part.weight.typed, part.weight.stored, part.weight.unit, scale_g=self.scale_error_g)
            for part in self.parts
        )


def start_tare(
    *,
    key: uuid.UUID,
    person: User | None,
    bottle: Bottle,
    tare: NewTare,
    since: datetime | None = None,
    confirmed: Collection[str] = (),
    reason: str = "",
) -> Tare:
    """Start a new tare from a moment on (now, where none is given).

    Raises Retired; Unconfirmed where the bottle last weighed less than this list with everything
    on (right only if something heavier was fitted since); Refusal where the list was already on
    the bottle at a weighing that shows less.
    """
    since = since or clock.now()
    with acts.begin(
        key=key, person=person, code="bottle.tare started", subject=f"bottle:{bottle.code}", reason=reason,
        changes={"total_g": tare.total_g, "parts": {part.thing: part.weight.stored for part in tare.parts}},
    ) as act:
        locked(bottle)
        before = unusual(bottle)
        _compare_with_weighing(bottle, tare, since, confirmed)
        kept = write_tare(act=act, bottle=bottle, tare=tare, since=since)
        refuse_contradictions(bottle, confirmed=confirmed, before=before)
        restate(bottle)
    return kept


def write_tare(*, act: Act, bottle: Bottle, tare: NewTare, since: datetime) -> Tare:
    """Insert a tare and its parts within an act's transaction."""
    if not LIGHTEST_G <= tare.total_g <= HEAVIEST_G:
        raise Refusal(
            "A bottle's tare lies between 100 g and 400 kg. Check the figures and their units.", code="tare out of range",
            field="tare",
        )
    kept = Tare(
        act=act, bottle=bottle, since=since, total_g=tare.total_g, error_g=tare.uncertain_g, basis=tare.basis
    )
    clean(kept)
    kept.save()
    for part in tare.parts:
        row = TarePart(act=act, tare=kept, thing=part.thing, grams=part.weight.stored, typed=part.weight.typed)
        clean(row)
        row.save()
    return kept


def _compare_with_weighing(bottle: Bottle, tare: NewTare, since: datetime, confirmed: Collection[str]) -> None:
    last = latest_weighing(bottle)
    if last is None or tare.total_g <= last.gross_g + last.error_g + tare.uncertain_g:
        return
    if last.happened_at >= since:
        raise Refusal(
            "With this list on it the bottle weighed less than the list itself. Check the figures and when it was fitted.",
            code="tare above gross", field="tare",
        )
    heavier = Reason(
        code="tare above gross",
        severity="warns",
        sentence=f"The bottle last weighed {last.typed} with everything on it, less than this tare.",
        next_step="Right only if something heavier was fitted since.",
        citation="",
        basis="weighed",
    )
    if heavier.code not in confirmed:
        raise Unconfirmed([heavier])
