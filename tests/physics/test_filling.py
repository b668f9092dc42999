"""The fill limit is a ratio times the water that the rule set means, down to the gram."""

from collections.abc import Callable
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.filling import (
    P200_WATER,
    US_WATER,
    WaterDefinition,
    capacity_of_water_ml,
    filling_limit_g,
    inferred_capacity_ml,
    percent_of_limit,
)
from shop.physics.errors import OutOfRange
from shop.physics.units import parse_mass
from tests.examples import times

FEW = settings(max_examples=times(50), deadline=None)
WATERS = st.sampled_from([US_WATER, P200_WATER])
RATIOS = st.integers(50, 80).map(lambda percent: f"0.{percent}")


def water_density(celsius: float) -> float:
    """Tanaka et al., Metrologia 38 (2001) 301, equation 1 (from memory), in g/mL."""
    a1, a2, a3, a4, a5 = -3.983035, 301.797, 522528.9, 69.34881, 0.99997495
    return a5 * (1 - (celsius + a1) ** 2 * (celsius + a2) / (a3 * (celsius + a4)))


def test_the_density_formula_gives_its_published_maximum() -> None:
    # 999.974 95 kg/m³ at 3.983 035 °C (Tanaka 2001, abstract; from memory).
    assert water_density(3.983035) == 0.99997495
    # 998.2067 kg/m³ at 20 °C (ditto, table 3; from memory).
    assert water_density(20) == pytest.approx(0.9982067, abs=2e-7)


def test_the_water_of_p200_is_water_at_15_degrees() -> None:
    # 0.999 10 kg/L at 15 °C: Tanaka 2001 as above.
    assert float(P200_WATER.g_per_ml) == pytest.approx(water_density(15), abs=1e-5)


def test_the_pound_of_water_of_49_cfr_is_water_at_60_fahrenheit_weighed_in_air() -> None:
    # In vacuum a pound would be 27.708 in³. Air of 1.2 kg/m³ and brass of 8400 kg/m³
    # (OIML D 28: conventional mass is close to this; figures from memory).
    in_vacuum = water_density((60 - 32) / 1.8)
    in_air = (in_vacuum - 0.0012) / (1 - 0.0012 / 8.4)
    assert float(US_WATER.g_per_ml) == pytest.approx(in_air, rel=3e-5)
    assert float(US_WATER.g_per_ml) < in_vacuum


@pytest.mark.parametrize(
    ("capacity", "ratio", "water", "limit"),
    [
        # 27.737 in³ is 454.528 mL and holds 453.592 g: 0.68 of it is 308.44
        (27_737 * 16387064 // 10**9, "0.68", US_WATER, 308),
        (6_800, "0.68", US_WATER, 4_614),  # 6800 × 0.9979415 × 0.68 = 4614.48
        (6_800, "0.68", P200_WATER, 4_619),  # 6800 × 0.9991 × 0.68 = 4619.84
        (50_000, "0.74", P200_WATER, 36_966),  # 36966.7
        (50_000, "0.75", P200_WATER, 37_466),  # 37466.25
        (10_000, Fraction(68, 100), P200_WATER, 6_793),  # 6793.88
        (1, "0.68", US_WATER, 0),
    ],
)
def test_worked_limits(capacity: int, ratio: Fraction | str, water: WaterDefinition, limit: int) -> None:
    assert filling_limit_g(capacity, ratio, water) == limit


def test_a_stamp_of_water_pounds_gives_68_percent_of_them() -> None:
    # A bottle that holds 14.71 lb of water holds 10.0 lb of nitrous at 68 %.
    water_g = parse_mass("14.71 lb", default_unit="lb").stored
    limit = filling_limit_g(capacity_of_water_ml(water_g, US_WATER), "0.68", US_WATER)
    assert limit == pytest.approx(0.68 * water_g, abs=1)
    assert limit <= 0.68 * water_g


@FEW
@given(capacity=st.integers(1, 1_000_000), ratio=RATIOS, water=WATERS)
def test_the_limit_is_never_above_the_exact_figure_and_less_than_a_gram_below(
    capacity: int, ratio: str, water: WaterDefinition
) -> None:
    exact = capacity * water.g_per_ml * Fraction(ratio)
    assert 0 <= exact - filling_limit_g(capacity, ratio, water) < 1


@FEW
@given(charge=st.integers(1, 500_000), ratio=RATIOS, water=WATERS)
def test_an_inferred_capacity_gives_the_labelled_charge_again(charge: int, ratio: str, water: WaterDefinition) -> None:
    assert filling_limit_g(inferred_capacity_ml(charge, ratio, water), ratio, water) == charge


@FEW
@given(water_g=st.integers(1, 500_000), water=WATERS)
def test_a_capacity_from_water_never_holds_more_than_was_stamped(water_g: int, water: WaterDefinition) -> None:
    capacity = capacity_of_water_ml(water_g, water)
    assert 0 <= water_g - capacity * water.g_per_ml < water.g_per_ml


def test_one_gram_too_many_is_never_called_100_percent() -> None:
    assert percent_of_limit(4614, 4614) == 100
    assert percent_of_limit(4615, 4614) == 101
    assert percent_of_limit(4613, 4614) == 99
    assert percent_of_limit(2307, 4614) == 50
    assert percent_of_limit(0, 4614) == 0
    assert percent_of_limit(-20, 4614) == 0


@pytest.mark.parametrize("ratio", ["0", "-0.5", "1.01", "68"])
def test_a_ratio_outside_zero_to_one_is_refused(ratio: str) -> None:
    for function in (filling_limit_g, inferred_capacity_ml):
        with pytest.raises(OutOfRange) as refused:
            function(6800, ratio, US_WATER)
        assert refused.value.code == "ratio"


def test_a_ratio_is_exact_or_a_mistake_in_the_program() -> None:
    with pytest.raises(TypeError):
        filling_limit_g(6800, 0.68, US_WATER)  # type: ignore[arg-type]


@pytest.mark.parametrize("nothing", [0, -1])
def test_nothing_has_no_limit(nothing: int) -> None:
    refusals: list[tuple[Callable[[], int], str]] = [
        (lambda: filling_limit_g(nothing, "0.68", US_WATER), "capacity"),
        (lambda: capacity_of_water_ml(nothing, US_WATER), "capacity"),
        (lambda: inferred_capacity_ml(nothing, "0.68", US_WATER), "charge"),
        (lambda: percent_of_limit(100, nothing), "limit"),
    ]
    for call, code in refusals:
        with pytest.raises(OutOfRange) as refused:
            call()
        assert refused.value.code == code
