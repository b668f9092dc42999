"""The curve of the pressure that a bottle's own fill shows as it warms."""

import pytest

from bottles.selectors.contents import holding_of
from bottles.views.refill_words import refill_words
from bottles.views.warming_chart import warming_chart
from tests.factories import BottleFactory, weighed

pytestmark = pytest.mark.django_db
TARE = 6_400


def drawn(bottle, shop, rf, person):
    request = rf.get("/")
    request.user = person
    return warming_chart(holding_of(bottle), bottle, refill_words(request, shop))


def test_a_full_bottle_tells_where_it_is_full_of_liquid_and_goes_no_further_than_52_degrees(shop, rf, manager):
    bottle = BottleFactory(capacity_ml=6_800)
    weighed(bottle, gross_g=TARE + 4_600, tare_g=TARE)
    chart = drawn(bottle, shop, rf, manager)
    assert "full of liquid" in chart["svg"]
    pressures = [float(row[1].replace("\N{NARROW NO-BREAK SPACE}", "").replace(",", "")) for row in chart["rows"]]
    assert len(pressures) > 20 and pressures == sorted(pressures)


def test_a_nearly_empty_bottle_tells_where_no_liquid_is_left(shop, rf, manager):
    bottle = BottleFactory(capacity_ml=6_800)
    weighed(bottle, gross_g=TARE + 700, tare_g=TARE)
    assert "no liquid left" in drawn(bottle, shop, rf, manager)["svg"]


def test_nothing_is_drawn_where_nothing_is_known(shop, rf, manager):
    bottle = BottleFactory(capacity_ml=6_800)
    assert drawn(bottle, shop, rf, manager) is None
    weighed(bottle, gross_g=TARE, tare_g=TARE)
    assert drawn(bottle, shop, rf, manager) is None


def test_the_bottles_page_shows_it(shop, manager, client_of):
    bottle = BottleFactory(capacity_ml=6_800)
    weighed(bottle, gross_g=TARE + 4_600, tare_g=TARE)
    assert "warming-chart" in client_of(manager).get(bottle.get_absolute_url()).content.decode()
