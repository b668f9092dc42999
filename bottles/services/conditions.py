"""What is wrong with a bottle, until something ends it; and the two ends of a bottle's life here.

- A condition stops the bottle, whatever its stamps say, until a second row ends it.
- *Condemned* is a condition that nothing ends.
- *Retired* takes the bottle out of the register's daily use: nothing more is recorded of it.
"""

from __future__ import annotations

import uuid
from datetime import date

from django.db import IntegrityError, transaction

from bottles.models import Bottle, Condition, ConditionEnd, Refill, Supply
from bottles.services.cleaning import clean
from bottles.services.refusals import Final, locked
from bottles.services.standing import restate
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.people.models import User

CONDEMNED = "condemned"


def note_condition(
    *, key: uuid.UUID, person: User | None, bottle: Bottle, code: str, seen_on: date, note: str = ""
) -> Condition:
    """Note something that is wrong with a bottle; it isn't filled until that is ended.

    Raises Retired; NotReady where the same is open already; Refusal for a day still to come.
    """
    if seen_on > clock.today():
        raise Refusal("That day is still to come. Give the day on which it was seen.", code="in the future", field="seen_on")
    with acts.begin(
        key=key, person=person, code="bottle.condemned" if code == CONDEMNED else "bottle.condition noted",
        subject=f"bottle:{bottle.code}", reason=note.strip(), changes={"code": code, "seen_on": str(seen_on)},
    ) as act:
        locked(bottle)
        if Condition.objects.filter(bottle=bottle, code=code, end__isnull=True).exists():
            raise NotReady("That is noted already and still open.", code="noted already", field="code")
        kept = Condition(act=act, bottle=bottle, code=code, note=note.strip(), seen_on=seen_on)
        clean(kept)
        kept.save()
        restate(bottle)
    return kept


def end_condition(*, key: uuid.UUID, person: User | None, condition: Condition, how: str) -> ConditionEnd:
    """End a condition: what was repaired, tested or looked at again.

    Raises Final for a condemned bottle; Retired; NotReady where it was ended already.
    """
    if not how.strip():
        raise Refusal("Say what ended it: the repair and who did it, the test, the second look.", code="no reason", field="how")
    if condition.code == CONDEMNED:
        raise Final
    bottle = condition.bottle
    with acts.begin(
        key=key, person=person, code="bottle.condition ended", subject=f"bottle:{bottle.code}", reason=how.strip(),
        changes={"code": condition.code},
    ) as act:
        locked(bottle)
        end = ConditionEnd(act=act, condition=condition, how=how.strip())
        clean(end)
        try:
            with transaction.atomic():
                end.save()
        except IntegrityError:
            raise NotReady("This was ended already. Look at the bottle's page.", code="ended already") from None
        restate(bottle)
    return end


def retire(*, key: uuid.UUID, person: User | None, bottle: Bottle, reason: str) -> None:
    """Take a bottle out of the register for good; its code isn't used again.

    Raises Retired where it was already; NotReady while it's being filled or hangs on a station.
    """
    if not reason.strip():
        raise Refusal("Say why it leaves the register, and where it went.", code="no reason", field="reason")
    with acts.begin(
        key=key, person=person, code="bottle.retired", subject=f"bottle:{bottle.code}", reason=reason.strip()
    ) as act:
        bottle = locked(bottle)
        if Refill.objects.filter(bottle=bottle, closed_at__isnull=True).exists():
            raise NotReady("It's being filled. Close that refill first.", code="open refill")
        if supply := Supply.objects.filter(bottle=bottle).select_related("station").first():
            raise NotReady(f"It's connected to {supply.station}. Take it off there first.", code="on a station")
        Bottle.objects.filter(pk=bottle.pk).update(retired_at=act.recorded_at, version=bottle.version + 1)
        restate(bottle)
