"""Two desks at once, by fixed schedules on real connections: once each, a sentence for the second, no lost update.

A schedule lets one act get as far as a named place and waits there, starts the other, then goes on.
On SQLite the second waits for the first's lock; on PostgreSQL for its row locks.
"""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterator
from typing import Any

import pytest
from django.db import connection, connections

from bottles.models import Condition, Draw, Movement, Refill, Supply, Weighing
from bottles.services import conditions, custody, refill_steps, refilling, stations
from bottles.services.stations import disconnect
from shop.base import clock
from shop.base.errors import AlreadyDone, Refusal
from shop.base.models import Act
from tests import factories
from tests.bottles.books import check_books
from tests.bottles.of_refill import SUPPLY_NET_G, Works, holds, key

pytestmark = [pytest.mark.django_db(transaction=True), pytest.mark.timeout(60)]

PATIENCE_S = 20


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


class Desk(threading.Thread):
    """One desk's act on a connection of its own; keeps what came of it."""

    def __init__(self, call: Callable[[], Any]) -> None:
        super().__init__(daemon=True)
        self.call = call
        self.found: Any = None
        self.refused: Refusal | None = None
        self.broke: BaseException | None = None

    def run(self) -> None:
        try:
            self.found = self.call()
        except Refusal as refusal:
            self.refused = refusal
        except BaseException as broke:
            self.broke = broke
        finally:
            connections.close_all()

    def done(self) -> Desk:
        self.join(PATIENCE_S)
        assert not self.is_alive(), "an act hangs"
        if self.broke is not None:
            raise self.broke
        return self


class Gate:
    """Holds the first act that comes to a function until the second is on its way."""

    def __init__(self, plain: Callable[..., Any]) -> None:
        self.plain = plain
        self.reached = threading.Event()
        self.open = threading.Event()
        self.first = threading.Lock()

    def __call__(self, *args: Any, **kwargs: Any) -> Any:
        if self.first.acquire(blocking=False):
            self.reached.set()
            assert self.open.wait(PATIENCE_S)
        return self.plain(*args, **kwargs)


@pytest.fixture
def at_once(monkeypatch: pytest.MonkeyPatch) -> Iterator[Callable[..., tuple[Desk, Desk]]]:
    """Run two acts: the first stops inside its transaction at a place while the second begins."""

    def run(first: Callable[[], Any], second: Callable[[], Any], *, place: tuple[Any, str]) -> tuple[Desk, Desk]:
        gate = Gate(getattr(*place))
        monkeypatch.setattr(*place, gate)
        one, two = Desk(first), Desk(second)
        one.start()
        assert gate.reached.wait(PATIENCE_S)
        two.start()
        two.join(0.4)  # it must wait for the first, or be refused; it can't have got through
        assert two.found is None
        gate.open.set()
        return one.done(), two.done()

    yield run


def codes(*desks: Desk) -> list[str]:
    return sorted(desk.refused.code for desk in desks if desk.refused)


def test_the_database_is_a_real_one() -> None:
    name = str(connection.settings_dict["NAME"])
    assert connection.vendor == "postgresql" or ".sqlite3" in name


def test_two_desks_open_one_bottle(works: Works, at_once: Any) -> None:
    other = works.connected("S-09")
    first, second = works.opening(), works.opening(supply=other)

    def opening(which: Any) -> Callable[[], Any]:
        return lambda: refilling.open_refill(key=key(), person=works.person, opening=which)

    one, two = at_once(opening(first), opening(second), place=(refilling, "decide"))
    assert one.found.refill is not None and codes(two) == ["open refill"]
    assert (Refill.objects.count(), Draw.objects.count(), Weighing.objects.filter(step="before").count()) == (1, 1, 1)


def test_a_double_click_opens_once(works: Works, at_once: Any) -> None:
    once, opening = key(), works.opening()

    def click() -> Any:
        return refilling.open_refill(key=once, person=works.person, opening=opening)

    one, two = at_once(click, click, place=(refilling, "decide"))
    assert one.found.refill is not None and isinstance(two.refused, AlreadyDone)
    assert two.refused.act.pk == one.found.refill.act_id
    assert Refill.objects.count() == 1


def test_a_double_click_weighs_once(works: Works, at_once: Any) -> None:
    refill, once = works.open(), key()

    def click() -> Any:
        return refill_steps.weigh_refill(key=once, person=works.person, refill=refill, weight=works.weight(4_300))

    one, two = at_once(click, click, place=(refill_steps, "post_flows"))
    assert one.found is not None and codes(two) == ["already done"]
    assert Weighing.objects.filter(refill=refill).count() == 1 and holds(works.bottle) == 4_300
    check_books()


def test_a_retry_after_a_lost_answer_is_answered_with_the_first(works: Works) -> None:
    refill, once = works.open(), key()
    for attempt in range(2):
        desk = Desk(
            lambda: refill_steps.weigh_refill(key=once, person=works.person, refill=refill, weight=works.weight(4_300))
        )
        desk.start()
        assert (desk.done().refused is None) is (attempt == 0)
    assert Movement.objects.filter(refill=refill).count() == 1


def test_two_desks_weigh_one_refill_and_nothing_is_lost(works: Works, at_once: Any) -> None:
    refill = works.open()

    def weigh(net_g: int) -> Callable[[], Any]:
        return lambda: refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(net_g))

    at_once(weigh(2_000), weigh(4_300), place=(refill_steps, "post_flows"))
    assert Weighing.objects.filter(refill=refill).count() == 2
    line = int(refill.draws.get().forecast.result["line_g"])
    assert (holds(works.bottle), holds(works.supply.bottle)) == (4_300, SUPPLY_NET_G - 4_000 - line)
    check_books()


def test_two_sources_into_one_receiver(works: Works, at_once: Any) -> None:
    first, second = works.connected("S-08"), works.connected("S-09")
    refill = works.open()

    def go_on(supply: Supply) -> Callable[[], Any]:
        asked, answer = works.asked(supply=supply), works.forecast(supply=supply)
        return lambda: refill_steps.add_draw(
            key=key(), person=works.person, refill=refill, version=1, asked=asked, answer=answer,
            weight=works.weight(2_000, line_off=False),
        )

    one, two = at_once(go_on(first), go_on(second), place=(refill_steps, "post_flows"))
    assert one.found.source == first.bottle and two.refused is not None
    assert two.refused.code in ("stale", "moved on")
    assert [draw.source.code for draw in Draw.objects.order_by("id")] == ["S-07", "S-08"]
    check_books()


def test_a_bottle_condemned_meanwhile(works: Works, at_once: Any) -> None:
    opening = works.opening()

    def condemn() -> Any:
        return conditions.note_condition(
            key=key(), person=works.person, bottle=works.bottle, code="condemned", seen_on=clock.today(works.shop)
        )

    def fill() -> Any:
        return refilling.open_refill(key=key(), person=works.person, opening=opening)

    one, two = at_once(condemn, fill, place=(conditions, "restate"))
    assert one.found is not None and codes(two) == ["must not be filled"]
    assert Refill.objects.count() == 0 and Condition.objects.count() == 1


def test_a_bottle_retired_while_it_is_opened_is_refused_one_of_the_two(works: Works, at_once: Any) -> None:
    opening = works.opening()

    def retire() -> Any:
        conditions.retire(key=key(), person=works.person, bottle=works.bottle, reason="sold for scrap")
        return "retired"

    one, two = at_once(
        lambda: refilling.open_refill(key=key(), person=works.person, opening=opening), retire, place=(refilling, "decide")
    )
    assert one.found.refill is not None and codes(two) == ["open refill"]


def test_a_supply_taken_off_while_it_is_drawn_on(works: Works, at_once: Any) -> None:
    opening, supply = works.opening(), Supply.objects.get()
    one, two = at_once(
        lambda: refilling.open_refill(key=key(), person=works.person, opening=opening),
        lambda: disconnect(key=key(), person=works.person, supply=supply),
        place=(refilling, "decide"),
    )
    assert one.found.refill is not None and codes(two) == ["open refill"]
    assert Supply.objects.count() == 1


def test_closing_twice_closes_once(works: Works, at_once: Any) -> None:
    refill = works.open()
    refill_steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(4_300))

    def close(ended_by: str) -> Callable[[], Any]:
        def call() -> str:
            refill_steps.close_refill(key=key(), person=works.person, refill=refill, version=1, ended_by=ended_by)
            return "closed"

        return call

    one, two = at_once(close("by hand"), close("flow ceased"), place=(refill_steps, "may_close"))
    assert one.found == "closed" and codes(two) == ["refill closed"]
    assert Refill.objects.get().ended_by == "by hand"
    assert Act.objects.filter(code="refill.closed").count() == 1


def test_a_supply_connected_while_it_is_handed_over_stays(works: Works, at_once: Any) -> None:
    spare = factories.BottleFactory(code="S-30", use="supply")
    factories.placed(factories.owned(spare), "in")

    def hand_over() -> Any:
        return custody.hand_over(key=key(), person=works.person, bottle=spare, kind="loan", to_whom="R. Quill", limit_g=None)

    one, two = at_once(
        lambda: stations.connect(key=key(), person=works.person, station=works.station, bottle=spare), hand_over,
        place=(stations, "restate"),
    )  # fmt: skip
    assert one.found is not None and codes(two) == ["on a station"]
    spare.standing.refresh_from_db()
    assert spare.standing.is_in


def test_a_bottle_handed_over_while_a_refill_is_opened_stays(works: Works, at_once: Any) -> None:
    opening = works.opening()

    def hand_over() -> Any:
        return custody.hand_over(
            key=key(), person=works.person, bottle=works.bottle, kind="out", to_whom="R. Quill", limit_g=None
        )

    one, two = at_once(
        lambda: refilling.open_refill(key=key(), person=works.person, opening=opening), hand_over,
        place=(refilling, "draw_on"),
    )  # fmt: skip
    assert one.found.refill is not None and codes(two) == ["open refill"]
    works.bottle.standing.refresh_from_db()
    assert works.bottle.standing.is_in
