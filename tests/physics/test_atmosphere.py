"""The air's pressure by height, against the published standard atmosphere."""

import pytest

from shop.physics.atmosphere import ambient_pressure
from shop.physics.errors import OutOfRange, QuantityError
from shop.physics.units import in_own_unit, parse_length


@pytest.mark.parametrize(
    ("height_m", "pascal"),
    [
        # U.S. Standard Atmosphere, 1976, table I, geopotential heights (from memory).
        (0, 101_325.0),
        (1_000, 89_874.6),
        (2_000, 79_495.2),
        (5_000, 54_019.9),
        (11_000, 22_632.1),
    ],
)
def test_the_air_thins_with_height_as_published(height_m: int, pascal: float) -> None:
    assert ambient_pressure(height_m) == pytest.approx(pascal, rel=1e-5)


@pytest.mark.parametrize("height_m", [-2_001, 11_001, float("nan")])
def test_a_height_outside_the_lower_atmosphere_is_refused(height_m: float) -> None:
    with pytest.raises(OutOfRange) as refused:
        ambient_pressure(height_m)
    assert refused.value.code == "height"


def test_a_shop_below_the_sea_has_a_negative_height() -> None:
    entry = parse_length("-3 m", default_unit="m", below_zero=True)
    assert entry.stored == -3_000_000
    assert in_own_unit(entry.stored, entry.unit) == "-3 m"
    with pytest.raises(QuantityError) as refused:
        parse_length("-3 m", default_unit="m")
    assert refused.value.code == "negative"
