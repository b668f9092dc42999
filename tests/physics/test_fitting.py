"""The condensation figure fitted from refills: it finds what was planted, and says when it can't."""

from __future__ import annotations

import random
from collections.abc import Sequence
from math import erf, sqrt
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.condensation import PRIOR, between
from bottles.physics.fitting import ENOUGH, Fitted, Observation, fit
from bottles.physics.fitting_words import litres, origin, why_untold
from bottles.physics.observing import ALIKE, NO_FLOW, NO_LIQUID, Refilled, observe
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel, wall_heat
from shop.physics.errors import OutOfRange
from tests.examples import times

SIZE = 7_500


def planted(
    chance: random.Random, many: int, figure: float, spread: float, *, error: float = 0.05, way: str = "dip",
    size: int = SIZE, room: tuple[float, float] | None = None,
) -> list[Observation]:  # fmt: skip
    """Refills of a class whose figure is known; with a room, those that reach it are stopped there."""
    found = []
    for _ in range(many):
        own, measured = chance.gauss(figure, spread), error * chance.uniform(0.5, 2.0)
        most = chance.uniform(*room) if room else 9.0
        stopped = own > most
        found.append(Observation((most if stopped else own) + chance.gauss(0.0, measured), measured, stopped, way, size))
    return found


def of(found: Sequence[Fitted], way: str = "dip", size: int | None = SIZE) -> Fitted:
    return next(one for one in found if (one.way, one.size) == (way, size))


@pytest.mark.parametrize(("figure", "spread"), [(0.3, 0.05), (0.62, 0.1), (0.8, 0.15)])
def test_many_refills_tell_the_figure_that_was_planted(figure: float, spread: float) -> None:
    told = of(fit(planted(random.Random(7), 400, figure, spread)))
    assert told.figure == pytest.approx(figure, abs=3 * spread / sqrt(400))
    assert told.deviation == pytest.approx(spread, rel=0.15)  # of a refill to come: the scatter, not the mean's own
    assert (told.informative, told.bounds, told.tells) == (400, 0, True)


@pytest.mark.parametrize("many", [6, 15, 60])
def test_a_band_of_two_deviations_holds_the_next_refill_about_nineteen_times_in_twenty(many: int) -> None:
    chance = random.Random(many)
    tries, held, known = times(70), 0, 0
    for _ in range(tries):
        figure, spread = chance.uniform(0.25, 0.75), chance.choice([0.05, 0.1, 0.15])
        told = of(fit(planted(chance, many, figure, spread, room=(0.3, 1.5))))
        held += abs(chance.gauss(figure, spread) - told.figure) <= 2 * told.deviation
        known += abs(figure - told.figure) <= 2 * told.uncertainty
    # 0.95 ± three standard errors of a share of so many tries.
    assert held / tries >= 0.95 - 3 * sqrt(0.95 * 0.05 / tries)
    assert known / tries >= 0.95 - 3 * sqrt(0.95 * 0.05 / tries)


def test_refills_stopped_at_their_limit_do_not_pull_the_figure_down() -> None:
    chance = random.Random(3)
    rows = planted(chance, 600, 0.6, 0.15, room=(0.3, 0.9))
    stopped = sum(one.censored for one in rows)
    assert 200 < stopped < 400
    assert of(fit(rows)).figure == pytest.approx(0.6, abs=0.03)
    # Left out, or taken as figures of their own, they would.
    without = of(fit([one for one in rows if not one.censored])).figure
    taken = of(fit([Observation(one.figure, one.deviation, False, one.way, one.size) for one in rows])).figure
    assert without < 0.55 and taken < 0.55


def test_lower_bounds_alone_tell_no_figure_but_move_it_up() -> None:
    told = of(fit([Observation(0.6, 0.05, True, "dip", SIZE)] * 40))
    assert not told.tells and told.informative == 0 and told.bounds == 40
    assert told.figure > 0.6
    assert "how much condenses at least" in why_untold(told.informative, told.bounds)


def test_until_there_are_enough_it_says_so() -> None:
    rows = planted(random.Random(1), ENOUGH - 1, 0.8, 0.05)
    assert not of(fit(rows)).tells
    assert "Only 4 refills" in why_untold(ENOUGH - 1, 0) and "No refill" in why_untold(0, 0)
    assert of(fit([*rows, rows[0]])).tells and why_untold(ENOUGH, 0) == ""


def test_without_refills_the_prior_comes_out() -> None:
    found = fit([])
    assert [(one.way, one.size) for one in found] == [("", None), ("dip", None), ("spray", None)]
    for one in found:
        assert one.figure == pytest.approx(PRIOR.figure, abs=1e-6)
        assert one.deviation > 0.9 * PRIOR.deviation and not one.tells


def test_a_size_with_few_refills_is_drawn_towards_its_way() -> None:
    chance = random.Random(5)
    rows = planted(chance, 80, 0.4, 0.1, size=5_000) + planted(chance, 80, 0.42, 0.1, size=SIZE)
    few = [Observation(0.7, 0.05, False, "dip", 20_000)] * 2
    found = fit(rows + few)
    assert of(found).figure < of(found, size=20_000).figure < 0.66
    # The same two by themselves, with nothing to be drawn towards, stand higher.
    assert of(fit(few), size=20_000).figure > of(found, size=20_000).figure
    # And a hundred of them are believed.
    many = [Observation(0.7, 0.05, False, "dip", 20_000)] * 100
    assert of(fit(rows + many), size=20_000).figure == pytest.approx(0.7, abs=0.02)


def test_a_way_without_refills_is_drawn_towards_the_shop_and_less_sure() -> None:
    found = fit(planted(random.Random(9), 100, 0.75, 0.08))
    dip, spray = of(found, size=None), of(found, "spray", None)
    assert PRIOR.figure < spray.figure < dip.figure
    assert spray.deviation > dip.deviation > of(found).deviation


def test_two_ways_keep_their_own_figures() -> None:
    chance = random.Random(11)
    rows = planted(chance, 120, 0.3, 0.08) + planted(chance, 120, 0.7, 0.08, way="spray")
    found = fit(rows)
    assert of(found).figure == pytest.approx(0.3, abs=0.03)
    assert of(found, "spray").figure == pytest.approx(0.7, abs=0.03)
    assert 0.4 < of(found, "", None).figure < 0.6  # a bottle whose tube isn't known may be either
    assert of(found, "", None).deviation > of(found).deviation


def test_one_absurd_refill_hardly_moves_the_figure() -> None:
    rows = planted(random.Random(2), 40, 0.5, 0.08)
    told, disturbed = of(fit(rows)), of(fit([*rows, Observation(6.0, 0.05, False, "dip", SIZE)]))
    assert disturbed.figure == pytest.approx(told.figure, abs=0.01)
    assert disturbed.deviation == pytest.approx(told.deviation, abs=0.02)


def test_a_surer_reading_counts_for_more() -> None:
    rows = [Observation(0.3, 0.02, False, "dip", SIZE), Observation(0.7, 0.3, False, "dip", SIZE)] * 6
    assert of(fit(rows)).figure < 0.4


observations = st.builds(
    Observation, st.floats(-0.5, 1.5), st.floats(0.005, 0.5), st.booleans(), st.sampled_from(["", "dip", "spray"]),
    st.sampled_from([None, 5_000, SIZE, 12_000]),
)  # fmt: skip


@settings(max_examples=times(30), deadline=None)
@given(st.lists(observations, max_size=25), st.randoms(use_true_random=False))
def test_the_order_of_the_refills_changes_nothing(rows: list[Observation], chance: random.Random) -> None:
    mixed = list(rows)
    chance.shuffle(mixed)
    assert fit(rows) == fit(mixed)


@settings(max_examples=times(30), deadline=None)
@given(st.lists(observations, max_size=25))
def test_whatever_the_refills_say_the_answer_is_a_figure_with_a_deviation(rows: list[Observation]) -> None:
    for one in fit(rows):
        assert 0.0 <= one.figure <= 1.0 and 0.0 < one.uncertainty <= one.deviation <= 1.0
    whole = fit(rows)[0]
    assert whole.informative + whole.bounds == len(rows)


@settings(max_examples=times(20), deadline=None)
@given(st.lists(st.floats(0.2, 0.8), min_size=6, max_size=12), st.floats(0.02, 0.1))
def test_higher_refills_never_give_a_lower_figure(figures: list[float], more: float) -> None:
    def told(shift: float) -> float:
        return of(fit([Observation(each + shift, 0.05, False, "dip", SIZE) for each in figures])).figure

    assert told(more) >= told(0.0) - 1e-6


def test_the_sum_on_the_grid_agrees_with_plain_sampling() -> None:
    """The peer: a hundred thousand worlds drawn from the same beliefs, weighed by how well they fit."""
    rows = [Observation(0.7, 0.1), Observation(0.62, 0.06), Observation(0.66, 0.15, True)]
    chance = random.Random(13)

    def bell(width: float) -> float:
        return abs(chance.gauss(0.0, width))

    def one_of(values: Sequence[float], width: float) -> float:
        inner = [(after - before) / 2 for before, after in zip(values, values[2:], strict=False)]
        steps = [values[1] - values[0], *inner, values[-1] - values[-2]]
        weights = [step * 2.718281828 ** (-0.5 * (value / width) ** 2) for value, step in zip(values, steps, strict=True)]
        return chance.choices(values, weights)[0]

    def kept(middle: float, width: float) -> float:
        while not 0.0 <= (drawn := chance.gauss(middle, width)) <= 1.0:
            pass
        return drawn

    total = mean = 0.0
    for _ in range(100_000):
        refills = min(max(bell(0.2), 0.01), 0.5)
        figure = kept(kept(kept(0.5, 0.25), one_of([0.02, 0.06, 0.12, 0.25], 0.15)), one_of([0.01, 0.03, 0.07, 0.15], 0.1))
        weight = 1.0
        for row in rows:
            wide = sqrt(row.deviation**2 + refills**2)
            away = (figure - row.figure) / wide
            sound = 0.5 * (1 + erf(away / sqrt(2))) if row.censored else 2.718281828 ** (-0.5 * away * away) / wide / 2.50662827
            weight *= 0.98 * sound + 0.02 * (0.5 if row.censored else 0.25)
        total += weight
        mean += weight * figure
    assert of(fit(rows), "", None).figure == pytest.approx(mean / total, abs=0.01)


def refilled(**changes: Any) -> Refilled:
    values: dict[str, Any] = {
        "source": Vessel(0.029, wall_heat("steel", 32.0), 15.0, 293.15), "receiver_volume_m3": 6.8e-3,
        "receiver_wall_j_k": wall_heat("aluminium", 5.9), "receiver_temperature_k": 273.15, "start": Start("weighed", 0.3),
        "moved_kg": 3.0, "moved_error_kg": 0.03, "source_error_kg": 0.05, "start_error_kg": 0.03,
    }  # fmt: skip
    return Refilled(**values | changes)


def limits(one: Refilled) -> tuple[float, float]:
    receiver = start_vessel(
        volume_m3=one.receiver_volume_m3, wall_j_k=one.receiver_wall_j_k, temperature_k=one.receiver_temperature_k, start=one.start
    )
    transfer = Transfer(one.source, receiver, one.line_volume_m3)
    return transfer.slow_free_kg(), transfer.mixed_free_kg()


@settings(max_examples=times(15), deadline=None)
@given(st.floats(0.0, 1.0), st.floats(258.15, 290.15), st.floats(8.0, 19.0))
def test_a_refill_made_by_a_figure_tells_that_figure(figure: float, temperature: float, net: float) -> None:
    one = refilled(receiver_temperature_k=temperature, source=Vessel(0.029, wall_heat("steel", 32.0), net, 293.15))
    told = observe(refilled(
        receiver_temperature_k=temperature, source=one.source, moved_kg=between(*limits(one), figure), moved_error_kg=0.001,
    ))  # fmt: skip
    if not told.silent:
        assert told.figure == pytest.approx(figure, abs=1e-6)
        assert told.deviation > 0.0


def test_a_coarser_reading_makes_a_refill_tell_less() -> None:
    sharp = observe(refilled()).deviation
    for coarse in ({"moved_error_kg": 0.2}, {"source_error_k": 4.0}, {"receiver_error_k": 4.0}, {"source_error_kg": 3.0}):
        assert observe(refilled(**coarse)).deviation > sharp


def test_what_its_readings_are_worth_is_what_their_errors_do_to_its_figure() -> None:
    """Read a kelvin wrong, the figure moves by no more than it's given for that: the quick limit moves most."""
    true = refilled(moved_error_kg=0.001, source_error_kg=0.0, start_error_kg=0.0, source_error_k=1e-6, receiver_error_k=1.0)
    moved = refilled(receiver_temperature_k=274.15, moved_error_kg=0.001)
    change = abs(observe(moved).figure - observe(true).figure)
    assert change <= 2 * observe(true).deviation <= 2 * change


def test_a_refill_whose_limits_are_alike_tells_nothing() -> None:
    assert observe(refilled(moved_error_kg=10.0)).silent == ALIKE


def test_vapour_alone_and_a_bottle_that_nothing_enters_tell_nothing() -> None:
    assert observe(refilled(source=Vessel(0.029, wall_heat("steel", 32.0), 2.0, 293.15))).silent == NO_LIQUID
    assert observe(refilled(receiver_temperature_k=303.15, start=Start("weighed", 3.0))).silent == NO_FLOW


def test_an_observation_without_a_deviation_is_refused() -> None:
    with pytest.raises(OutOfRange, match="Leave it out"):
        Observation(0.5, 0.0)


def test_an_origin_names_refills_size_way_and_time() -> None:
    assert origin(12, "dip", None, "2026-09") == "12 refills of this shop through a dip tube, since 2026-09"
    told = origin(1, "spray", (5_000, 7_500), "2026-09")
    assert told == "1 refill of this shop, bottles of 5 to 7.5 L, without a dip tube, since 2026-09"
    assert origin(7, "dip", (50_000, 1_000_000), "2026-09").startswith("7 refills of this shop, bottles of over 50 L, through")
    assert origin(7, "dip", (0, 2_500), "2026-09").startswith("7 refills of this shop, bottles of up to 2.5 L, through")
    assert litres((0, 2_500)) == "up to 2.5 L" and litres((50_000, 1_000_000)) == "over 50 L"
