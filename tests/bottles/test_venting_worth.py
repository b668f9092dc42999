"""What letting out would do to a bottle as it is now."""

import pytest

from bottles.selectors.filling_facts import takes_liquid
from bottles.services.venting_worth import venting_worth
from tests.factories import BottleFactory, weighed

pytestmark = pytest.mark.django_db
TARE, ROOM = 6_300, 293_150


def bottle_of(grams, **more):
    bottle = BottleFactory(**{"capacity_ml": 6_800, "dip_tube": "dip", "wall": "aluminium"} | more)
    weighed(bottle, gross_g=TARE + grams, tare_g=TARE)
    return bottle


def cooled(row):
    return (ROOM - row.temperature_mk) / 1000


def test_a_pound_of_vapour_cools_several_times_as_much_as_a_pound_of_liquid():
    """A 10-lb aluminium bottle: 6 to 8 degrees and 1 to 2 (common practice, no source)."""
    upright, inverted = venting_worth(bottle_of(4_536), amount_g=454, limit_g=4_624, temperature_mk=ROOM)
    assert (upright.phase, upright.inverted, inverted.phase, inverted.inverted) == ("liquid", False, "vapour", True)
    assert 1.0 <= cooled(upright) <= 2.0
    assert 6.0 <= cooled(inverted) <= 8.0
    assert inverted.pressure_pa < upright.pressure_pa


def test_an_overfull_bottle_is_told_what_its_way_down_does():
    rows = venting_worth(bottle_of(5_000), amount_g=454, limit_g=4_624, temperature_mk=ROOM)
    assert [row.lost_g for row in rows] == [454, 376, 454, 376]


@pytest.mark.parametrize("more", [{"dip_tube": "unknown"}, {"capacity_ml": None}])
def test_what_is_not_known_tells_nothing(more):
    assert venting_worth(bottle_of(4_000, **more), amount_g=454, limit_g=None, temperature_mk=ROOM) == []


@pytest.mark.parametrize(
    ("tube", "inverted", "liquid"),
    [("dip", False, True), ("dip", True, False), ("none", False, False), ("none", True, True), ("unknown", False, None)],
)
def test_tube_and_attitude_say_whether_liquid_comes(tube, inverted, liquid):
    assert takes_liquid(BottleFactory(dip_tube=tube), inverted=inverted) is liquid


def test_the_page_shows_it_before_the_form(shop, manager, client_of):
    page = client_of(manager).get(f"/b/{bottle_of(4_536).code}/vent").content.decode()
    assert "What letting out does" in page and "upside down" in page
