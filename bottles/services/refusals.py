"""What the register refuses, each with its own code.

Refusal
├─ BottleKnown      the same maker, mark and serial number stand in the register already
├─ CodeTaken        the code belongs to another bottle; a code is never used twice
├─ Contradicted     two of the entries can't both be true
├─ Unconfirmed      the entries are unusual: they are taken once a person has ticked that they are right
└─ NotReady
   ├─ Retired       the bottle is out of the register for good
   └─ Final         a condemned bottle stays condemned
"""

from __future__ import annotations

from collections.abc import Sequence

from bottles.models import Bottle
from bottles.services.locking import lock
from shop.base.errors import NotReady, Refusal
from shop.rules.reason import Reason


class BottleKnown(Refusal):
    """This bottle is in the register already. Go to its page instead of registering it again."""

    code = "bottle known"

    def __init__(self, bottle: Bottle) -> None:
        self.bottle = bottle
        super().__init__(
            f"This serial number with this maker and mark is {bottle.code} already. Go to its page instead.",
            field="serial",
        )


class CodeTaken(Refusal):
    """This code belongs to another bottle. Leave it empty for the next free one."""

    code = "code taken"


class Contradicted(Refusal):
    """Two of the entries can't both be true. Read the bottle again."""

    code = "contradicted"

    def __init__(self, reasons: Sequence[Reason]) -> None:
        self.reasons = tuple(reasons)
        first = self.reasons[0]
        super().__init__(" ".join(filter(None, (first.sentence, first.next_step))), code=first.code)


class Unconfirmed(Refusal):
    """Something here is unusual. Read the bottle again, then tick what is right all the same."""

    code = "unconfirmed"

    def __init__(self, reasons: Sequence[Reason]) -> None:
        self.reasons = tuple(reasons)
        super().__init__()


class Retired(NotReady):
    """This bottle was retired: nothing more is recorded of it. Its page says when and why."""

    code = "retired"


class Final(NotReady):
    """A condemned bottle stays condemned: no repair or test brings it back into service."""

    code = "final"


def locked(bottle: Bottle) -> Bottle:
    """Lock one bottle and return it as it stands now; raise Retired where it's out for good."""
    now = lock([bottle])[bottle.pk]
    if now.retired_at is not None:
        raise Retired
    return now
