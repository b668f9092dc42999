"""What physics refuses, as one tree.

PhysicsError
├── QuantityError    what was typed isn't a quantity that can be stored
├── OutOfRange       a number lies outside what a function is valid for
├── Contradiction    two given figures can't both be true
└── NoSolution       the equations have no answer for the figures given

Each error carries a stable ``code`` (what tests and pages go by) and a sentence
(what a person reads: what is wrong and what to do). The sentence of the class is
the default; the place that raises usually knows a better one.

>>> raise OutOfRange("below_triple_point")  # doctest: +IGNORE_EXCEPTION_DETAIL
Traceback (most recent call last):
OutOfRange: This figure lies outside the range that can be computed. Check it ...
"""

from __future__ import annotations


class PhysicsError(Exception):
    """Anything that physics refuses to answer."""

    code: str = "physics"
    sentence: str = "This can't be computed from the figures given. Check them and try again."

    def __init__(self, code: str | None = None, sentence: str | None = None) -> None:
        self.code = code if code is not None else type(self).code
        self.sentence = sentence if sentence is not None else type(self).sentence
        super().__init__(self.code, self.sentence)

    def __str__(self) -> str:
        return self.sentence


class QuantityError(PhysicsError):
    """What was typed isn't a quantity that can be stored."""

    code = "quantity"
    sentence = "This isn't a quantity. Write a number and its unit."


class OutOfRange(PhysicsError):
    """A number lies outside what a function is valid for."""

    code = "out_of_range"
    sentence = "This figure lies outside the range that can be computed. Check it and its unit."


class Contradiction(PhysicsError):
    """Two given figures can't both be true."""

    code = "contradiction"
    sentence = "Two of these figures can't both be true. Read them again, or weigh the bottle."


class NoSolution(PhysicsError):
    """The equations have no answer for the figures given."""

    code = "no_solution"
    sentence = "There is no answer for these figures. Check each of them and its unit."
