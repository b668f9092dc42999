"""End masses alone, against the forecast that they are a part of."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.condensation import Condensation
from bottles.physics.ends import likely_kg, limits_free_kg
from bottles.physics.forecast import forecast
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel, wall_heat
from tests.examples import times

LIMIT, VOLUME, WALL = 4.624, 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def vented(celsius):
    return start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=celsius + 273.15, start=Start())


@settings(max_examples=times(60), deadline=None)
@given(
    st.floats(0.1, 20.0), st.floats(-20.0, 45.0), st.floats(-30.0, 40.0), st.sampled_from([0.0, 5e-5]),
    st.floats(0.0, 1.0), st.booleans(),
)  # fmt: skip
def test_the_likely_mass_is_the_forecasts(net, source_c, receiver_c, line, figure, pickup):
    source = supply(net, source_c, liquid_pickup=pickup)
    whole = forecast(
        source=source, receiver_volume_m3=VOLUME, receiver_wall_j_k=WALL, receiver_temperature_k=receiver_c + 273.15,
        limit_kg=LIMIT, line_volume_m3=line, condensation=Condensation(figure, 0.1, "fitted"),
    )  # fmt: skip
    assert likely_kg(source, vented(receiver_c), LIMIT, line, figure) == pytest.approx(whole.likely_kg, abs=1e-5)


def test_the_limits_without_the_fill_limit_are_the_transfers():
    for net, celsius in ((19.72, -20.0), (19.72, 20.0), (6.9, 0.0)):
        transfer = Transfer(supply(net), vented(celsius))
        assert limits_free_kg(supply(net), vented(celsius)) == pytest.approx(
            (transfer.slow_free_kg(), transfer.mixed_free_kg()), abs=1e-6
        )


def test_the_cautious_end_counts_no_vapour_that_comes_without_liquid():
    wall, mixed = limits_free_kg(supply(3.0), vented(0.0))
    assert wall == 0.0 and mixed > 0.1
    assert likely_kg(supply(3.0), vented(0.0), LIMIT, figure=0.4) == pytest.approx(0.4 * mixed)


def test_vapour_drawn_on_purpose_has_one_end_whatever_the_figure():
    wall, mixed = limits_free_kg(supply(19.0, liquid_pickup=False), vented(0.0))
    assert wall == mixed > 0.1


def test_a_bottle_at_its_limit_takes_nothing():
    full = start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=263.15, start=Start("weighed", LIMIT))
    assert likely_kg(supply(19.0), full, LIMIT) == 0.0
