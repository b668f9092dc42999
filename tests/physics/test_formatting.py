"""Figures are shown no finer than they are known, and limits never rounded up."""

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shop.physics.formatting import (
    MassStyle,
    format_length,
    format_mass,
    format_pressure,
    format_temperature,
    format_volume,
    grams_not_above,
    reading_not_above,
    unit_system,
)
from shop.physics.units import parse_mass
from tests.examples import times

STYLES: list[MassStyle] = ["g", "kg", "lb", "oz", "lb oz", "lb-oz"]
FEW = settings(max_examples=times(50), deadline=None)
RESOLUTIONS = st.sampled_from([1, 2, 5, 9, 10, 14, 20, 23, 28, 45, 50, 57, 100, 200, 454])


@pytest.mark.parametrize(
    ("grams", "style", "resolution", "shown"),
    [
        (11060, "kg", 10, "11.06 kg"),
        (11064, "kg", 10, "11.06 kg"),
        (11065, "kg", 10, "11.06 kg"),  # half to even
        (11075, "kg", 10, "11.08 kg"),
        (11060, "kg", 1, "11.060 kg"),
        (11062, "kg", 5, "11.060 kg"),
        (11060, "kg", 20, "11.06 kg"),
        (11060, "kg", 50, "11.05 kg"),  # 221.2 steps
        (11060, "kg", 100, "11.1 kg"),
        (11060, "kg", None, "11.06 kg"),
        (11060, "g", 1, "11060 g"),
        (11063, "g", 10, "11060 g"),
        (4309, "lb", 45, "9.5 lb"),  # 9.4997 lb on a scale of 0.1 lb
        (4309, "lb", None, "9.5 lb"),
        (4309, "lb", 5, "9.50 lb"),  # 0.01 lb is 4.5 g, kept as 5
        (4309, "lb", 10, "9.50 lb"),  # next after 10 g: 0.05 lb
        (4309, "lb", 23, "9.50 lb"),  # 0.05 lb, kept as 23
        (4536, "lb", 45, "10.0 lb"),
        (11056, "lb oz", 28, "24 lb 6 oz"),
        (11056, "lb-oz", 28, "24-6"),
        (11070, "lb-oz", 14, "24-6.5"),
        (10885, "lb oz", 28, "24 lb 0 oz"),  # 23 lb 15.96 oz, never 23 lb 16 oz
        (100, "oz", None, "4 oz"),
        (0, "kg", 10, "0.00 kg"),
        (-340, "kg", 10, "−0.34 kg"),
        (-4, "kg", 10, "0.00 kg"),
        (-510, "lb oz", 28, "−1 lb 2 oz"),  # 17.99 oz
    ],
)
def test_a_weight_is_shown_no_finer_than_its_scale(
    grams: int, style: MassStyle, resolution: int | None, shown: str
) -> None:
    assert format_mass(grams, style, resolution) == shown


@pytest.mark.parametrize(
    ("style", "resolution", "spread", "shown"),
    [
        ("kg", 10, 50, "11.06 ±0.05 kg"),
        ("kg", 10, 51, "11.06 ±0.06 kg"),
        ("kg", 10, 1, "11.06 ±0.01 kg"),
        ("kg", 10, 0, "11.06 ±0.00 kg"),
        ("lb", 45, 50, "24.4 ±0.2 lb"),
        ("lb oz", 28, 50, "24 lb 6 oz ±2 oz"),
        ("lb-oz", 28, 50, "24 lb 6 oz ±2 oz"),
    ],
)
def test_a_spread_is_rounded_up(style: MassStyle, resolution: int, spread: int, shown: str) -> None:
    assert format_mass(11060, style, resolution, plus_minus_g=spread) == shown


@FEW
@given(grams=st.integers(0, 200_000), style=st.sampled_from(STYLES), resolution=RESOLUTIONS)
def test_a_weight_shown_is_within_half_a_step_of_the_truth(grams: int, style: MassStyle, resolution: int) -> None:
    again = parse_mass(format_mass(grams, style, resolution), default_unit="kg").stored
    # Steps that scales have grow by 2.5 at most; a resolution may be a rounded step.
    assert abs(again - grams) <= Fraction(5, 4) * (resolution + 1) + 1


@pytest.mark.parametrize(
    ("grams", "style", "resolution", "shown"),
    [
        (11030, "kg", 10, "11.03 kg"),
        (11039, "kg", 10, "11.03 kg"),
        (11056, "kg", 50, "11.05 kg"),
        (11056, "lb oz", 28, "24 lb 5 oz"),  # 24 lb 6 oz is 11056.31 g: just above
        (11057, "lb oz", 28, "24 lb 6 oz"),
        (11057, "lb-oz", 28, "24-6"),
        (11057, "lb", 45, "24.3 lb"),  # 24.377 lb
        (27, "lb oz", 28, "0 lb 0 oz"),
        (11030, "g", 20, "11020 g"),
    ],
)
def test_a_reading_to_stop_at_is_rounded_down(grams: int, style: MassStyle, resolution: int, shown: str) -> None:
    assert reading_not_above(grams, style, resolution) == shown


@FEW
@given(grams=st.integers(0, 200_000), style=st.sampled_from(STYLES), resolution=RESOLUTIONS)
def test_the_reading_in_grams_is_never_above_and_settled(grams: int, style: MassStyle, resolution: int) -> None:
    down = grams_not_above(grams, style, resolution)
    assert grams - Fraction(5, 2) * (resolution + 1) - 1 <= down <= grams
    assert grams_not_above(down, style, resolution) == down
    # The words for it are the same before and after, so a page and a receipt agree.
    assert reading_not_above(down, style, resolution) == reading_not_above(grams, style, resolution)
    # And typing those words gives no more than the limit.
    assert parse_mass(reading_not_above(grams, style, resolution), default_unit="kg").stored <= (grams)


def test_a_negative_limit_has_no_reading() -> None:
    with pytest.raises(ValueError):
        reading_not_above(-1, "kg", 10)


@pytest.mark.parametrize("resolution", [0, -5])
def test_a_scale_without_a_resolution_is_a_mistake_in_the_program(resolution: int) -> None:
    with pytest.raises(ValueError):
        format_mass(100, "kg", resolution)


def test_a_weight_has_no_style_but_those() -> None:
    with pytest.raises(ValueError):
        format_mass(100, "psi", 10)  # type: ignore[arg-type]


def test_pressures() -> None:
    assert format_pressure(6_651_344, "psi", 101_325) == "950 psi"
    assert format_pressure(6_651_344, "bar", 101_325) == "65.5 bar"
    assert format_pressure(6_651_344, "bara", 101_325) == "66.5 bara"
    assert format_pressure(6_651_344, "psia", 101_325) == "965 psia"
    assert format_pressure(6_651_344, "MPa", 101_325) == "6.55 MPa"
    assert format_pressure(6_651_344, "kPa", 101_325) == "6550 kPa"
    assert format_pressure(101_325, "psi", 101_325.0) == "0 psi"
    assert format_pressure(6_651_344, "psi", 101_325, step="10") == "950 psi"
    assert format_pressure(6_651_344, "bar", 101_325, plus_minus_pa=150_001) == "65.5 ±1.6 bar"


def test_temperatures() -> None:
    assert format_temperature(293_150, "°C") == "20 °C"
    assert format_temperature(293_150, "°F") == "68 °F"
    assert format_temperature(261_150, "°C") == "−12 °C"
    assert format_temperature(261_150, "°C", step="0.1") == "−12.0 °C"
    assert format_temperature(293_150, "K", step="0.01") == "293.15 K"
    # A ± is a difference: 1 K is 1.8 °F, with no zero shifted.
    assert format_temperature(293_150, "°F", plus_minus_mk=1000) == "68 ±2 °F"
    assert format_temperature(273_000, "°C") == "0 °C"


def test_volumes() -> None:
    assert format_volume(6800, "L") == "6.80 L"
    assert format_volume(6800, "in3") == "415 in³"
    assert format_volume(6800, "mL", plus_minus_ml=30) == "6800 ±30 mL"
    assert format_volume(6800, "gal") == "1.80 gal"


def test_lengths() -> None:
    assert format_length(914, "in") == ".036 in"
    assert format_length(914, "mm") == "0.91 mm"
    assert format_length(914, "thou") == "36 thou"
    assert format_length(50_800, "in", step="0.1") == "2.0 in"
    assert format_length(1_219_200, "ft") == "4.0 ft"
    assert format_length(914, "in", plus_minus_um=25) == ".036 ±.001 in"


@pytest.mark.parametrize("step", ["0", "-1", "1/3"])
def test_a_step_is_a_decimal_above_zero(step: str) -> None:
    with pytest.raises(ValueError):
        format_volume(6800, "L", step=step)


def test_a_person_chooses_one_system() -> None:
    us, metric = unit_system("us"), unit_system("metric")
    assert (us.mass, us.pressure, us.temperature, us.bore) == ("lb", "psi", "°F", "in")
    assert (metric.mass, metric.pressure, metric.temperature) == ("kg", "bar", "°C")
    assert unit_system("us", ounces=True).mass == "lb oz"
    for system in (us, metric):
        assert format_mass(4309, system.mass)
        assert format_pressure(6_651_344, system.pressure, 101_325)
        assert format_temperature(293_150, system.temperature)
        assert format_volume(6800, system.volume)
        assert format_length(914, system.bore)
        assert format_length(914, system.length)
    with pytest.raises(ValueError):
        unit_system("imperial")
