"""The refusals a person can meet, as one tree.

Refusal             what was asked can't be done; says why and what to do
├─ AlreadyDone      the same form arrived before; the first arrival holds
├─ Stale            the thing was changed by someone else since the form was drawn
├─ NotAllowed       this person may not do this
├─ Unknown          the thing named isn't in the register
└─ NotReady         the thing isn't in a state in which this can be done

Each app adds its own below these. A test asserts the code, never the sentence.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from shop.base.models import Act


class Refusal(Exception):
    """What was asked can't be done. Check what was entered and try again."""

    code = "refused"

    def __init__(self, sentence: str = "", *, code: str = "", field: str | None = None) -> None:
        self.sentence = sentence or (type(self).__doc__ or "").strip()
        if code:
            self.code = code
        self.field = field
        super().__init__(self.sentence)


class AlreadyDone(Refusal):
    """This was saved already; what was saved first holds, nothing was saved twice."""

    code = "already done"

    def __init__(self, act: Act) -> None:
        super().__init__()
        self.act = act


class Stale(Refusal):
    """Someone else changed this meanwhile. Both texts are shown: keep one and save again."""

    code = "stale"

    def __init__(self, sentence: str = "", *, theirs: dict[str, str] | None = None, version: int = 0) -> None:
        super().__init__(sentence)
        self.theirs = theirs or {}
        self.version = version


class NotAllowed(Refusal):
    """Your roles don't allow this. Ask a manager."""

    code = "not allowed"


class Unknown(Refusal):
    """That isn't in the register. Check the code, or register it first."""

    code = "unknown"


class NotReady(Refusal):
    """That can't be done now. Look at the page again for what it waits for."""

    code = "not ready"
