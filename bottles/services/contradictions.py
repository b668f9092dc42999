"""Refuse what can't be true of a bottle, and ask about what is unusual.

A bottle may be registered with what really stands on it, however wrong it is for nitrous: then
its page says that it must not be filled. So only what can't be true at all is refused; the rest
is shown while the bottle lies there to be read again, and taken once each point is confirmed.
What simply isn't known yet is no contradiction: the bottle's page lists it.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence

from bottles.models import Bottle
from bottles.rules.register import contradictions
from bottles.selectors.facts import facts_of
from bottles.selectors.judging import rulebook
from bottles.selectors.twins import twins_of
from bottles.services.refusals import Contradicted, Unconfirmed
from bottles.services.standing import restate
from shop.base.models import Shop
from shop.rules.reason import Reason

IMPOSSIBLE = frozenset({"test-before-manufacture", "life-before-manufacture", "test-after-day"})
LATER = frozenset({"composite-without-life", "permit-missing", "wall-needed", "stamp-without-month"})


def unusual(bottle: Bottle) -> list[Reason]:
    """Return what contradicts itself or the rules in what is written of a bottle now."""
    book = rulebook(Shop.objects.get())
    tare = restate(bottle).tare
    facts = facts_of([bottle])[bottle.pk]
    found = contradictions(facts, book.edition, book.on, tare_g=tare.total_g if tare else None)
    return _told_twice(bottle) + [reason for reason in found if reason.code not in LATER]


def refuse_contradictions(
    bottle: Bottle, *, confirmed: Collection[str] = (), before: Sequence[Reason] = ()
) -> None:
    """Raise Contradicted or Unconfirmed for what is new since `before`; within the act's transaction."""
    known = {(reason.code, reason.sentence) for reason in before}
    found = [reason for reason in unusual(bottle) if (reason.code, reason.sentence) not in known]
    impossible = [reason for reason in found if reason.code in IMPOSSIBLE]
    if impossible:
        raise Contradicted(impossible)
    if {reason.code for reason in found} - set(confirmed):
        raise Unconfirmed(found)


def _told_twice(bottle: Bottle) -> list[Reason]:
    twin = twins_of(maker=bottle.maker, mark=bottle.mark, serial=bottle.serial, but=bottle.pk).perhaps
    if twin is None:
        return []
    return [
        Reason(
            code="serial-known",
            severity="warns",
            sentence=f"{twin.code} has the same serial number, and maker or mark isn't known of both.",
            next_step="Right only if it's another bottle: compare maker and mark on the metal.",
            citation="",
            basis="entered",
            values=(("code", twin.code),),
        )
    ]
