"""Where a figure or a rule comes from: one word, shown beside it.

A number that is shown says how it was got; a rule says whether its text was read or is
from memory. Both use the words below, so that a page, a sheet and a record agree.
"""

from __future__ import annotations

from typing import Literal

Origin = Literal[
    "weighed",
    "computed",
    "common practice",
    "entered",
    "read",
    "read in part",
    "memory",
]

ORIGINS: tuple[Origin, ...] = (
    "weighed",
    "computed",
    "common practice",
    "entered",
    "read",
    "read in part",
    "memory",
)

# What a rule may rest on without a word of caution: its text was read, or the person
# responsible entered it.
_NEEDS_NO_CAUTION: frozenset[str] = frozenset({"weighed", "computed", "entered", "read"})


def is_verified(origin: Origin) -> bool:
    """Whether what has this origin may decide something without a caution beside it."""
    return origin in _NEEDS_NO_CAUTION


def caution(origin: Origin) -> str:
    """The caution owed where something of this origin decides; empty where none is."""
    if origin in ("memory", "read in part"):
        return "Not verified: check with your authority."
    if origin == "common practice":
        return "Common practice, no source: the shop decides."
    return ""
