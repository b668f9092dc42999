"""What the shop's own refills tell: gathered from what stands, fitted, laid down, used in the next forecast."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
from django.test.utils import CaptureQueriesContext

from bottles.models import Bottle, Fit, Forecast, Refill, Station, Weighing
from bottles.physics.condensation import PRIOR, between
from bottles.physics.fitting import ENOUGH, fit
from bottles.selectors.learning import latest_figures, went
from bottles.services import refill_steps as steps
from bottles.services.forecasting import work_out
from bottles.services.learning import Gathered, gather, learn
from bottles.services.weighing import strike
from shop.base import jobs
from shop.base.models import Act, Job
from tests import factories
from tests.bottles.of_refill import SUPPLY_TARE_G, Works, degrees, grams, key

pytestmark = pytest.mark.django_db(transaction=True)

COOL = "5 °C"  # cold enough to flow well, too warm for a full fill
FIGURE = 0.7


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def refilled(
    works: Works, code: str, figure: float = FIGURE, *, ended_by: str = "flow ceased", bottle: Bottle | None = None,
    wet: bool = False, **changes: Any,
) -> Refill:  # fmt: skip
    """A refill from a supply bottle of its own that went as the figure says, and a bottle that it ended in."""
    into = bottle or works.bottle_to_fill(code)
    supply = works.connected(f"S-{code}")
    refill = works.open(into, supply, bottle_temperature=degrees(COOL), **changes)
    told = Forecast.objects.latest("id").result
    quick, slow = (told[name]["moved_kg"] if told[name] else 0.0 for name in ("mixed", "wall_condensing"))
    came = round(1000 * between(slow, quick, figure))
    weight = works.weight(300 + came, line_off=True, wet=wet)
    done = steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=weight, ended_by=ended_by)
    assert done.closed, done.why_not
    refill.refresh_from_db()
    return refill


def several(works: Works, many: int = 6, **changes: Any) -> list[Refill]:
    return [
        refilled(works, f"T-{700 + number}", FIGURE + 0.04 * (number % 3 - 1), **changes) for number in range(many)
    ]


def learned(works: Works) -> list[Fit]:
    return learn(key=key(), shop=works.shop, gathered=gather(works.shop))


def reasons(works: Works) -> dict[str, int]:
    return dict(gather(works.shop).left_out.get(("", None), {}))


def test_each_refill_tells_the_figure_that_it_went_by(works: Works) -> None:
    for figure in (0.3, 0.8):
        refilled(works, f"T-{int(figure * 10)}", figure)
    told = gather(works.shop)
    # To the gram that a scale shows, of some four hundred between the limits.
    assert sorted(one.figure for one in told.observations) == [pytest.approx(0.3, abs=0.01), pytest.approx(0.8, abs=0.01)]
    assert {(one.way, one.size, one.censored) for one in told.observations} == {("dip", 7_500, False)}
    assert told.left_out == {} and told.through == Refill.objects.latest("id")


def test_enough_refills_change_the_next_forecast(works: Works) -> None:
    before = works.forecast(bottle_temperature=degrees(COOL))
    several(works)
    rows = {(row.way, row.size_ml): row for row in learned(works)}
    assert set(rows) == {("", None), ("dip", None), ("dip", 7_500)}
    of_size = rows["dip", 7_500]
    assert of_size.figure_milli == pytest.approx(1000 * FIGURE, abs=50) and (of_size.informative, of_size.bounds) == (6, 0)
    assert of_size.act.person is None and of_size.through == Refill.objects.latest("id")

    after = works.forecast(bottle_temperature=degrees(COOL))
    assert before.likely_g is not None and after.likely_g is not None
    assert before.transferred.condensation == PRIOR and before.fit is None
    assert after.likely_g > before.likely_g and after.high_g - after.low_g < before.high_g - before.low_g
    assert not after.transferred.condensation.is_prior
    origin = after.transferred.condensation.origin
    assert origin.startswith("6 refills of this shop, bottles of 5 to 7.5 L, through a dip tube, since 20")
    assert "condensation_prior" not in {code for code, _ in after.transferred.warnings}


def test_a_forecast_that_is_kept_names_the_fit_that_it_was_made_with(works: Works) -> None:
    several(works)
    learned(works)
    works.open(bottle_temperature=degrees(COOL))
    kept = Forecast.objects.latest("id")
    assert kept.fit == Fit.objects.get(way="dip", size_ml=7_500)
    assert kept.result["condensation"] == pytest.approx(kept.fit.figure_milli / 1000)


def test_too_few_refills_leave_the_prior(works: Works) -> None:
    several(works, ENOUGH - 1)
    assert all(row.informative == ENOUGH - 1 for row in learned(works))
    answer = works.forecast()
    assert answer.transferred.condensation == PRIOR and answer.fit is None


def test_refills_stopped_before_alone_leave_the_prior(works: Works) -> None:
    several(works, ENOUGH + 1, ended_by="by hand")
    rows = learned(works)
    assert {(row.informative, row.bounds) for row in rows} == {(0, ENOUGH + 1)}
    assert works.forecast().transferred.condensation == PRIOR


def test_a_size_without_refills_takes_that_of_its_way_and_an_unknown_tube_that_of_the_shop(works: Works) -> None:
    several(works)
    learned(works)
    figures = latest_figures(works.shop)

    def row(**changes: Any) -> Fit | None:
        return figures.of(factories.BottleFactory.build(**changes)).fit

    assert row(dip_tube="dip", capacity_ml=6_800) == Fit.objects.get(way="dip", size_ml=7_500)
    assert row(dip_tube="dip", capacity_ml=13_600) == Fit.objects.get(way="dip", size_ml=None)
    for tube in ("unknown", "none"):
        assert row(dip_tube=tube, capacity_ml=6_800) == Fit.objects.get(way="", size_ml=None)


def test_what_changes_nothing_that_shows_is_not_laid_down_again(works: Works) -> None:
    several(works)
    assert learned(works)
    acts = Act.objects.count()
    assert learned(works) == []
    assert Act.objects.count() == acts  # not even an act that says nothing


def test_the_rows_that_hold_are_of_one_fit(works: Works) -> None:
    several(works)
    small = works.bottle_to_fill("T-0790", capacity_ml=5_000)
    refilled(works, "T-0790", bottle=small)
    learned(works)
    before = latest_figures(works.shop).rows
    # One more for the small ones is twice as many; for their way and for the shop it shows nothing.
    refilled(works, "T-0791", bottle=works.bottle_to_fill("T-0791", capacity_ml=5_000))
    new = learned(works)
    assert len({row.act_id for row in new}) == 1
    now = latest_figures(works.shop).rows
    counts = {scope: row.informative for scope, row in now.items()}
    assert counts == {("", None): 8, ("dip", None): 8, ("dip", 5_000): 2, ("dip", 7_500): 6}
    told = {(one.way, one.size): one for one in fit(gather(works.shop).observations)}
    assert all(row.figure_milli == round(told[scope].figure * 1000) for scope, row in now.items())
    # What came out the same holds since the day that it was laid down first.
    for scope, row in now.items():
        same = (row.figure_milli, row.deviation_milli, row.informative) == (
            before[scope].figure_milli, before[scope].deviation_milli, before[scope].informative
        )  # fmt: skip
        assert (row == before[scope]) is same


def test_a_weighing_struck_changes_the_fit(works: Works) -> None:
    refills = several(works)
    learned(works)
    refilled(works, "T-0799", 0.2)
    learned(works)
    with_it = latest_figures(works.shop).rows["dip", 7_500]
    last = Weighing.objects.get(refill__bottle__code="T-0799", bottle__code="T-0799", step="disconnected")
    strike(key=key(), person=works.person, weighing=last, reason="another bottle was on the scale")
    assert reasons(works) == {"reversed": 1}
    learned(works)
    now = latest_figures(works.shop).rows["dip", 7_500]
    assert (with_it.informative, now.informative) == (len(refills) + 1, len(refills))
    assert now.figure_milli > with_it.figure_milli and now.deviation_milli < with_it.deviation_milli


def test_a_weighing_put_right_is_learned_from(works: Works) -> None:
    refill = refilled(works, "T-0701", 0.2)
    wrong = Weighing.objects.get(refill=refill, bottle=refill.bottle)
    before = gather(works.shop).observations[0]
    strike(key=key(), person=works.person, weighing=wrong, reason="typed wrong", right=grams(wrong.gross_g + 200))
    after = gather(works.shop).observations[0]
    assert after.figure > before.figure + 0.1


def test_a_supply_weighing_put_right_is_learned_from(works: Works) -> None:
    """The books rest on that weighing: what the supply bottle held is read from what stands now."""
    refill = refilled(works, "T-0702")
    before = gather(works.shop).observations[0]
    weighed = Weighing.objects.get(bottle=refill.draws.get().source)
    right = grams(SUPPLY_TARE_G + 8_000)
    strike(key=key(), person=works.person, weighing=weighed, reason="the floor scale stood askew", right=right)
    after = gather(works.shop).observations[0]
    assert after.figure != pytest.approx(before.figure, abs=0.02)


def test_reasons_to_stay_out_are_counted(works: Works) -> None:
    refilled(works, "T-0801", wet=True)
    refilled(works, "T-0802", method="vented")
    refilled(works, "T-0803", method="pumped")
    refilled(works, "T-0804", ended_by="abandoned")
    refilled(works, "T-0805", bottle=works.bottle_to_fill("T-0805", wall="composite"))
    level = works.open(works.bottle_to_fill("T-0806"), works.connected("S-0806"), bottle_temperature=degrees("26 °C"))
    steps.weigh_refill(
        key=key(), person=works.person, refill=level, weight=works.weight(320), ended_by="flow ceased"
    )  # a bottle warmer than its supply bottle
    assert reasons(works) == {"wet": 1, "vented": 1, "pumped": 1, "abandoned": 1, "walls unknown": 1, "limits alike": 1}
    assert learned(works) == []  # nothing to tell, nothing laid down


def test_a_supply_bottle_known_by_its_gauge_alone_tells_nothing(works: Works) -> None:
    supply = works.connected("S-0900", net_g=None, last_held="nitrous")
    refill = works.open(supply=supply)
    steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(3_000), ended_by="flow ceased")
    assert reasons(works) == {"reading only": 1}


def test_several_supply_bottles_tell_nothing(works: Works) -> None:
    refill = works.open()
    second = works.connected("S-0901")
    steps.add_draw(
        key=key(), person=works.person, refill=refill, version=Refill.objects.get(pk=refill.pk).version,
        asked=works.asked(supply=second), answer=works.forecast(supply=second), weight=works.weight(2_000, line_off=False),
    )
    steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(3_000), ended_by="flow ceased")
    assert reasons(works) == {"several supplies": 1}


def test_a_refill_that_lost_weight_between_two_weighings_was_vented(works: Works) -> None:
    refill = works.open(bottle_temperature=degrees(COOL))
    for net, end in ((2_500, ""), (2_000, ""), (3_000, "flow ceased")):
        steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(net), ended_by=end)
    assert reasons(works) == {"vented": 1}


def test_closing_a_refill_asks_for_a_fit_once_while_one_waits(works: Works) -> None:
    several(works, 3)
    waiting = Job.objects.filter(kind="learning.fit")
    assert waiting.count() == 1
    jobs.perform(waiting.get().pk)
    done = waiting.get()
    assert done.state == "done" and done.result == {"refills": 3, "new": Fit.objects.count()}
    refilled(works, "T-0777")
    assert waiting.filter(state="queued").count() == 1


def test_the_job_done_twice_lays_down_once(works: Works) -> None:
    several(works)
    one = key()
    gathered = gather(works.shop)
    assert learn(key=one, shop=works.shop, gathered=gathered)
    before = Fit.objects.count()
    assert learn(key=one, shop=works.shop, gathered=gathered) == []
    assert Fit.objects.count() == before


def test_where_every_refill_of_a_class_is_gone_its_row_says_so(works: Works) -> None:
    several(works)
    learned(works)
    learn(key=key(), shop=works.shop, gathered=Gathered())
    assert {row.informative for row in latest_figures(works.shop).rows.values()} == {0}
    assert works.forecast().transferred.condensation == PRIOR


def test_a_shop_of_many_refills_is_asked_about_as_often_as_one_of_few(
    works: Works, django_assert_max_num_queries: Callable[..., Any]
) -> None:
    from django.db import connection

    several(works, 2)
    with CaptureQueriesContext(connection) as few:
        went(list(Refill.objects.select_related("bottle", "station__scale", "person")))
    several_more = [refilled(works, f"T-{750 + number}") for number in range(4)]
    assert several_more
    with django_assert_max_num_queries(len(few)):
        went(list(Refill.objects.select_related("bottle", "station__scale", "person")))


def test_what_the_dip_tube_does_not_reach_stays_in_the_supply_bottle(works: Works) -> None:
    supply = works.connected("S-0910", net_g=7_000)
    asked = works.asked(supply=supply)
    plain = work_out(asked, works.readings(bottle_temperature=degrees("-20 °C")))
    asked.supply.bottle.below_tube_ml = 2_500
    left = work_out(asked, works.readings(bottle_temperature=degrees("-20 °C")))
    assert left.likely_g is not None and plain.likely_g is not None and left.likely_g < plain.likely_g
    turned = work_out(replace(asked, supply=_inverted(asked.supply)), works.readings(bottle_temperature=degrees("-20 °C")))
    assert turned.pair.source.below_tube_m3 == 0.0


def _inverted(supply: Any) -> Any:
    supply.inverted = True
    return supply


def test_a_refill_was_pumped_where_its_method_says_so_whatever_its_station_has_today(works: Works) -> None:
    refilled(works, "T-0820")
    refilled(works, "T-0821", method="pumped")
    for has_one in (True, False):
        Station.objects.update(pumped=has_one)
        told = gather(works.shop)
        assert len(told.observations) == 1 and told.left_out["", None] == {"pumped": 1}
