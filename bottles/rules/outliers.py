"""A refill far outside its band: whether it is, and what likely lies behind it, best supported first.

Weights of evidence are common practice, no source: a trace that only this cause leaves comes first,
then what makes it likelier, then what can't be ruled out.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

Strength = Literal["points to it", "makes it likelier", "can't be ruled out"]
ORDER: tuple[Strength, ...] = ("points to it", "makes it likelier", "can't be ruled out")

_FAR = 3.0  # standard deviations
_MOST_CAUSES = 4
_BELIEVABLE_K = 15.0  # a thermometer misread, or held elsewhere, by no more than that
_LONG_MINUTES = 60
_NEARLY_OUT = 0.1  # of what was in the supply bottle
_NUMBER = re.compile(r"\s*(\d+(?:[.,]\d+)?)\s*[a-z]*\s*", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Span:
    """What was forecast for a refill and what came over, in grams."""

    low_g: int
    likely_g: int
    high_g: int
    came_g: int
    error_g: int
    at_limit: bool = False

    @property
    def off_g(self) -> int:
        """What came less what was likely."""
        return self.came_g - self.likely_g

    @property
    def inside(self) -> bool:
        """Whether it lies within the band, as far as the weighings can tell."""
        return self.low_g - self.error_g <= self.came_g <= self.high_g + self.error_g

    @property
    def far(self) -> bool:
        """Whether it lies so far outside that a sound refill hardly ever does."""
        if self.inside or (self.at_limit and self.off_g > 0):  # the valve was closed there
            return False
        half = self.likely_g - self.low_g if self.off_g < 0 else self.high_g - self.likely_g
        return abs(self.off_g) > _FAR * math.hypot(half / 2, self.error_g / 2)


@dataclass(frozen=True, slots=True)
class Typed:
    """A weight as it was typed, and the grams that it was taken for."""

    text: str
    grams: int


@dataclass(frozen=True, slots=True)
class Traces:
    """What else is known of a refill."""

    before: Typed
    after: Typed
    tares_differ: bool = False
    missing_g: int = 0  # left the supply bottle by its scale and didn't arrive
    found_g: int = 0  # arrived beyond what the supply bottle lost by its scale
    supply_by_books: bool = False
    supply_left_g: int | None = None  # as forecast
    supply_held_g: int | None = None
    liquid_out: bool = False  # as forecast
    not_vented: bool = False
    start: str = "weighed"
    supply_in_air: bool = False  # its temperature was read in the air beside it
    bottle_in_air: bool = False
    supply_kg_k: float = 0.0  # what a kelvin is worth
    bottle_kg_k: float = 0.0
    minutes: int = 0
    same_bottle_off: int = 0  # its other refills that went out of their bands on the same side


@dataclass(frozen=True, slots=True)
class Cause:
    """A likely cause: what it is, what speaks for it, how strongly."""

    code: str
    sentence: str
    strength: Strength


def causes(span: Span, traces: Traces) -> tuple[Cause, ...]:
    """Return likely causes of a refill far outside its band, the best supported first, four at most."""
    found = list(_less(traces, span) if span.off_g < 0 else _more(traces, span))
    found += _either(traces, span)
    found.sort(key=lambda one: ORDER.index(one.strength))  # a stable sort: the usual ones first within each
    return tuple(found[:_MOST_CAUSES])


def slip(span: Span, traces: Traces) -> str:
    """Return which weight, typed with two digits swapped or one off by one, would fit the band; empty where none."""
    for kind, variants in (("two digits swapped", _swapped), ("one digit off by one", _off_by_one)):
        for name, sign, typed in (("after filling", 1, traces.after), ("before filling", -1, traces.before)):
            match = _NUMBER.fullmatch(typed.text)
            if match is None:
                continue
            number = match[1]
            each = typed.grams / (float(number.replace(",", ".")) or 1.0)
            for other in variants(number):
                change = (float(other.replace(",", ".")) - float(number.replace(",", "."))) * each
                came = span.came_g + sign * change
                if abs(change) > abs(span.off_g) / 2 and span.low_g - span.error_g <= came <= span.high_g + span.error_g:
                    return f"{name} {typed.text.strip()} was typed; {other} would fit ({kind})"
    return ""


def _less(traces: Traces, span: Span) -> Iterator[Cause]:
    if traces.missing_g > 0:
        yield Cause("leak", "The supply bottle lost more by its scale than arrived: look for a leak of hose or fittings.",
                    "points to it")  # fmt: skip
    if traces.not_vented:
        yield Cause("not vented", "By its weight the bottle wasn't vented: its own pressure held the flow back.", "points to it")
    nearly_out = (
        traces.supply_left_g is not None and traces.supply_held_g is not None
        and traces.supply_left_g < _NEARLY_OUT * traces.supply_held_g
    )  # fmt: skip
    if traces.liquid_out or nearly_out:
        yield Cause("supply out", "The supply bottle was near the end of its liquid: weigh it.", "makes it likelier")
    elif traces.supply_by_books:
        yield Cause("supply out", "What the supply bottle held was known by the books alone, and may have been less: weigh it.",
                    "makes it likelier")  # fmt: skip
    if traces.start == "air":
        yield Cause("air", "The bottle held air that was never purged, and how much isn't known.", "makes it likelier")
    elif not traces.not_vented:
        yield Cause("air", "Air left in the bottle, or vapour of its own: vent and purge it before filling.", "can't be ruled out")


def _more(traces: Traces, span: Span) -> Iterator[Cause]:
    if traces.found_g > 0:
        yield Cause("scale", "More arrived than the supply bottle lost by its scale: one of both scales or tares is wrong.",
                    "points to it")  # fmt: skip
    if traces.minutes >= _LONG_MINUTES:
        yield Cause("long", f"It was open for {traces.minutes} minutes: kept cold for long, a bottle takes more than quickly.",
                    "makes it likelier")  # fmt: skip
    if traces.supply_by_books:
        yield Cause("supply more", "What the supply bottle held was known by the books alone, and may have been more: weigh it.",
                    "makes it likelier")  # fmt: skip
    yield Cause("ice", "Ice or water on the bottle when it was weighed after filling.", "can't be ruled out")


def _either(traces: Traces, span: Span) -> Iterator[Cause]:
    fits = slip(span, traces)
    if fits:
        yield Cause("typed", f"A weight typed wrong: {fits}.",
                    "points to it" if "swapped" in fits else "makes it likelier")  # fmt: skip
    if traces.tares_differ:
        yield Cause("tare", "It was weighed before and after with two different tares: something was fitted between.",
                    "points to it")  # fmt: skip
    elif traces.same_bottle_off:
        other = "another refill" if traces.same_bottle_off == 1 else f"{traces.same_bottle_off} other refills"
        yield Cause("tare", f"The tare, the capacity or the wall: {other} of this bottle went out of the band on the same side.",
                    "makes it likelier")  # fmt: skip
    yield from _temperatures(traces, span)
    if not fits:
        yield Cause("typed", "A weight typed wrong, or another bottle on the scale.", "can't be ruled out")


def _temperatures(traces: Traces, span: Span) -> Iterator[Cause]:
    for name, kg_k, in_air, words in (
        ("bottle temperature", traces.bottle_kg_k, traces.bottle_in_air, ("warmer", "colder")),
        ("supply temperature", traces.supply_kg_k, traces.supply_in_air, ("colder", "warmer")),
    ):
        degrees = abs(span.off_g) / 1000 / kg_k if kg_k > 0 else math.inf
        if degrees > _BELIEVABLE_K:
            continue
        which = "bottle to fill" if name.startswith("bottle") else "supply bottle"
        way = words[0] if span.off_g < 0 else words[1]
        read = ", whose temperature was read in the air beside it" if in_air else ""
        yield Cause(name, f"The {which}{read}, may have been {way} by about {max(1, round(degrees))} K than was read."
                    if read else f"The {which} may have been {way} by about {max(1, round(degrees))} K than was read.",
                    "makes it likelier" if in_air else "can't be ruled out")  # fmt: skip


def _swapped(number: str) -> Iterator[str]:
    digits = [place for place, sign in enumerate(number) if sign.isdigit()]
    for one, two in pairwise(digits):
        if number[one] != number[two]:
            signs = list(number)
            signs[one], signs[two] = signs[two], signs[one]
            yield "".join(signs)


def _off_by_one(number: str) -> Iterator[str]:
    for place, sign in enumerate(number):
        if sign.isdigit():
            for other in (int(sign) - 1, int(sign) + 1):
                if 0 <= other <= 9:
                    yield number[:place] + str(other) + number[place + 1 :]
