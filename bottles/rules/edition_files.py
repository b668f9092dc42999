"""Load the rule sets kept as files, and say clearly what is wrong with one that isn't right.

Every file is checked whole when it is loaded, field by field: a missing field, a field
too many, an unknown word or a specification that the list doesn't know stops the
program at start rather than a person at the counter.
"""

from __future__ import annotations

import datetime
import functools
import hashlib
import json
from importlib import resources
from typing import Any, cast, get_args

from bottles.rules.edition import (
    Cited,
    FillingRow,
    LookItem,
    MonthRule,
    Receiver,
    Refusal,
    RuleEdition,
    SpecRow,
    StampOrder,
    WaterCode,
    in_force,
)
from bottles.rules.marks import Pressure
from bottles.rules.specifications import Wall, specifications
from shop.rules.origin import ORIGINS

FORMAT = 1
RULES = (
    "overdue",
    "due month",
    "source when overdue",
    "service life",
    "condition",
    "overheated aluminium",
    "condemned",
    "consent",
    "legible",
    "plus",
    "star",
    "star broken",
    "filling by weight",
    "service pressure",
    "permit",
    "not refillable",
    "supplier",
    "contents",
    "look",
    "alloy 6351",
)
WORDS = ("test", "due", "house", "house_number", "visual")


class EditionError(ValueError):
    """A rule set's file isn't right; names the file, the place in it and what is wrong."""


@functools.cache
def editions() -> tuple[RuleEdition, ...]:
    """All rule sets that are shipped, checked."""
    folder = resources.files("bottles.rules").joinpath("editions")
    files = sorted((entry for entry in folder.iterdir() if entry.name.endswith(".json")), key=lambda entry: entry.name)
    found = [read_edition(entry.name, entry.read_bytes()) for entry in files if entry.name != "specifications.json"]
    codes = [each.code for each in found]
    if len(set(codes)) != len(codes):
        raise EditionError(f"two rule sets share a code: {sorted(codes)}")
    return tuple(found)


def edition_on(jurisdiction: str, on: datetime.date) -> RuleEdition | None:
    """The shipped rule set of 'US', 'CA' or 'ADR' for a day; None for any other."""
    return in_force(editions(), jurisdiction, on)


def edition_by_code(code: str) -> RuleEdition | None:
    """A shipped rule set by its code, to explain what was once decided under it."""
    return next((each for each in editions() if each.code == code), None)


def read_edition(name: str, content: bytes) -> RuleEdition:
    """A rule set out of the bytes of its file, or an EditionError."""
    try:
        data = json.loads(content)
    except ValueError as error:
        raise EditionError(f"{name}: isn't JSON ({error})") from error
    top = _Fields(name, "", data)
    if top.whole("format") != FORMAT:
        raise EditionError(f"{name}: format must be {FORMAT}")
    expansion = top.inside("expansion_limit")
    water = top.inside("water_definition")
    words = top.inside("words")
    rules = top.inside("rules")
    day = top.text("in_force_from")
    try:
        in_force_from = datetime.date.fromisoformat(day)
    except ValueError as error:
        raise EditionError(f"{name}: in_force_from isn't a date: {day!r}") from error
    edition = RuleEdition(
        code=top.text("code"),
        jurisdiction=top.text("jurisdiction"),
        title=top.text("title"),
        authority=top.text("authority"),
        in_force_from=in_force_from,
        stamp_order=cast(StampOrder, top.one_of("stamp_order", get_args(StampOrder))),
        year_only_from_interval_years=top.whole_or_none("year_only_from_interval_years"),
        words={word: words.text(word) for word in WORDS},
        month_rule=cast(MonthRule, top.one_of("month_rule", get_args(MonthRule))),
        expansion_limit_percent=expansion.whole_or_none("percent"),
        expansion_source=expansion.source(),
        water=cast(WaterCode, water.one_of("code", get_args(WaterCode))),
        water_source=water.source(),
        filling=tuple(_filling(row) for row in top.each("filling")),
        rows=tuple(_row(row) for row in top.each("rows")),
        rules={rule: _rule(rules, rule) for rule in rules.names()},
        look=tuple(_look(item) for item in top.each("look")),
        sha256=hashlib.sha256(content).hexdigest(),
    )
    for part in (expansion, water, words, top):
        part.nothing_more()
    _whole(name, edition)
    return edition


def _whole(name: str, edition: RuleEdition) -> None:
    """What has to hold across the rows of one file."""
    if missing := set(RULES) - set(edition.rules):
        raise EditionError(f"{name}: rules lack {sorted(missing)}")
    seen: set[tuple[str, str | None]] = set()
    for row in edition.rows:
        for spec in row.specifications:
            if spec not in specifications():
                raise EditionError(f"{name}: {spec!r} isn't in the list of specifications")
            for wall in row.walls or (None,):
                if (spec, wall) in seen:
                    raise EditionError(f"{name}: {spec} has two rows")
                seen.add((spec, wall))
        if (row.receiver == "no") != (row.refused_because is not None):
            raise EditionError(f"{name}: {row.specifications[0]}: refused_because goes with 'no'")
        if row.receiver != "no" and (row.interval_years is None) != row.no_test:
            raise EditionError(f"{name}: {row.specifications[0]}: an interval, or no_test")
    if not edition.filling or not edition.look:
        raise EditionError(f"{name}: filling and look can't be empty")


def _row(fields: _Fields) -> SpecRow:
    walls = fields.take("walls")
    refused = fields.take("refused_because")
    if refused is not None and refused not in get_args(Refusal):
        raise fields.wrong("refused_because", f"must be one of {get_args(Refusal)}")
    if walls is not None and not (isinstance(walls, list) and walls and all(wall in get_args(Wall) for wall in walls)):
        raise fields.wrong("walls", f"must be a list of {get_args(Wall)}")
    row = SpecRow(
        specifications=fields.texts("specifications"),
        walls=None if walls is None else tuple(walls),
        receiver=cast(Receiver, fields.one_of("receiver", get_args(Receiver))),
        refused_because=refused,
        interval_years=fields.whole_or_none("interval_years"),
        star_interval_years=fields.whole_or_none("star_interval_years"),
        no_test=fields.yes_no("no_test"),
        least_service_pressure=fields.pressure("least_service_pressure"),
        deemed_service_pressure=fields.pressure("deemed_service_pressure"),
        least_test_pressure_bar=fields.whole_or_none("least_test_pressure_bar"),
        service_life_years=fields.whole_or_none("service_life_years"),
        service_life_is_marked=fields.yes_no("service_life_is_marked"),
        expansion_limit_percent=fields.whole_or_none("expansion_limit_percent"),
        source=fields.source(),
    )
    fields.nothing_more()
    return row


def _rule(rules: _Fields, rule: str) -> Cited:
    fields = rules.inside(rule)
    cited = fields.source()
    fields.nothing_more()
    return cited


def _filling(fields: _Fields) -> FillingRow:
    row = FillingRow(fields.whole_or_none("least_test_pressure_bar"), fields.whole("per_mille"), fields.source())
    if row.per_mille > 1000:
        raise fields.wrong("per_mille", "can't be above 1000")
    fields.nothing_more()
    return row


def _look(fields: _Fields) -> LookItem:
    failed = fields.take("failed")
    if failed is not None and not isinstance(failed, str):
        raise fields.wrong("failed", "must be a condition or null")
    when = fields.one_of("when", ("always", "star"))
    item = LookItem(
        code=fields.text("code"),
        words=fields.text("words"),
        when="star" if when == "star" else "always",
        failed=failed,
        source=fields.source(note=False),
    )
    fields.nothing_more()
    return item


class _Fields:
    """One object of a file, its fields taken out one by one and checked."""

    def __init__(self, name: str, place: str, data: Any) -> None:
        self._name, self._place = name, place
        if not isinstance(data, dict):
            raise EditionError(f"{name}: {place or 'the file'} must be an object")
        self._left: dict[str, Any] = dict(data)

    def wrong(self, field: str, what: str) -> EditionError:
        return EditionError(f"{self._name}: {self._place}{field} {what}")

    def names(self) -> tuple[str, ...]:
        return tuple(self._left)

    def take(self, field: str) -> Any:
        if field not in self._left:
            raise self.wrong(field, "is missing")
        return self._left.pop(field)

    def nothing_more(self) -> None:
        if self._left:
            raise self.wrong(sorted(self._left)[0], "isn't a field known here")

    def text(self, field: str) -> str:
        value = self.take(field)
        if not isinstance(value, str) or not value.strip():
            raise self.wrong(field, "must be text")
        return value

    def texts(self, field: str) -> tuple[str, ...]:
        value = self.take(field)
        if not isinstance(value, list) or not value or not all(isinstance(v, str) for v in value):
            raise self.wrong(field, "must be a list of texts")
        return tuple(value)

    def one_of(self, field: str, allowed: tuple[str, ...]) -> str:
        value = self.take(field)
        if value not in allowed:
            raise self.wrong(field, f"must be one of {allowed}, not {value!r}")
        return str(value)

    def whole(self, field: str) -> int:
        value = self.take(field)
        if not isinstance(value, int) or isinstance(value, bool) or value <= 0:
            raise self.wrong(field, "must be a whole number above zero")
        return value

    def whole_or_none(self, field: str) -> int | None:
        if self._left.get(field, 0) is None:
            return cast(None, self.take(field))
        return self.whole(field)

    def yes_no(self, field: str) -> bool:
        value = self.take(field)
        if not isinstance(value, bool):
            raise self.wrong(field, "must be true or false")
        return value

    def pressure(self, field: str) -> Pressure | None:
        value = self.take(field)
        if value is None:
            return None
        inside = _Fields(self._name, f"{self._place}{field}.", value)
        unit = inside.one_of("unit", ("psi", "bar"))
        found = Pressure(inside.whole("number"), "bar" if unit == "bar" else "psi")
        inside.nothing_more()
        return found

    def source(self, *, note: bool = True) -> Cited:
        citation = self.take("citation")
        noted = self.take("note") if note else ""
        if not isinstance(citation, str) or not isinstance(noted, str):
            raise self.wrong("citation", "and note must be texts")
        basis = self.one_of("basis", ORIGINS)
        return Cited(citation, cast(Any, basis), noted)

    def inside(self, field: str) -> _Fields:
        return _Fields(self._name, f"{self._place}{field}.", self.take(field))

    def each(self, field: str) -> list[_Fields]:
        value = self.take(field)
        if not isinstance(value, list):
            raise self.wrong(field, "must be a list")
        return [_Fields(self._name, f"{self._place}{field}[{number}].", item) for number, item in enumerate(value)]
