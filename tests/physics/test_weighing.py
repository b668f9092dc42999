"""A weighing gives a net to the gram, a ± that doesn't flatter, and a safe reading to stop at."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.weighing import (
    difference,
    net,
    net_uncertainty,
    proves_full,
    stop_reading,
    wet_allowance,
    wet_uncertainty,
)
from shop.physics.errors import Contradiction, OutOfRange
from shop.physics.formatting import reading_not_above
from tests.examples import times

FEW = settings(max_examples=times(50), deadline=None)
GRAMS = st.integers(0, 200_000)


@FEW
@given(contents=GRAMS, tare=GRAMS)
def test_net_is_gross_less_tare_to_the_gram(contents: int, tare: int) -> None:
    assert net(tare + contents, tare) == contents


def test_a_gross_below_the_tare_is_refused() -> None:
    with pytest.raises(Contradiction) as refused:
        net(6399, 6420)
    assert refused.value.code == "tare_above_gross"


def test_an_empty_bottle_may_read_below_its_tare_by_the_uncertainty() -> None:
    assert net(6400, 6420, uncertainty_g=20) == -20
    with pytest.raises(Contradiction):
        net(6399, 6420, uncertainty_g=20)


@pytest.mark.parametrize(
    ("scale", "tare", "both"),
    [(3, 4, 5), (20, 0, 20), (0, 0, 0), (1, 1, 2), (20, 20, 29), (5, 12, 13)],  # √800 = 28.28
)
def test_uncertainties_add_in_squares_rounded_up(scale: int, tare: int, both: int) -> None:
    assert net_uncertainty(scale, tare) == both


@FEW
@given(first=GRAMS, second=GRAMS)
def test_the_combined_uncertainty_is_the_next_gram_up(first: int, second: int) -> None:
    both = net_uncertainty(first, second)
    assert max(first, second) <= both <= first + second
    assert both**2 >= first**2 + second**2
    assert both == 0 or (both - 1) ** 2 < first**2 + second**2


@pytest.mark.parametrize("figures", [(-1, 5), (5, -1)])
def test_a_negative_uncertainty_is_refused(figures: tuple[int, int]) -> None:
    for function in (net_uncertainty, wet_uncertainty):
        with pytest.raises(OutOfRange) as refused:
            function(*figures)
        assert refused.value.code == "uncertainty"


def test_a_difference_of_two_weighings_has_a_sign_and_a_spread() -> None:
    assert difference(4610, 30, 4200, 40) == (-410, 50)
    assert difference(4200, 40, 4610, 30) == (410, 50)


def test_wet_widens_by_the_layer_on_the_surface() -> None:
    # A cylinder of 12 cm and 48 cm holds 5429 mL and has 2036 cm² of surface; half a
    # millimetre of water on it is 102 g (geometry, worked by hand).
    assert wet_allowance(round(math.pi * 36 * 48)) == pytest.approx(102, abs=1)
    assert wet_uncertainty(20, 102) == 122


@FEW
@given(capacity=st.integers(1, 150_000))
def test_a_larger_bottle_carries_more_water_but_less_for_its_size(capacity: int) -> None:
    one, eight = wet_allowance(capacity), wet_allowance(8 * capacity)
    assert 4 * (one - 1) <= eight <= 4 * one


def test_a_bottle_without_capacity_has_no_surface() -> None:
    with pytest.raises(OutOfRange) as refused:
        wet_allowance(0)
    assert refused.value.code == "capacity"


def test_a_dry_weighing_proves_a_fill_and_a_wet_one_never() -> None:
    assert proves_full(4600, 20, 4580, wet=False)
    assert not proves_full(4600, 20, 4581, wet=False)
    assert not proves_full(9999, 20, 4580, wet=True)


def test_the_reading_to_stop_at_is_tare_and_target_less_the_scales_error() -> None:
    # 6420 + 4610 − 20 = 11010
    assert stop_reading(6420, 4610, scale_pm_g=20, resolution_g=10) == 11010
    # A hose that bears down by 140 g makes the scale read 140 g too much.
    assert stop_reading(6420, 4610, scale_pm_g=20, resolution_g=10, hose_pull_g=140) == 11150
    assert stop_reading(6420, 4610, scale_pm_g=20, resolution_g=10, hose_pull_g=-140) == 10870
    # To what the scale can show: 11010 g is 24 lb 4.37 oz; 24 lb 4 oz is 10999.6 g.
    stop = stop_reading(6420, 4610, scale_pm_g=20, resolution_g=28, style="lb oz")
    assert stop == 11000
    assert reading_not_above(stop, "lb oz", 28) == "24 lb 4 oz"


@FEW
@given(
    tare=st.integers(500, 60_000),
    target=st.integers(500, 40_000),
    error=st.integers(0, 100),
    pull=st.integers(-300, 300),
    resolution=st.sampled_from([1, 5, 10, 20, 28, 45, 50]),
    style=st.sampled_from(["kg", "lb", "lb oz", "lb-oz"]),
)
def test_a_scale_off_by_its_whole_error_still_does_not_pass_the_target(
    tare: int, target: int, error: int, pull: int, resolution: int, style: str
) -> None:
    stop = stop_reading(
        tare,
        target,
        scale_pm_g=error,
        resolution_g=resolution,
        style=style,  # type: ignore[arg-type]
        hose_pull_g=pull,
    )
    reads_low_by = error
    true_contents = stop + reads_low_by - pull - tare
    assert true_contents <= target
    assert true_contents > target - 3 * (resolution + 1) - 1


def test_a_scale_too_coarse_for_the_fill_is_refused() -> None:
    for error, resolution in ((50, 1), (0, 2000)):
        with pytest.raises(Contradiction) as refused:
            stop_reading(6420, 50, scale_pm_g=error, resolution_g=resolution)
        assert refused.value.code == "no_room"


def test_a_negative_scale_error_is_refused() -> None:
    with pytest.raises(OutOfRange) as refused:
        stop_reading(6420, 4610, scale_pm_g=-1, resolution_g=10)
    assert refused.value.code == "uncertainty"
