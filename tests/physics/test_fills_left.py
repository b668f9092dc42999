"""How many full fills a supply bottle has left."""

from __future__ import annotations

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.physics.condensation import Condensation
from bottles.physics.fills_left import fills_left
from bottles.physics.forecast import forecast
from bottles.physics.joining import Transfer
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import FILL_LIMIT, mixed
from bottles.physics.vessel import Vessel, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from tests.examples import times

LIMIT = 4.624
VOLUME, WALL = 6.8e-3, wall_heat("aluminium", 5.9)


def supply(net=19.72, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def into(celsius=-5.0, kind="vented", net=None, volume=VOLUME, wall=WALL):
    return start_vessel(volume_m3=volume, wall_j_k=wall, temperature_k=celsius + 273.15, start=Start(kind, net))


def codes(told):
    return [code for code, _ in told.warnings]


@pytest.mark.parametrize("net", [19.72, 15.0, 11.0, 8.0, 5.0, 0.5])
@pytest.mark.parametrize(("limit", "share"), [(LIMIT, 1.0), (0.68, 0.15)])
def test_warmed_up_between_fills_it_counts_what_the_forecast_counts(net, limit, share):
    line = 5e-5
    receiver = into(-5.0, volume=VOLUME * share, wall=WALL * share)
    told = fills_left(supply(net), receiver, limit, line_volume_m3=line)
    other = forecast(
        source=supply(net), receiver_volume_m3=VOLUME * share, receiver_wall_j_k=WALL * share,
        receiver_temperature_k=268.15, limit_kg=limit, line_volume_m3=line,
    )  # fmt: skip
    assert told.warmed_quick.count == other.full_fills
    assert len(told.warmed_quick.before_kg) == told.warmed_quick.count


def test_each_counted_fill_is_full_and_the_next_is_not():
    told = fills_left(supply(), into(), LIMIT)
    for fills in (told.warmed_quick, told.straight_quick):
        states = zip(fills.before_kg, fills.before_k, strict=True)
        for net, kelvin in states:
            assert mixed(Transfer(supply(net, kelvin - 273.15), into()), LIMIT).stopped_by == FILL_LIMIT
        after = mixed(Transfer(supply(fills.left_kg, fills.left_k - 273.15), into()), LIMIT)
        assert after.stopped_by != FILL_LIMIT
        assert after.moved_kg == pytest.approx(fills.then_kg, abs=1e-4)


def test_without_time_to_warm_each_fill_starts_colder_where_the_last_one_ended():
    told = fills_left(supply(), into(), LIMIT).straight_quick
    assert list(told.before_k) == sorted(told.before_k, reverse=True)
    first = mixed(Transfer(supply(), into()), LIMIT)
    assert told.before_kg[1] == pytest.approx(first.source_left_kg)
    assert told.before_k[1] == pytest.approx(first.source_final_k, abs=1e-4)


def test_a_supply_without_time_to_warm_gives_no_more_fills():
    warm = into(10.0)
    counts = [fills_left(supply(net), warm, LIMIT) for net in (19.72, 17.0, 14.0, 12.0)]
    assert all(each.straight_quick.count <= each.warmed_quick.count for each in counts)
    assert any(each.straight_quick.count < each.warmed_quick.count for each in counts)
    assert any("cools_itself" in codes(each) for each in counts)


def test_the_likely_count_follows_the_condensation_figure():
    certain = Condensation(1.0, 0.0, "fitted to 12 refills")
    told = fills_left(supply(), into(), LIMIT, condensation=certain)
    assert told.warmed_likely.count == told.warmed_quick.count
    assert "condensation_prior" not in codes(told)
    slow = fills_left(supply(), into(5.0), LIMIT, condensation=Condensation(0.0, 0.0, "fitted to 12 refills"))
    assert slow.warmed_likely.count == 0 < slow.warmed_quick.count


def test_small_bottles_are_counted_by_the_dozen():
    told = fills_left(supply(), into(-20.0, volume=5e-4, wall=500.0), 0.3)
    assert told.warmed_quick.count > 40
    assert told.straight_quick.left_k < 293.15


def test_no_fill_at_all_is_said():
    told = fills_left(supply(3.0), into(), LIMIT)
    assert told.warmed_quick.count == 0
    assert told.warmed_quick.left_kg == 3.0
    assert codes(told)[0] == "no_full_fill"
    assert codes(fills_left(supply(), into(0.0, "weighed", 4.7), LIMIT)) == ["receiver_full"]


def test_limits_and_lines_that_cannot_be_are_refused():
    for limit, line in ((0.0, 0.0), (LIMIT, -1.0)):
        with pytest.raises(OutOfRange):
            fills_left(supply(), into(), limit, line_volume_m3=line)


@settings(max_examples=times(25), deadline=None)
@given(st.floats(0.0, 24.0), st.floats(-40.0, 52.0), st.floats(-40.0, 52.0), st.sampled_from([0.0, 5e-5]))
def test_any_supply_gets_a_count(net, celsius, receiver, line):
    try:
        source = supply(net, celsius)
    except PhysicsError:
        return
    told = fills_left(source, into(receiver), LIMIT, line_volume_m3=line)
    json.dumps(told.as_dict(), allow_nan=False)
    for fills in (told.warmed_quick, told.warmed_likely, told.straight_quick, told.straight_likely):
        assert 0 <= fills.count <= net / (LIMIT - into(receiver).net_kg) + 1e-9
        assert fills.left_kg >= 0.0
