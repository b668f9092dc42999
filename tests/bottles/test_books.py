"""The balance between two days, contents now, unaccounted, stock-take: figures and queries."""

from __future__ import annotations

from datetime import date, timedelta

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from bottles.selectors.books import balance_between
from bottles.selectors.contents import holding_of, holdings
from bottles.selectors.stock import stock_of_the_shop
from bottles.selectors.unaccounted import unaccounted_between
from bottles.services import delivering, moving, weighing
from bottles.services.booking import book
from bottles.services.posting import Move, account_of, own_account
from shop.base import clock
from shop.base.errors import Refusal
from shop.cars.models import Car
from tests.bottles import books as b

pytestmark = pytest.mark.django_db

MARCH = (date(2026, 3, 1), date(2026, 3, 31))


@pytest.fixture(autouse=True)
def today(shop):
    with clock.pretend(b.after(24 * 60)):
        yield


def flows(told) -> dict[str, int]:
    return {flow.code: flow.net_g for flow in told.flows}


def deliver(bottle, net_g, at, *, scale=None, ticket_g=None, **more):
    on = moving.OnScale(scale, b.grams(b.TARE_G + net_g)) if scale else None
    ticket = delivering.Ticket("Northfen Nitrous", "881", b.grams(ticket_g) if ticket_g else None, "L7")
    return delivering.deliver(
        key=b.key(), person=None, bottle=bottle, ticket=ticket, place=b.place(), weighed=on, happened_at=at, **more
    )


def fill(source, target, net_g, at, line_g=15):
    moves = [Move(account_of(source), account_of(target), net_g, "weighed", 34)]
    moves.append(Move(account_of(source), own_account("line"), line_g, "computed", 10))
    return book(act=b.act(), kind="refill", happened_at=at, moves=moves)


def test_opening_and_flows_make_the_closing_stock_and_everything_sums_to_zero(shop):
    scale = b.scale()
    supply, bottle = b.bottle("S-01", owner="supplier", is_in=False), b.bottle("T-0001")
    b.weigh(bottle, scale, 400, b.after(-24 * 4))  # 26 February: opening stock of March
    deliver(supply, 11_250, b.after(1), scale=scale, ticket_g=11_300)
    fill(supply, bottle, 4_000, b.after(3))
    moving.vent(key=b.key(), person=None, bottle=bottle, amount=b.grams(100), reason="overfull", happened_at=b.after(4))
    told = balance_between(*MARCH, shop=shop)
    # opening 400; delivered 11,250; line 15; vented 100
    assert flows(told) == {"delivery": 11_250, "line": -15, "vented": -100}
    assert (told.opening_g, told.closing_g, told.filled_g) == (400, 400 + 11_250 - 15 - 100, 4_000)
    assert (told.difference_g, told.all_accounts_g) == (0, 0)
    b.check_books()


def test_a_delivery_takes_our_weighing_else_the_ticket_and_the_gap_is_the_suppliers():
    scale = b.scale()
    weighed, ticketed = b.bottle("S-01", owner="supplier", is_in=False), b.bottle("S-02", owner="supplier", is_in=False)
    deliver(weighed, 11_250, b.after(1), scale=scale, ticket_g=11_300)
    deliver(ticketed, 0, b.after(1), ticket_g=11_300)
    assert (b.holds(weighed), b.holds(ticketed)) == (11_250, 11_300)
    b.weigh(ticketed, scale, 11_100, b.after(2))
    assert (b.holds(ticketed), b.balance("supplier"), b.balance("unaccounted")) == (11_100, -(11_250 + 11_100), 0)


def test_a_delivery_without_any_weight_is_refused():
    with pytest.raises(Refusal) as refused:
        deliver(b.bottle("S-01", owner="supplier", is_in=False), 0, b.after(1))
    assert refused.value.code == "no weight"


def test_what_the_supply_still_held_when_it_went_back_is_on_the_books():
    scale, supply = b.scale(), b.bottle("S-01", owner="supplier")
    b.weigh(supply, scale, 2_400, b.after(0))
    delivering.give_back(
        key=b.key(), person=None, bottle=supply, supplier="Northfen Nitrous", happened_at=b.after(5),
        weighed=moving.OnScale(scale, b.grams(b.TARE_G + 2_300)), reason="hose bled twice",
    )  # fmt: skip
    assert (b.holds(supply), b.balance("returned"), b.balance("unaccounted")) == (0, 2_300, 100)
    deliver(supply, 11_000, b.after(30), scale=scale)
    assert (b.holds(supply), b.balance("supplier")) == (11_000, -13_400)
    b.check_books()


def test_a_bottle_that_stands_here_with_contents_is_not_delivered_again():
    scale, supply = b.scale(), b.bottle("S-01", owner="supplier")
    b.weigh(supply, scale, 2_400, b.after(0))
    with pytest.raises(Refusal) as refused:
        deliver(supply, 11_000, b.after(3), scale=scale)
    assert refused.value.code == "here already"


def test_striking_a_deliverys_weighing_delivers_by_the_ticket_or_by_the_right_figure():
    scale = b.scale()
    by_ticket, by_scale = b.bottle("S-01", owner="supplier", is_in=False), b.bottle("S-02", owner="supplier", is_in=False)
    first = deliver(by_ticket, 1_125, b.after(1), scale=scale, ticket_g=11_300)
    second = deliver(by_scale, 1_125, b.after(1), scale=scale)
    weighing.strike(key=b.key(), person=None, weighing=first.weighing, reason="a digit short")
    assert b.holds(by_ticket) == 11_300
    with pytest.raises(Refusal) as refused:
        weighing.strike(key=b.key(), person=None, weighing=second.weighing, reason="a digit short")
    assert refused.value.code == "delivery without a figure"
    right = b.grams(b.TARE_G + 11_250)
    weighing.strike(key=b.key(), person=None, weighing=second.weighing, reason="a digit short", right=right)
    assert (b.holds(by_scale), b.balance("supplier"), b.balance("unaccounted")) == (11_250, -(11_300 + 11_250), 0)
    b.check_books()


def test_a_vent_entered_late_takes_its_grams_back_out_of_unaccounted(shop):
    scale, bottle = b.scale(), b.bottle()
    b.weigh(bottle, scale, 4_000, b.after(0))
    b.weigh(bottle, scale, 3_500, b.after(10), reason="nobody knows")
    assert b.balance("unaccounted") == 500
    moving.vent(key=b.key(), person=None, bottle=bottle, amount=b.grams(450), reason="overfull, yard", happened_at=b.after(5))
    assert (b.holds(bottle), b.balance("unaccounted"), b.balance("vented")) == (3_500, 50, 450)
    b.check_books()


def test_a_report_can_be_had_as_it_was_known_then(shop):
    scale, bottle = b.scale(), b.bottle()
    with clock.pretend(b.after(11)):
        b.weigh(bottle, scale, 4_000, b.after(0))
        b.weigh(bottle, scale, 3_500, b.after(10), reason="nobody knows")
    moving.vent(key=b.key(), person=None, bottle=bottle, amount=b.grams(500), reason="yard", happened_at=b.after(5))
    assert flows(balance_between(*MARCH, shop=shop)) == {"customer": 4_000, "unaccounted": 0, "vented": -500}
    then = balance_between(*MARCH, shop=shop, known_at=b.after(12))
    assert flows(then) == {"customer": 4_000, "unaccounted": -500}
    assert then.difference_g == 0


def test_days_are_the_shops(shop):
    # 23:30 on the 31st in Chicago is 04:30 UTC on the 1st
    scale, bottle = b.scale(), b.bottle()
    late_evening = b.START.replace(month=4, day=1, hour=4, minute=30)
    b.weigh(bottle, scale, 1_000, late_evening)
    assert balance_between(*MARCH, shop=shop).closing_g == 1_000
    assert balance_between(date(2026, 4, 1), date(2026, 4, 1), shop=shop).opening_g == 1_000


def test_the_uncertainty_behind_the_stock_is_that_of_the_last_weighings(shop):
    scale = b.scale()
    for number in range(4):
        b.weigh(b.bottle(f"T-{number:04}"), scale, 1_000, b.after(number))
    told = balance_between(*MARCH, shop=shop)
    assert told.closing_error_g == 48  # √(4 × 24²)
    assert next(flow for flow in told.flows if flow.code == "customer").error_g == 48


def test_unaccounted_names_who_moved_the_contents_between_the_two_weighings(shop, make_user):
    scale, bottle = b.scale(), b.bottle()
    ines, mara = make_user("technician", name="Ines"), make_user("technician", name="Mara")
    b.weigh(bottle, scale, 4_000, b.after(0))
    common = {"bottle": bottle, "amount": b.grams(100), "reason": "yard"}
    moving.vent(key=b.key(), person=mara, happened_at=b.after(-1), **common)
    moving.vent(key=b.key(), person=ines, happened_at=b.after(2), **common)
    b.weigh(bottle, scale, 3_000, b.after(10), reason="asked everyone")
    moving.vent(key=b.key(), person=mara, happened_at=b.after(11), **common)
    missing = [one for one in unaccounted_between(*MARCH, shop=shop) if one.reason == "asked everyone"]
    assert [(one.bottle, one.grams, one.persons, one.since) for one in missing] == [("T-0001", 900, ("Ines",), b.after(0))]


def test_never_weighed_is_unknown_not_zero():
    assert holding_of(b.bottle()).grams is None


def test_contents_are_the_scales_and_what_moved_since():
    scale, bottle = b.scale(), b.bottle()
    b.weigh(bottle, scale, 4_000, b.after(0))
    b.weigh(bottle, scale, 4_020, b.after(1))
    told = holding_of(bottle)
    assert (told.grams, told.error_g, told.origin, told.books_g, told.over_g) == (4_020, b.NET_ERROR_G, "weighed", 4_000, 20)
    moving.vent(key=b.key(), person=None, bottle=bottle, amount=b.grams(500), reason="yard", happened_at=b.after(2))
    told = holding_of(bottle)
    assert (told.grams, told.origin, told.books_g) == (3_520, "computed", 3_500)


def test_how_much_was_vented_can_be_told_by_the_scale():
    scale, bottle = b.scale(), b.bottle()
    b.weigh(bottle, scale, 4_800, b.after(0))
    on = moving.OnScale(scale, b.grams(b.TARE_G + 4_500))
    made = moving.vent(key=b.key(), person=None, bottle=bottle, weighed=on, reason="overfull", happened_at=b.after(1))
    line = made.lines.get()
    assert (line.grams, line.error_g, line.origin, b.holds(bottle)) == (300, 34, "weighed", 4_500)
    assert holding_of(bottle).origin == "weighed"
    with pytest.raises(Refusal) as refused:
        moving.vent(key=b.key(), person=None, bottle=bottle, weighed=on, reason="again", happened_at=b.after(2))
    assert refused.value.code == "nothing went"


def test_more_used_than_the_books_hold_is_recorded_and_the_rest_booked_as_found():
    scale, bottle, car = b.scale(), b.bottle(owner="shop"), Car.objects.create(number="27")
    b.weigh(bottle, scale, 1_000, b.after(0))
    moving.use(key=b.key(), person=None, bottle=bottle, car=car, amount=b.grams(1_400), happened_at=b.after(1))
    assert (b.holds(bottle), b.balance("car"), b.balance("unaccounted")) == (0, 1_400, -400)


@pytest.mark.parametrize("both", [True, False])
def test_either_an_amount_or_the_scale(both):
    scale, bottle = b.scale(), b.bottle()
    b.weigh(bottle, scale, 1_000, b.after(0))
    given = {"amount": b.grams(100), "weighed": moving.OnScale(scale, b.grams(b.TARE_G))} if both else {}
    with pytest.raises(Refusal) as refused:
        moving.vent(key=b.key(), person=None, bottle=bottle, reason="yard", **given)
    assert refused.value.code == "one of two"


def test_stock_take_lists_what_is_in_and_what_is_left_to_weigh():
    scale = b.scale()
    done, left, _, out = (b.bottle(f"T-{n:04}") for n in range(4))
    b.weigh(done, scale, 1_000, b.after(24))
    b.weigh(left, scale, 1_000, b.after(0))
    b.go_out(out, b.after(30))
    rows = stock_of_the_shop(b.after(20))
    assert [(row.bottle.code, row.weighed_since) for row in rows] == [("T-0001", False), ("T-0002", False), ("T-0000", True)]
    assert [row.holding.grams for row in rows] == [1_000, None, 1_000]


def test_the_number_of_queries_does_not_grow_with_the_bottles(shop):
    scale = b.scale()

    def asked() -> None:
        balance_between(*MARCH, shop=shop)
        unaccounted_between(*MARCH, shop=shop)
        stock_of_the_shop(b.after(5))
        holdings(bottles)

    bottles, counts = [], []
    for number in range(8):
        bottles.append(b.bottle(f"T-{number:04}"))
        b.weigh(bottles[-1], scale, 1_000 + number, b.after(number))
        b.weigh(bottles[-1], scale, 500, b.after(10 + number), reason="leak")
        if number in (1, 7):
            with CaptureQueriesContext(connection) as queries:
                asked()
            counts.append(len(queries))
    assert counts[0] == counts[1] <= 20


def test_a_movement_of_yesterday_is_not_in_todays_balance(shop):
    scale, bottle = b.scale(), b.bottle()
    b.weigh(bottle, scale, 1_000, b.after(0))
    day = clock.day_of(b.after(0), shop)
    assert flows(balance_between(day, day, shop=shop)) == {"customer": 1_000}
    tomorrow = day + timedelta(days=1)
    assert flows(balance_between(tomorrow, tomorrow, shop=shop)) == {}
