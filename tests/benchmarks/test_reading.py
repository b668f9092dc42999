"""What somebody types, understood: beside pint, which understands units alone."""

from __future__ import annotations

import pint
import pytest

from shop.physics.units import parse_mass, parse_pressure
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn

pytestmark = pytest.mark.benchmark


def test_an_entry_is_understood_as_fast_as_by_a_library_of_units(tell: Told) -> None:
    theirs = pint.UnitRegistry()
    # A gram is the same gram to both, before the time counts.
    assert parse_mass("12.4 lb", default_unit="kg").stored == round(theirs.parse_expression("12.4 lb").to("g").magnitude)
    measured = in_turn(
        {
            "ours": lambda: parse_mass("12.4 lb", default_unit="kg"),
            "pint": lambda: theirs.parse_expression("12.4 lb").to("g"),
            "pounds and ounces": lambda: parse_mass("24-6", default_unit="kg"),
            "gauge": lambda: parse_pressure("950 psi", default_unit="bar", ambient_pa=101_325.0),
            "pint's pressure": lambda: theirs.parse_expression("950 psi").to("Pa"),
        },
        rounds=15, calls=200,
    )  # fmt: skip
    tell("reading 12.4 lb", measured, "ours", beside="pint")
    tell("reading 24-6", measured, "pounds and ounces", beside="pint")
    tell("reading 950 psi", measured, "gauge", beside="pint's pressure")
    assert measured.ratio("ours", "pint") < 2
