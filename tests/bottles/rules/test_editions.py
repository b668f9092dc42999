"""Rule sets as files: released ones are never edited, wrong ones are refused in words."""

from __future__ import annotations

import copy
import datetime
import hashlib
import json
from dataclasses import replace
from importlib import resources

import pytest

from bottles.rules.conditions import CONDITIONS
from bottles.rules.edition import entered_by_hand, in_force
from bottles.rules.edition_files import EditionError, edition_by_code, edition_on, editions, read_edition
from bottles.rules.marks import read_mark
from bottles.rules.specifications import specifications
from bottles.rules.words import NOT_GIVEN, SENTENCES
from tests.bottles.rules.tables import rows

FOLDER = resources.files("bottles.rules").joinpath("editions")
DAY = datetime.date(2026, 6, 30)


def test_a_released_file_is_never_edited() -> None:
    released = {row["file"]: row["sha256"] for row in rows("released_rule_sets.csv")}
    shipped = {entry.name: entry.read_bytes() for entry in FOLDER.iterdir() if entry.name.endswith(".json")}
    del shipped["specifications.json"]
    assert {name: hashlib.sha256(content).hexdigest() for name, content in shipped.items()} == released
    assert {edition.sha256 for edition in editions()} == set(released.values())


def test_each_country_has_its_rule_set() -> None:
    for country in ("US", "CA", "ADR"):
        found = edition_on(country, DAY)
        assert found is not None
        assert edition_by_code(found.code) is found
    assert edition_on("JP", DAY) is None
    assert edition_by_code("nothing") is None


def test_a_new_edition_applies_from_its_date_and_the_first_answers_for_the_days_before() -> None:
    first = edition_on("US", DAY)
    assert first is not None
    second = replace(first, code="US-later", in_force_from=datetime.date(2027, 1, 1))
    both = [second, first]
    assert in_force(both, "US", datetime.date(2026, 12, 31)) is first
    assert in_force(both, "US", datetime.date(2027, 1, 1)) is second
    assert in_force(both, "US", datetime.date(1999, 1, 1)) is first


@pytest.mark.parametrize(
    ("rules", "marks", "percent", "source"),
    [
        ("US", "DOT-3AL1800", 10, "49 CFR 180.205(j)(1), as quoted"),
        ("US", "TC-3ALM124", 6, "CSA B339, as quoted"),
        ("CA", "TC-3ALM124", 6, "CSA B339, as quoted"),
        ("ADR", "ISO 7866 PH180", None, "not known"),
    ],
)
def test_the_expansion_limit_follows_the_mark(rules: str, marks: str, percent: int | None, source: str) -> None:
    edition = edition_on(rules, DAY)
    assert edition is not None
    assert edition.expansion_limit(read_mark(marks)) == percent, source


def test_every_row_says_what_it_rests_on() -> None:
    for edition in editions():
        for row in edition.rows:
            assert row.source.citation, row.specifications
        for rule, cited in edition.rules.items():
            assert cited.citation, rule
    assert all(each.citation for each in specifications().values())


def test_the_look_names_only_known_conditions() -> None:
    for edition in editions():
        assert len({item.code for item in edition.look}) == len(edition.look)
        assert {item.failed for item in edition.look if item.failed} <= set(CONDITIONS)


def test_every_sentence_is_a_sentence() -> None:
    for code, (sentence, _) in SENTENCES.items():
        assert sentence.endswith("."), code
        assert code == code.lower()
    assert all(name and step.endswith(".") for name, step in NOT_GIVEN.values())


def _us() -> dict[str, object]:
    return json.loads(FOLDER.joinpath("us-2026-01.json").read_text("utf-8"))


def _broken(how: str) -> dict[str, object]:
    data = copy.deepcopy(_us())
    row = data["rows"][0]
    match how:
        case "field missing":
            del row["interval_years"]
        case "field unknown":
            row["interval_year"] = 5
        case "interval as text":
            row["interval_years"] = "5"
        case "interval zero":
            row["interval_years"] = 0
        case "interval true":
            row["interval_years"] = True
        case "no interval":
            row["interval_years"] = None
        case "basis unknown":
            row["basis"] = "hearsay"
        case "specification unknown":
            row["specifications"] = ["DOT-3ZZ"]
        case "two rows":
            data["rows"].append(copy.deepcopy(row))
        case "receiver unknown":
            row["receiver"] = "maybe"
        case "refusal without no":
            row["refused_because"] = "foreign"
        case "wall unknown":
            row["walls"] = ["wood"]
        case "unit unknown":
            row["least_service_pressure"]["unit"] = "MPa"
        case "date":
            data["in_force_from"] = "January 2026"
        case "ratio":
            data["filling"][0]["per_mille"] = 6800
        case "rule missing":
            del data["rules"]["overdue"]
        case "rule field":
            data["rules"]["overdue"]["extra"] = 1
        case "top field":
            data["extra"] = 1
        case "format":
            data["format"] = 2
        case "look empty":
            data["look"] = []
        case "stamp order":
            data["stamp_order"] = "day first"
        case "rows an object":
            data["rows"] = {}
    return data


@pytest.mark.parametrize(
    "how",
    [
        "field missing", "field unknown", "interval as text", "interval zero", "interval true", "no interval",
        "basis unknown", "specification unknown", "two rows", "receiver unknown", "refusal without no",
        "wall unknown", "unit unknown", "date", "ratio", "rule missing", "rule field", "top field", "format",
        "look empty", "stamp order", "rows an object",
    ],
)  # fmt: skip
def test_a_wrong_file_is_refused(how: str) -> None:
    data = _broken(how)
    assert data != _us()
    with pytest.raises(EditionError, match=r"^broken\.json"):
        read_edition("broken.json", json.dumps(data).encode())


def test_what_is_not_json_is_refused() -> None:
    with pytest.raises(EditionError, match="JSON"):
        read_edition("broken.json", b"{")


def test_rules_entered_by_hand_carry_the_authority_and_know_only_what_was_entered() -> None:
    like = edition_on("ADR", DAY)
    assert like is not None
    edition = entered_by_hand(
        country="Elsewhere",
        authority="Ministry of Elsewhere",
        citation="",
        in_force_from=DAY,
        intervals={"ISO 7866": 5},
        per_mille=680,
        water="p200",
        stamp_order="year first",
        like=like,
    )
    marked = edition.row_for(read_mark("ISO 7866 PH180"))
    assert marked is not None
    assert marked.row.source.citation == "Ministry of Elsewhere"
    assert marked.row.source.basis == "entered"
    assert edition.row_for(read_mark("ISO 9809-1 PH180")) is None
