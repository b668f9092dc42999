"""What an open refill refuses, each with its own code.

NotReady
├─ Closed             the refill is closed already
├─ Overfull           the bottle holds more than its limit
├─ NotDisconnected    its latest weight was read with the line still on
└─ WetProvesNothing   wet or frosted, it can't be proven full
"""

from __future__ import annotations

from shop.base.errors import NotReady


class Closed(NotReady):
    """This refill is closed. Its receipt says how it ended."""

    code = "refill closed"


class Overfull(NotReady):
    """The bottle holds more than its limit. Let nitrous out outdoors until it weighs no more than that, then close."""

    code = "overfull"


class NotDisconnected(NotReady):
    """Disconnect the line, weigh the bottle so, and close then: the weight without the line counts."""

    code = "not disconnected"


class WetProvesNothing(NotReady):
    """Wet or frosted, a bottle can't be proven full: ice counts as grams. Dry it and weigh again, or close it otherwise."""

    code = "wet"
