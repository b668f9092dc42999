"""A forecast says what the readings say, how wide that is, and which of them contradict each other."""

from __future__ import annotations

import json
from dataclasses import replace
from datetime import timedelta
from typing import Any

import pytest

from bottles.models import Tare, TarePart
from bottles.selectors.filling_facts import FITTINGS_G, known_contents, takes_liquid, walls_of
from bottles.selectors.filling_offers import readings_offered, supplies_offered
from bottles.services import refill_steps
from bottles.services.forecasting import Answer, ReadingMissing, work_out
from bottles.services.stations import line_volume_m3
from shop.base import clock
from shop.base.errors import Refusal
from tests import factories
from tests.bottles.of_refill import LIMIT_G, SUPPLY_NET_G, SUPPLY_TARE_G, TARE_G, Works, degrees, gauge, grams, key

pytestmark = pytest.mark.django_db

# Saturation of nitrous oxide at 20 °C: 50.53 bar absolute, 785 and 158 kg/m³ (NIST WebBook, 293.15 K).
LEAST_G, LIQUID_FULL_G = 4_580, 22_770


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def codes(answer: Answer) -> set[str]:
    reading = answer.contents.warnings if answer.contents else ()
    return {code for code, _ in (*answer.notes, *answer.transferred.warnings, *reading)}


def test_a_weighed_supply_gives_low_likely_and_high_up_to_the_limit(works: Works) -> None:
    answer = works.forecast()
    assert 0 < answer.low_g <= answer.likely_g <= answer.high_g <= LIMIT_G - 300 + 1
    assert answer.start_g == 300 and answer.target_g == LIMIT_G
    assert answer.source is not None and (answer.source.grams, answer.source.origin) == (SUPPLY_NET_G, "weighed before")
    assert answer.source_left_g == pytest.approx(SUPPLY_NET_G - answer.likely_g - answer.line_g, abs=2)
    assert not answer.danger and answer.contents.agrees is True


def test_a_colder_bottle_takes_no_less(works: Works) -> None:
    warm, cool, cold = (works.forecast(bottle_temperature=degrees(text)) for text in ("20 °C", "5 °C", "-12 °C"))
    assert warm.likely_g <= cool.likely_g <= cold.likely_g and warm.likely_g < cold.likely_g


def test_a_gauge_alone_cant_tell_how_much_liquid_is_left(works: Works) -> None:
    unknown = works.connected("S-11", net_g=None)
    answer = works.forecast(supply=unknown)
    assert answer.source is None and answer.likely_g is None and answer.source_left_g is None
    assert answer.contents.least_kg * 1000 == pytest.approx(LEAST_G, rel=0.01)
    assert answer.contents.most_kg * 1000 == pytest.approx(19_679, abs=1)  # its limit by 49 CFR
    assert {"liquid_unknown", "source_unknown"} <= codes(answer)
    assert answer.low_g < answer.high_g


def test_neither_gauge_nor_weight_is_too_little(works: Works) -> None:
    unknown = works.connected("S-11", net_g=None)
    with pytest.raises(ReadingMissing):
        works.forecast(supply=unknown, gauge=None)


def test_a_weight_now_counts_before_the_books(works: Works) -> None:
    works.station.supply_scale = factories.ScaleFactory(capacity_g=100_000)
    works.station.save()
    answer = works.forecast(supply_weight=grams(SUPPLY_TARE_G + 9_000))
    assert (answer.source.grams, answer.source.origin) == (9_000, "weighed now")
    with pytest.raises(Refusal) as caught:
        works.forecast(supply_weight=grams(SUPPLY_TARE_G - 2_000))
    assert caught.value.code == "tare above gross"


def test_a_gauge_below_the_vapour_pressure_says_no_liquid_or_a_wrong_reading(works: Works) -> None:
    answer = works.forecast(gauge=gauge("35 bar"))
    assert {"no_liquid", "reads_below_weight"} <= codes(answer)
    assert answer.contents.agrees is False and not answer.danger
    unknown = works.connected("S-11", net_g=None)
    vapour = works.forecast(supply=unknown, gauge=gauge("35 bar"))
    assert vapour.contents.region == "vapour" and vapour.contents.most_kg < LEAST_G / 1000


def test_a_gauge_within_the_tolerances_is_no_contradiction(works: Works) -> None:
    # 30 psi of the gauge and 1 K of the thermometer (about 1.2 bar there) either way.
    for text in ("47.8 bar", "51.2 bar"):
        answer = works.forecast(gauge=gauge(text))
        assert answer.contents.region == "saturated" and not answer.danger


def test_a_gauge_above_by_more_is_a_danger_sign(works: Works) -> None:
    answer = works.forecast(gauge=gauge("62 bar"))
    assert answer.danger and answer.blocked and "above_vapour_pressure" in codes(answer)


def test_a_temperature_taken_in_the_air_is_trusted_less(works: Works) -> None:
    # 3 K more of tolerance are about 3.5 bar of vapour pressure there.
    reading = gauge("54.5 bar")
    assert works.forecast(gauge=reading).danger
    assert not works.forecast(gauge=reading, taken="air").danger


def test_books_alone_dont_make_a_full_gauge_a_danger_sign(works: Works) -> None:
    small = works.connected("S-12", net_g=6_000)
    refill = works.open(supply=small, gauge=None)
    refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(4_200), ended_by="by hand")
    assert known_contents(small.bottle).still_as_weighed is False
    other = works.bottle_to_fill("T-0413")
    answer = works.forecast(other, small)  # the books say 2.1 kg of vapour, the gauge that there's liquid
    assert not answer.blocked and answer.contents.agrees is False
    assert answer.likely_g is None and answer.high_g > 2_000


def test_how_it_starts_matters(works: Works) -> None:
    warm = {"bottle_temperature": degrees("20 °C"), "bottle_weight": None}
    vented, vapour, air = (works.forecast(start=start, **warm) for start in ("vented", "own vapour", "air"))
    assert vented.start_g < 20  # vapour at the room's pressure: 6.8 L of 1.8 g/L
    # By its last weighing it holds 300 g; saturated vapour would be 158 kg/m³ of 6.8 L, 1 074 g.
    assert vapour.start_g == 300
    assert air.start_g == 0 and "air" in codes(air)
    assert air.likely_g < vented.likely_g


def test_a_start_that_the_scale_contradicts_is_told(works: Works) -> None:
    assert "not_vented" in codes(works.forecast(start="vented"))


def test_each_bottle_is_as_sure_as_the_scale_it_stood_on(works: Works) -> None:
    coarse = factories.ScaleFactory(name="floor scale", capacity_g=200_000, error_g=400)
    works.station.supply_scale = coarse
    works.station.save()
    floor = {"supply_weight": grams(SUPPLY_TARE_G + SUPPLY_NET_G), "bottle_temperature": degrees("15 °C")}
    answer = works.forecast(**floor)
    own = known_contents(works.bottle).error_on(works.scale)
    read = answer.pair.tolerances
    assert read.scale_kg * 1000 == answer.source.error_g > 400 > own
    assert read.receiver_scale_kg * 1000 == own == answer.own.error_g and answer.own.origin == "weighed now"
    plain = dict(works.forecast(bottle_temperature=degrees("15 °C")).transferred.width)
    width = dict(answer.transferred.width)
    assert width["source weight"] > 5 * plain["source weight"]
    assert width["receiver weight"] == pytest.approx(plain["receiver weight"])
    # Where it isn't weighed now its last weighing counts, as long as nothing moved since.
    before = works.forecast(bottle_weight=None, **floor)
    assert before.pair.tolerances.receiver_scale_kg * 1000 == known_contents(works.bottle).error_g == before.own.error_g
    assert before.own.origin == "weighed before"


def test_without_a_weight_and_without_a_start_nothing_is_guessed(works: Works) -> None:
    new = factories.BottleFactory(code="T-0500")
    with pytest.raises(Refusal) as caught:
        work_out(works.asked(new), works.readings(bottle_weight=None))
    assert caught.value.code == "start unknown"


def test_an_unknown_wall_widens_the_span(works: Works) -> None:
    warm = {"bottle_temperature": degrees("5 °C")}
    known = works.forecast(**warm)
    for bottle in (works.bottle, works.supply.bottle):
        bottle.wall = "unknown"
        bottle.save()
    by_the_mark = works.forecast(**warm)  # DOT-3AL is aluminium, DOT-3AA steel (49 CFR 178.46, 178.37)
    assert "wall_unknown" not in codes(by_the_mark)
    assert (by_the_mark.low_g, by_the_mark.high_g) == (known.low_g, known.high_g)
    works.supply.bottle.mark = ""
    works.supply.bottle.save()
    unknown = works.forecast(**warm)
    assert "wall_unknown" in codes(unknown)
    assert unknown.low_g <= known.low_g and unknown.high_g >= known.high_g
    assert unknown.high_g - unknown.low_g > known.high_g - known.low_g


def test_the_walls_mass_is_the_bottles_own_part_of_the_tare(works: Works) -> None:
    # 5.9 kg of aluminium at 896 J/kg/K.
    assert walls_of(works.bottle).heat_j_k == pytest.approx((5.9 * 896,))
    whole = Tare.objects.create(
        act=factories.ActFactory(), bottle=works.bottle, since=clock.now(), total_g=TARE_G, error_g=10, basis="stamped"
    )
    TarePart.objects.create(act=factories.ActFactory(), tare=whole, thing="bottle", grams=TARE_G, typed="6420 g")
    guessed = walls_of(works.bottle)
    assert guessed.heat_j_k == pytest.approx(((TARE_G - FITTINGS_G) / 1000 * 896,)) and guessed.assumed


def test_liquid_leaves_by_tube_upright_or_without_one_upside_down(works: Works) -> None:
    found = {}
    for tube in ("dip", "none", "unknown"):
        works.bottle.dip_tube = tube
        found[tube] = [takes_liquid(works.bottle, inverted=inverted) for inverted in (False, True)]
    assert found == {"dip": [True, False], "none": [False, True], "unknown": [None, None]}


def test_a_supply_that_gives_vapour_only_fills_less(works: Works) -> None:
    liquid = works.forecast(bottle_temperature=degrees("5 °C"))
    works.supply.inverted = True
    works.supply.save()
    vapour = works.forecast(bottle_temperature=degrees("5 °C"))
    assert vapour.transferred.mixed.moved_kg < liquid.transferred.mixed.moved_kg
    assert "no_source_liquid" in codes(vapour)


def test_the_line_is_what_the_hose_holds(works: Works) -> None:
    # π/4 · (4.8 mm)² · 1.5 m = 27.1 mL; of liquid at 785 kg/m³: 21.3 g.
    assert line_volume_m3(works.station) == pytest.approx(27.14e-6, rel=1e-3)
    assert works.forecast().line_g == pytest.approx(21, abs=1)
    works.station.line_loss_g = 75
    works.station.save()
    assert works.forecast().line_g == 75


def test_a_target_below_the_limit_is_forecast_for(works: Works) -> None:
    answer = works.forecast(target=grams(2_000))
    assert answer.target_g == 2_000 and answer.high_g <= 1_701


def test_temperatures_are_offered_again_with_their_age(works: Works) -> None:
    assert readings_offered(works.station).values == {}
    works.open()
    offered = readings_offered(works.station)
    assert offered.values["supply_temperature"] == "20 °C" and offered.values["bottle_temperature"] == "-12 °C"
    assert "0 min ago by front desk" in offered.ages["supply_temperature"]
    with clock.pretend(clock.now() + timedelta(hours=9)):
        late = readings_offered(works.station)
    assert late.values == {} and "9 h ago" in late.ages["supply_temperature"]


def test_the_weakest_supply_is_offered_first(works: Works) -> None:
    works.connected("S-01", net_g=16_000)
    works.connected("S-02", net_g=5_000)
    works.connected("S-03", net_g=None)
    offered = [supply.bottle.code for supply in supplies_offered(works.bottle)]
    assert offered == ["S-02", "S-07", "S-01", "S-03"]


def test_what_is_kept_can_be_read_again(works: Works) -> None:
    answer = works.forecast()
    assert json.loads(json.dumps(answer.result()))["line_g"] == answer.line_g
    assert answer.readings.plain()["gauge"] == {"typed": "49.5 bar", "stored": answer.readings.gauge.stored, "unit": "bar"}
    assert replace(answer.readings, gauge=None).plain()["gauge"] is None
