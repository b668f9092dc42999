"""Read a specification mark as it is stamped on a bottle.

>>> read_mark("DOT-3AL1800").spec
'DOT-3AL'
>>> read_mark("TC-3ALM124").service
Pressure(number=124, unit='bar')
>>> read_mark("ISO 7866 PH180").test_pressure
Pressure(number=180, unit='bar')

A mark says who allowed the bottle (DOT, TC, UN, pi …), how it is made (3AL, ISO 7866 …)
and for which pressure. The same digits mean different pressures: DOT stamps psi, TC and
ISO stamp bar, and ISO's PH is the *test* pressure while DOT's number is the *service*
pressure. So the unit is kept with the number and never guessed from its size.

What isn't in the list of specifications stays unknown (``spec`` is None): a mark is
never taken for one that looks like it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import Literal

from bottles.rules.specifications import Specification, specifications

PressureUnit = Literal["psi", "bar"]


@dataclass(frozen=True, slots=True)
class Pressure:
    """A pressure as stamped: its number and the unit that its mark implies (gauge)."""

    number: int
    unit: PressureUnit

    def pascals(self) -> float:
        """Gauge pressure in pascal, for comparing marks of different units."""
        return self.number * (6894.757293168 if self.unit == "psi" else 1e5)

    def __str__(self) -> str:
        return f"{self.number} {self.unit}"


@dataclass(frozen=True, slots=True)
class SpecMark:
    """A mark as understood; ``spec`` is None where the list doesn't know it.

    ``also`` holds the other marks of a bottle marked for more than one country.
    """

    typed: str
    spec: str | None = None
    service: Pressure | None = None
    test_pressure: Pressure | None = None
    permit: str | None = None
    country: str | None = None
    also: tuple[SpecMark, ...] = field(default=())

    @property
    def specification(self) -> Specification | None:
        """What the list says of this specification, or None."""
        return specifications().get(self.spec) if self.spec else None

    def each(self) -> Iterator[SpecMark]:
        """This mark and the others on the same bottle."""
        yield replace(self, also=()) if self.also else self
        yield from self.also


_AUTHORITY = r"(?:DOT|ICC|CTC|CRC|BTC|TC)"
_PERMIT = re.compile(r"(DOT|TC)[ -]*(SP|E|SU)[ -]*(\d{3,6})(?:[ -]+(\d{3,5})(?: ?(PSIG?|BAR))?)?")
_SPEC = re.compile(
    rf"({_AUTHORITY})[ -]*"
    r"([348][A-Z]{0,3}?M?|39M?|4B240(?:ET|FLW)|8AL)"
    r"(?:[ -]*(?:NRC)?[ -]*(\d{2,4})(?:/\d{2,4})?(?: ?(PSIG?|BAR))?|[ -]*NRC)?"
)
_STANDARD = re.compile(r"(?:EN )?ISO ?-?(\d{4,5})(?: ?- ?(\d))?|EN ?(\d{4,5})(?: ?- ?(\d))?")
_PH = re.compile(r"\bP[HT] ?(\d{2,4})(?: ?BAR)?\b")
_PW = re.compile(r"\bPW ?(\d{2,4})(?: ?BAR)?\b")
_COUNTRY = re.compile(r"\b(USA|CAN)\b")
_APPROVALS = (
    ("UN", re.compile(r"\bUN\b|\(U ?N\)")),
    ("pi", re.compile(r"\bPI\b|Π")),
    ("rho", re.compile(r"\bRHO\b|Ρ")),
)
_WORDS = {
    "FOREIGN": "foreign",
    "NONE": "unmarked",
    "NO MARK": "unmarked",
    "UNMARKED": "unmarked",
}


@lru_cache(maxsize=4096)
def read_mark(typed: str) -> SpecMark:
    """The mark typed, as a specification with its pressure; unknown stays unknown."""
    # Python's upper() turns the small pi and rho of the mark into the capital ones.
    text = re.sub(r"[\u2010-\u2015\u2212_]", "-", typed).upper().replace(",", " ")
    # A plus belongs to a test stamp and says nothing about the mark beside it.
    text = re.sub(r"\s+", " ", text).strip().rstrip("+ ")
    parts = [_one(part, typed) for part in _split(text)]
    if not parts:
        return SpecMark(typed)
    return replace(parts[0], also=tuple(parts[1:]))


def _split(text: str) -> list[str]:
    """The marks of a bottle stamped for several countries ('TC-3ALM124 / DOT-3AL1800')."""
    # 'ICC/DOT-3A…' and 'DOT/TC-…' name one specification under two authorities; the
    # last authority is the one whose unit the number is in.
    text = re.sub(rf"\b{_AUTHORITY} ?/ ?(?={_AUTHORITY}\b)", "", text)
    parts = re.split(rf"(?:^|[ /;&]+)(?={_AUTHORITY}\b[ -])", text)
    return [part.strip(" /;&") for part in parts if part.strip(" /;&")]


def _one(text: str, typed: str) -> SpecMark:
    if text in _WORDS:
        return SpecMark(typed, spec=_WORDS[text])
    if match := _PERMIT.fullmatch(text):
        return _permit(match, typed)
    if match := _SPEC.fullmatch(text):
        return _specification(match, typed)
    return _international(text, typed)


def _permit(match: re.Match[str], typed: str) -> SpecMark:
    authority, kind, number, pressure, unit = match.groups()
    spec = f"{authority}-{kind}"
    return SpecMark(
        typed,
        spec=spec if spec in specifications() else None,
        service=_pressure(pressure, unit, spec),
        permit=number,
    )


def _specification(match: re.Match[str], typed: str) -> SpecMark:
    authority, kind, pressure, unit = match.groups()
    spec = f"{authority}-{kind}"
    if spec not in specifications():
        return SpecMark(typed)
    return SpecMark(typed, spec=spec, service=_pressure(pressure, unit, spec))


def _pressure(number: str | None, unit: str | None, spec: str) -> Pressure | None:
    if number is None:
        return None
    known = specifications().get(spec)
    stamped: PressureUnit = known.pressure_unit if known else "psi"
    if unit is not None:
        stamped = "bar" if unit == "BAR" else "psi"
    return Pressure(int(number), stamped)


def _international(text: str, typed: str) -> SpecMark:
    approval = next((name for name, found in _APPROVALS if found.search(text)), None)
    standard = _STANDARD.search(text)
    test = _PH.search(text)
    working = _PW.search(text)
    country = _COUNTRY.search(text)
    if standard is None and approval in (None, "UN"):
        return SpecMark(typed)
    spec = approval or ""
    if standard is not None:
        iso, iso_part, en, en_part = standard.groups()
        name = f"ISO {iso}" if iso else f"EN {en}"
        number = iso_part or en_part
        spec = f"{spec} {name}{'-' + number if number else ''}".strip()
    left = text
    for pattern in (_STANDARD, _PH, _PW, _COUNTRY, *(found for _, found in _APPROVALS)):
        left = pattern.sub(" ", left)
    # Anything left over (a maker's mark, a word) means that this isn't the whole of a mark
    # that is known: digits of another standard could hide in it.
    if spec not in specifications() or re.search(r"[A-Z0-9]", left):
        return SpecMark(typed)
    return SpecMark(
        typed,
        spec=spec,
        service=Pressure(int(working[1]), "bar") if working else None,
        test_pressure=Pressure(int(test[1]), "bar") if test else None,
        country=country[1] if country else None,
    )
