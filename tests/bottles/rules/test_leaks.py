"""A planted leak is found, a sound bottle is left alone, and the answer says how soon a leak would show."""

from __future__ import annotations

import random
from collections.abc import Sequence

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.leaks import (
    BY_CHANCE,
    Drift,
    Noise,
    Reading,
    certainty_words,
    drift_of,
    lasts,
    student,
    student_reaches,
    weeks_to_show,
)

FINE, COARSE = Noise(5, 5), Noise(28, 30)
SCALES = st.sampled_from([FINE, Noise(10, 20), COARSE])
TIMES = st.lists(st.floats(0, 52).map(lambda weeks: round(weeks, 2)), min_size=2, max_size=12, unique=True)
ROWS = st.lists(
    st.builds(Reading, st.floats(0, 52).map(lambda weeks: round(weeks, 3)), st.integers(-50, 20_000)), min_size=2, max_size=12
)


def read(times: Sequence[float], leak_g: float, noise: Noise, luck: random.Random) -> list[Reading]:
    """What a scale shows: wrong by a constant, repeating within its error, counting in its steps."""
    constant = luck.uniform(-noise.error_g, noise.error_g)
    start = 4_000 + luck.uniform(0, noise.step_g)

    def shown(weeks: float) -> int:
        true = start - leak_g * weeks + constant + luck.uniform(-noise.error_g, noise.error_g) / 2
        return round(true / noise.step_g) * noise.step_g

    return [Reading(weeks, shown(weeks)) for weeks in times]


@pytest.mark.parametrize("noise", [FINE, COARSE], ids=["fine", "coarse"])
@pytest.mark.parametrize("count", [2, 3, 8, 20])
def test_a_planted_leak_lies_within_the_interval_nineteen_times_of_twenty(noise: Noise, count: int) -> None:
    luck, inside = random.Random(count), 0
    for _ in range(1_000):
        leak = luck.uniform(0, 60)
        drift = drift_of(read(sorted(luck.uniform(0, 20) for _ in range(count)), leak, noise, luck), noise)
        assert drift is not None
        inside += drift.low_g <= -leak <= drift.high_g
    assert inside >= 950


@pytest.mark.parametrize("noise", [FINE, COARSE], ids=["fine", "coarse"])
@pytest.mark.parametrize("count", [2, 3, 8, 20])
def test_a_bottle_that_keeps_its_weight_is_raised_no_more_often_than_said(noise: Noise, count: int) -> None:
    luck, raised = random.Random(100 + count), 0
    for _ in range(2_000):
        drift = drift_of(read(sorted(luck.uniform(0, 20) for _ in range(count)), 0, noise, luck), noise)
        raised += drift is not None and drift.verdict == "leaks"
    assert raised <= BY_CHANCE * 2_000


def test_a_scale_that_scatters_more_than_its_plate_says_doesnt_raise_more() -> None:
    luck, raised = random.Random(5), 0
    for _ in range(2_000):
        rows = [Reading(float(week), 4_000 + round(luck.gauss(0, 40))) for week in range(8)]
        drift = drift_of(rows, FINE)
        raised += drift is not None and drift.verdict == "leaks"
    assert raised <= BY_CHANCE * 2_000


@pytest.mark.parametrize("noise", [FINE, COARSE], ids=["fine", "coarse"])
@pytest.mark.parametrize("before", [(), (0.0,), (0.0, 1.0, 2.0)], ids=["none", "one", "three"])
def test_a_leak_shows_after_as_many_weeks_as_was_said(noise: Noise, before: tuple[float, ...]) -> None:
    luck, shown = random.Random(7), 0
    for _ in range(500):
        kept = read(before or (0.0,), 10, noise, luck)
        steady = [Reading(row.weeks, 4_000) for row in kept]  # how soon doesn't depend on what they read
        weeks = weeks_to_show(10, noise, steady if before else ())
        drift = drift_of(read((*(before or (0.0,)), weeks), 10, noise, luck), noise)
        shown += drift is not None and drift.verdict == "leaks"
    assert shown >= 0.97 * 500


def test_two_weighings_are_enough_where_they_differ_by_more_than_the_scale_can() -> None:
    drift = drift_of([Reading(0, 4_500), Reading(4, 4_420)], Noise(10, 20))
    assert drift is not None
    assert (drift.verdict, drift.rate_g, drift.readings, drift.weeks) == ("leaks", -20, 2, 4)
    assert drift.low_g < -20 < drift.high_g < 0


def test_a_difference_that_the_scale_can_make_by_itself_is_never_raised() -> None:
    noise = Noise(10, 20)
    assert noise.most_g == 30
    many = [Reading(week, 4_500 - week) for week in range(31)]  # a line so straight that noise is ruled out
    drift = drift_of(many, noise)
    assert drift is not None
    assert drift.certainty > 0.999
    assert drift.verdict == "steady"


def test_weight_that_grew_is_no_leak() -> None:
    drift = drift_of([Reading(0, 4_420), Reading(4, 4_500)], Noise(10, 20))
    assert drift is not None
    assert drift.verdict == "grew"
    assert lasts(4_500, drift) is None


def test_fewer_than_two_moments_tell_nothing() -> None:
    assert drift_of([], FINE) is None
    assert drift_of([Reading(0, 4_500)], FINE) is None
    assert drift_of([Reading(3, 4_500), Reading(3, 4_400)], FINE) is None


@given(ROWS, SCALES, st.randoms(use_true_random=False))
def test_the_order_of_the_readings_doesnt_matter(rows: list[Reading], noise: Noise, luck: random.Random) -> None:
    mixed = list(rows)
    luck.shuffle(mixed)
    one, other = drift_of(rows, noise), drift_of(mixed, noise)
    assert (one is None) == (other is None)
    if one is not None and other is not None:
        assert one.verdict == other.verdict
        assert one.rate_g == pytest.approx(other.rate_g, rel=1e-9, abs=1e-9)
        assert weeks_to_show(10, noise, rows) == pytest.approx(weeks_to_show(10, noise, mixed), rel=1e-9)


@given(ROWS, SCALES, st.integers(-500, 500), st.floats(0, 500))
def test_a_scale_that_is_wrong_by_a_constant_and_the_day_of_the_first_weighing_change_nothing(
    rows: list[Reading], noise: Noise, wrong_g: int, later: float
) -> None:
    one = drift_of(rows, noise)
    other = drift_of([Reading(row.weeks + later, row.net_g + wrong_g) for row in rows], noise)
    if one is not None and other is not None and one.weeks > 0.01:
        assert one.rate_g == pytest.approx(other.rate_g, rel=1e-4, abs=1e-3)


@given(ROWS, SCALES)
def test_what_is_lost_and_what_is_gained_are_judged_alike(rows: list[Reading], noise: Noise) -> None:
    one, other = drift_of(rows, noise), drift_of([Reading(row.weeks, -row.net_g) for row in rows], noise)
    swapped = {"leaks": "grew", "grew": "leaks", "steady": "steady"}
    if one is not None and other is not None:
        assert one.verdict == swapped[other.verdict]
        assert one.rate_g == pytest.approx(-other.rate_g)


@given(TIMES, SCALES, st.floats(1, 500), st.floats(1.01, 3))
def test_a_larger_leak_shows_no_later(times: list[float], noise: Noise, leak_g: float, more: float) -> None:
    rows = [Reading(weeks, 4_000) for weeks in times]
    assert weeks_to_show(leak_g * more, noise, rows) <= weeks_to_show(leak_g, noise, rows) + 1e-9
    assert weeks_to_show(leak_g, noise) <= weeks_to_show(leak_g, COARSE) + 1e-9
    assert weeks_to_show(leak_g, noise, rows) >= max(times) - min(times) - 1e-9


def test_a_leak_that_loses_nothing_never_shows() -> None:
    with pytest.raises(ValueError, match="loses"):
        weeks_to_show(0, FINE)


def test_looking_on_several_scales_asks_for_more_of_each() -> None:
    rows = [Reading(0, 4_500), Reading(1, 4_478)]
    noise = Noise(10, 10)
    once, often = drift_of(rows, noise), drift_of(rows, noise, looks=50)
    assert once is not None and often is not None
    assert (once.verdict, often.verdict) == ("leaks", "steady")


def test_contents_last_as_long_as_the_loss_lets_them() -> None:
    drift = Drift(5, 10, rate_g=-20, low_g=-25, high_g=-16, certainty=0.999, verdict="leaks")
    span = lasts(4_000, drift)
    assert span is not None
    assert (span.least, span.likely, span.most) == (160, 200, 250)
    open_ended = Drift(5, 10, rate_g=-20, low_g=-41, high_g=1, certainty=0.97, verdict="steady")
    never = lasts(4_000, open_ended)
    assert never is not None
    assert never.most is None
    assert lasts(0, drift) is None


@pytest.mark.parametrize(
    ("degrees", "value"),
    # Student's t, 97.5 %: NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.2.
    [(1, 12.706), (2, 4.303), (3, 3.182), (8, 2.306), (9, 2.262), (30, 2.042), (100, 1.984)],
)
def test_students_t_is_the_printed_one(degrees: int, value: float) -> None:
    assert student_reaches(0.975, degrees) == pytest.approx(value, abs=5e-4)
    assert student(value, degrees) == pytest.approx(0.975, abs=5e-5)
    assert student(0, degrees) == 0.5


@pytest.mark.parametrize(
    ("certainty", "words"),
    [
        (0.9999, "almost certain (99.9 % or more)"), (0.9949, "very likely (99.4 %)"), (0.98, "likely (98 %)"),
        (0.7, "not told apart from noise (70 %)"),
    ],
)  # fmt: skip
def test_a_certainty_is_told_in_a_word_and_in_percent(certainty: float, words: str) -> None:
    assert certainty_words(certainty) == words
