"""A difference of temperatures is a step on the scale, whichever scale it's written on."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shop.physics.differences import parse_temperature_difference
from shop.physics.errors import QuantityError
from shop.physics.units import parse_temperature


@pytest.mark.parametrize(
    ("text", "default", "stored", "unit"),
    [
        ("1 K", "°C", 1000, "K"),
        ("1", "K", 1000, "K"),
        ("1 °C", "°F", 1000, "°C"),
        ("1", "°C", 1000, "°C"),
        ("2 °F", "°C", 1111, "°F"),
        ("1.8F", "K", 1000, "°F"),
        ("0.25 kelvin", "°F", 250, "K"),
        ("2°", "°F", 1111, "°F"),
        ("0", "°C", 0, "°C"),
    ],
)
def test_a_step_is_understood_in_its_unit(text, default, stored, unit):
    entry = parse_temperature_difference(text, default_unit=default)
    assert (entry.stored, entry.typed, entry.unit) == (stored, text, unit)


@given(st.integers(0, 90_000), st.sampled_from(["°C", "°F"]))
def test_a_step_is_what_lies_between_two_temperatures(thousandths, unit):
    step = f"{thousandths / 1000:.3f} {unit}"
    ends = [parse_temperature(text, default_unit=unit).stored for text in (f"0 {unit}", step)]
    assert abs(parse_temperature_difference(step, default_unit=unit).stored - (ends[1] - ends[0])) <= 1  # rounded apart


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("-1 K", "negative"),
        ("-1 °F", "negative"),
        ("300 K", "too_large"),
        ("1 bar", "other_kind"),
        ("1 blink", "unknown_unit"),
        ("some", "not_a_number"),
        ("", "empty"),
        ("1e2 K", "exponent"),
    ],
)
def test_what_is_no_step_is_refused(text, code):
    with pytest.raises(QuantityError) as refusal:
        parse_temperature_difference(text, default_unit="°C")
    assert refusal.value.code == code
