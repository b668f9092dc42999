"""Bottles that may be the same one, told twice."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.models import Bottle
from bottles.rules.marks import read_mark


@dataclass(frozen=True, slots=True)
class Twins:
    """Those with the same maker, mark and serial number; and those of which not all is known."""

    same: Bottle | None
    perhaps: Bottle | None


def twins_of(*, maker: str, mark: str, serial: str, but: int | None = None) -> Twins:
    """Look for a bottle told twice: capitals don't count, nor how a mark is spaced.

    A maker or a mark that isn't known on one side may be the same; then only a person can tell.
    """
    if not serial:
        return Twins(None, None)
    same = perhaps = None
    for other in Bottle.objects.filter(serial__iexact=serial).order_by("pk"):
        if other.pk == but:
            continue
        makers = _alike(maker, other.maker)
        marks = _alike(mark, other.mark) or _read_alike(mark, other.mark)
        if makers and marks:
            same = same or other
        elif (makers or not maker or not other.maker) and (marks or not mark or not other.mark):
            perhaps = perhaps or other
    return Twins(same, perhaps)


def _alike(one: str, other: str) -> bool:
    return one.casefold() == other.casefold()


def _read_alike(one: str, other: str) -> bool:
    first, second = read_mark(one), read_mark(other)
    told = (first.spec, first.service, first.test_pressure)
    return first.spec is not None and told == (second.spec, second.service, second.test_pressure)
