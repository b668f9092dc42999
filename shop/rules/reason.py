"""A reason: why a rule said what it said, as data.

A page shows the sentence, a test asserts the code, a record keeps the values. Severity
says what the reason does to the question it answers:

- ``refuses``   the answer is no, whatever else is true
- ``unknown``   nobody here can answer: a rule or a mark is missing
- ``first``     something has to be read, weighed, asked or done before the answer is yes
- ``warns``     the answer stands, with something to know
- ``explains``  how a figure or a date came about
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

from shop.rules.origin import Origin, caution

Severity = Literal["refuses", "unknown", "first", "warns", "explains"]
Value = str | int | None

SEVERITIES: tuple[Severity, ...] = ("refuses", "unknown", "first", "warns", "explains")


@dataclass(frozen=True, slots=True)
class Reason:
    """One reason: stable code, severity, words, and what it rests on.

    ``about`` names the questions it bears on ('filling', 'emptying', 'limit', …), and
    ``values`` the figures that the sentence was filled with.
    """

    code: str
    severity: Severity
    sentence: str
    next_step: str
    citation: str
    basis: Origin
    about: tuple[str, ...] = ()
    values: tuple[tuple[str, Value], ...] = ()

    @property
    def caution(self) -> str:
        """The caution owed where this reason rests on memory or habit; else empty."""
        return caution(self.basis)

    def as_dict(self) -> dict[str, object]:
        """The reason as plain data, ready to be kept or sent as JSON."""
        return {
            "code": self.code,
            "severity": self.severity,
            "sentence": self.sentence,
            "next_step": self.next_step,
            "citation": self.citation,
            "basis": self.basis,
            "caution": self.caution,
            "about": list(self.about),
            "values": dict(self.values),
        }


def in_order(reasons: Iterable[Reason]) -> tuple[Reason, ...]:
    """Reasons with the refusing ones first, else in the order in which they were found.

    What is said twice word for word, about the same questions, is kept once.
    """
    seen: set[Reason] = set()
    kept: list[Reason] = []
    for reason in reasons:
        if reason not in seen:
            seen.add(reason)
            kept.append(reason)
    return tuple(sorted(kept, key=lambda reason: SEVERITIES.index(reason.severity)))
