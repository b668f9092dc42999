"""The pressure of one fill over many temperatures."""

import numpy as np
import pytest

from bottles.physics.contents import one_phase_temperature, split_of
from bottles.physics.warming_curve import pressures_of_fill
from shop.physics.errors import OutOfRange

LITRES = 6.8e-3


@pytest.mark.parametrize("net", [0.05, 1.0, 3.0, 4.5, 5.6])
def test_the_curve_is_the_same_as_one_state_after_the_other(net):
    kelvin = np.linspace(235.0, 330.0, 60)
    singly = [split_of(net, LITRES, float(t)).pressure_pa for t in kelvin]
    assert pressures_of_fill(net, LITRES, kelvin) == pytest.approx(singly, rel=2e-8)


def test_it_rises_all_the_way_and_far_faster_once_the_bottle_is_full_of_liquid():
    full_at, becomes = one_phase_temperature(5.2, LITRES)
    assert becomes == "liquid-full"
    kelvin = np.array([full_at - 4.0, full_at - 2.0, full_at + 2.0, full_at + 4.0])
    pressure = pressures_of_fill(5.2, LITRES, kelvin)
    assert (np.diff(pressure) > 0).all()
    assert pressure[3] - pressure[2] > 3.0 * (pressure[1] - pressure[0])


def test_an_empty_bottle_and_a_temperature_out_of_range_are_refused():
    with pytest.raises(OutOfRange) as refused:
        pressures_of_fill(0.0, LITRES, [290.0])
    assert refused.value.code == "net"
    with pytest.raises(OutOfRange) as refused:
        pressures_of_fill(1.0, LITRES, [290.0, 600.0])
    assert refused.value.code == "temperature_range"
