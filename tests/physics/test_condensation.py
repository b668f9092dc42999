"""The condensation figure lies between two limits, and says when it's only a prior."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.physics.condensation import PRIOR, Condensation, band, between
from shop.physics.errors import OutOfRange

MASS = st.floats(0.0, 10.0)


@given(MASS, MASS)
def test_the_figure_runs_from_one_limit_to_the_other(wall, mixed):
    assert between(wall, mixed, 0.0) == pytest.approx(wall, abs=1e-12)
    assert between(wall, mixed, 1.0) == pytest.approx(mixed, abs=1e-12)
    assert between(wall, mixed, 0.5) == pytest.approx((wall + mixed) / 2, abs=1e-12)


@given(MASS, MASS, st.floats(0.0, 1.0), st.floats(0.0, 1.0))
def test_the_band_stays_between_the_limits(wall, mixed, figure, deviation):
    below, above = band(wall, mixed, Condensation(figure, deviation, "fitted"))
    likely = between(wall, mixed, figure)
    assert below >= -1e-12
    assert above >= -1e-12
    assert min(wall, mixed) - 1e-9 <= likely - below
    assert likely + above <= max(wall, mixed) + 1e-9


def test_the_prior_reaches_both_limits_and_says_that_it_is_one():
    # Common practice, no source: nobody has measured this shop yet.
    assert band(3.0, 4.0, PRIOR) == (pytest.approx(0.5), pytest.approx(0.5))
    assert PRIOR.is_prior
    assert not Condensation(0.4, 0.05, "fitted to 12 refills").is_prior


def test_a_certain_figure_has_no_band():
    assert band(3.0, 4.0, Condensation(0.3, 0.0, "entered")) == (pytest.approx(0.0), pytest.approx(0.0))


@pytest.mark.parametrize("figure", [-0.1, 1.1, float("nan")])
def test_a_figure_outside_is_refused(figure):
    with pytest.raises(OutOfRange) as refusal:
        Condensation(figure, 0.1, "entered")
    assert refusal.value.code == "condensation"
