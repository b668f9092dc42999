"""A country's rules as dated data, each row with its citation and its basis.

A rule set is one file in ``editions/``. A new edition is a new file that applies from
its date; a released file is never edited (a test holds its hash), so that what was
decided under it stays explained. The first edition of a country also answers for the
days before it: nothing older is kept here.

A mark that an edition has no row for can't be judged under it. It is never judged by
the row of a mark that looks like it.
"""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

from bottles.rules.marks import Pressure, SpecMark
from bottles.rules.specifications import Wall
from shop.rules.origin import Origin

Receiver = Literal["yes", "no", "per permit"]
Refusal = Literal["not refillable", "not on the row", "foreign", "aircraft use only"]
StampOrder = Literal["month first", "year first"]
MonthRule = Literal["through due month", "from first day"]
WaterCode = Literal["us", "p200"]


_RANKS: dict[Refusal | None, int] = {None: 1, "foreign": 2}


@dataclass(frozen=True, slots=True)
class Cited:
    """What a rule rests on: its citation, its basis and a note."""

    citation: str
    basis: Origin
    note: str = ""


@dataclass(frozen=True, slots=True)
class SpecRow:
    """What an edition says of one or several specifications.

    ``interval_years`` is None where no interval for nitrous oxide is known, or, with
    ``no_test``, where none is asked.
    """

    specifications: tuple[str, ...]
    walls: tuple[Wall, ...] | None
    receiver: Receiver
    refused_because: Refusal | None
    interval_years: int | None
    star_interval_years: int | None
    no_test: bool
    least_service_pressure: Pressure | None
    deemed_service_pressure: Pressure | None
    least_test_pressure_bar: int | None
    service_life_years: int | None
    service_life_is_marked: bool
    expansion_limit_percent: int | None
    source: Cited


@dataclass(frozen=True, slots=True)
class FillingRow:
    """A filling ratio in thousandths, and the least test pressure that it needs."""

    least_test_pressure_bar: int | None
    per_mille: int
    source: Cited


@dataclass(frozen=True, slots=True)
class LookItem:
    """One item of the look that the filler owes before each fill.

    ``failed`` is the condition that a failed item notes; None where a failed item is put
    right on the spot.
    """

    code: str
    words: str
    when: Literal["always", "star"]
    failed: str | None
    source: Cited


@dataclass(frozen=True, slots=True)
class RuleEdition:
    """One dated rule set of one jurisdiction."""

    code: str
    jurisdiction: str
    title: str
    authority: str
    in_force_from: datetime.date
    stamp_order: StampOrder
    year_only_from_interval_years: int | None
    words: Mapping[str, str]
    month_rule: MonthRule
    expansion_limit_percent: int | None
    expansion_source: Cited
    water: WaterCode
    water_source: Cited
    filling: tuple[FillingRow, ...]
    rows: tuple[SpecRow, ...]
    rules: Mapping[str, Cited]
    look: tuple[LookItem, ...]
    sha256: str

    @property
    def year_first(self) -> bool:
        """Whether stamps put the year first."""
        return self.stamp_order == "year first"

    def rule(self, code: str) -> Cited:
        """What a rule rests on here; a shop rule where this edition has none."""
        return self.rules.get(code, Cited("Shop rule", "common practice"))

    def row_for(self, mark: SpecMark | None, wall: Wall | None = None) -> MarkedRow | None:
        """The row for a mark, or None: then the bottle can't be judged here.

        Of a bottle with several marks the one of this country counts: a foreign one beside
        it takes nothing away, but one that may never be refilled does. A row for one kind
        of wall answers only where the wall is known.
        """
        if mark is None:
            return None
        found = [
            MarkedRow(each, row)
            for each in mark.each()
            for row in self.rows
            if each.spec in row.specifications and (row.walls is None or wall in row.walls)
        ]
        found.sort(key=lambda marked: _RANKS.get(marked.row.refused_because, 0))
        return found[0] if found else None

    def filling_row(self, mark: SpecMark | None) -> FillingRow | None:
        """The filling ratio for a mark: the largest that its test pressure reaches."""
        test = mark.test_pressure.number if mark and mark.test_pressure else None
        reached = [
            row
            for row in self.filling
            if row.least_test_pressure_bar is None or (test is not None and test >= row.least_test_pressure_bar)
        ]
        return max(reached, key=lambda row: row.per_mille, default=None)

    def expansion_limit(self, mark: SpecMark | None) -> int | None:
        """The largest permanent over total expansion in percent, where it is known."""
        marked = self.row_for(mark)
        if marked is not None and marked.row.expansion_limit_percent is not None:
            return marked.row.expansion_limit_percent
        return self.expansion_limit_percent


@dataclass(frozen=True, slots=True)
class MarkedRow:
    """A row, and which of the bottle's marks it is for."""

    mark: SpecMark
    row: SpecRow


def entered_by_hand(
    *,
    country: str,
    authority: str,
    citation: str,
    in_force_from: datetime.date,
    intervals: Mapping[str, int],
    per_mille: int,
    water: WaterCode,
    stamp_order: StampOrder,
    like: RuleEdition,
) -> RuleEdition:
    """A rule set that the manager entered for a country that has no file.

    ``intervals`` gives years by specification; a specification that isn't in it can't be
    judged. The look and the wording come from ``like``; every figure is the manager's,
    under the authority's name.
    """
    entered = Cited(citation or authority, "entered", f"Entered by hand for {country}.")
    rows = tuple(
        SpecRow(
            specifications=(spec,),
            walls=None,
            receiver="yes",
            refused_because=None,
            interval_years=years,
            star_interval_years=None,
            no_test=False,
            least_service_pressure=None,
            deemed_service_pressure=None,
            least_test_pressure_bar=None,
            service_life_years=None,
            service_life_is_marked=False,
            expansion_limit_percent=None,
            source=entered,
        )
        for spec, years in sorted(intervals.items())
    )
    return RuleEdition(
        code=f"{country}-by-hand-{in_force_from:%Y-%m-%d}",
        jurisdiction=country,
        title=f"{country}, entered by hand from {authority}",
        authority=authority,
        in_force_from=in_force_from,
        stamp_order=stamp_order,
        year_only_from_interval_years=None,
        words=like.words,
        month_rule="from first day",
        expansion_limit_percent=None,
        expansion_source=entered,
        water=water,
        water_source=entered,
        filling=(FillingRow(None, per_mille, entered),),
        rows=rows,
        rules=dict.fromkeys(like.rules, entered),
        look=like.look,
        sha256="",
    )


def in_force(editions: Iterable[RuleEdition], jurisdiction: str, on: datetime.date) -> RuleEdition | None:
    """The edition of a jurisdiction in force on a day: the latest, or the first of all."""
    of_country = sorted(
        (each for each in editions if each.jurisdiction == jurisdiction),
        key=lambda each: (each.in_force_from, each.code),
    )
    begun = [each for each in of_country if each.in_force_from <= on]
    if begun:
        return begun[-1]
    return of_country[0] if of_country else None
