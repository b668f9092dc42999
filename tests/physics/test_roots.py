"""The root finder never leaves its bracket and always ends."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shop.physics.errors import NoSolution
from shop.physics.roots import find_root, first_true


@given(st.floats(0.001, 0.999), st.sampled_from([1, 3, 9, 0.2]))
def test_a_root_is_found_however_bent_the_function(place, power):
    root = find_root(lambda x: math.copysign(abs(x - place) ** power, x - place), 0.0, 1.0, tolerance=1e-9)
    assert root == pytest.approx(place, abs=1e-8)


def test_a_jump_is_found_too_and_soon():
    calls = []
    root = find_root(lambda x: calls.append(x) or (1.0 if x > 0.3 else -1e9), 0.0, 1.0, tolerance=1e-9)
    assert root == pytest.approx(0.3, abs=1e-8)
    assert len(calls) < 80


def test_ends_count_as_roots():
    assert find_root(lambda x: x, 0.0, 1.0, tolerance=1e-9) == 0.0
    assert find_root(lambda x: x - 1.0, 0.0, 1.0, tolerance=1e-9) == 1.0


@pytest.mark.parametrize("function", [lambda x: x + 1.0, lambda x: math.nan])
def test_without_a_change_of_sign_there_is_no_root(function):
    with pytest.raises(NoSolution) as refusal:
        find_root(function, 0.0, 1.0, tolerance=1e-9)
    assert refusal.value.code == "no_sign_change"


def test_a_plateau_begins_where_the_predicate_turns():
    # A difference that is nothing from 0.4 on has no sign to go by.
    assert first_true(lambda x: min(x - 0.4, 0.0) >= 0.0, 0.0, 1.0, tolerance=1e-9) == pytest.approx(0.4, abs=1e-8)
