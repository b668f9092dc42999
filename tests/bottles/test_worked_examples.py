"""Whole days in the shop, told step by step, the balance checked after each."""

from __future__ import annotations

import pytest

from bottles.models import Condition
from bottles.services import delivering, moving, weighing
from bottles.services.booking import book
from bottles.services.posting import Move, account_of, own_account
from shop.base import clock
from shop.cars.models import Car
from tests.bottles import books as b

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def today(shop):
    with clock.pretend(b.after(24 * 30)):
        yield


def sums() -> dict[str, int]:
    """The balances that aren't nothing, bottles left out."""
    b.check_books()
    kinds = ("supplier", "returned", "customer", "car", "line", "vented", "unaccounted", "scale")
    return {kind: b.balance(kind) for kind in kinds if b.balance(kind)}


def test_a_supply_bottle_from_its_delivery_to_its_return():
    scale = b.scale()
    supply, first, second = b.bottle("S-07", owner="supplier", is_in=False), b.bottle("T-0412"), b.bottle("T-0388")

    # Monday 9:00. It comes full: ticket 11.30 kg, our scale 11.25 kg. The books take the scale.
    ticket = delivering.Ticket("Northfen Nitrous", "881", b.entry("11.30 kg"), "L7", race_grade=True)
    delivery = delivering.deliver(
        key=b.key(), person=None, bottle=supply, ticket=ticket, place=b.place(), happened_at=b.after(1),
        weighed=moving.OnScale(scale, b.grams(b.TARE_G + 11_250)),
    )  # fmt: skip
    assert (delivery.ticket_net_g, delivery.weighing.net_g, b.holds(supply)) == (11_300, 11_250, 11_250)
    assert sums() == {"supplier": -11_250}

    # 10:00. Ostrander's bottle comes in with 310 g left: its books open, from its owner.
    b.weigh(first, scale, 310, b.after(2), step="arrival")
    assert sums() == {"supplier": -11_250, "customer": -310}

    # 11:00. 4.30 kg go over, 20 g stay in the line. Opened with 310 g, it now holds 4.61 kg.
    refill(supply, first, 4_300, 20, b.after(3))
    assert (b.holds(supply), b.holds(first)) == (11_250 - 4_320, 4_610)
    assert sums() == {"supplier": -11_250, "customer": -310, "line": 20}

    # 15:00. Ostrander takes it. Saturday it comes back with 500 g: 4.11 kg used, no question asked.
    b.go_out(first, b.after(7))
    b.come_in(first, b.after(121))
    b.weigh(first, scale, 500, b.after(122), step="arrival")
    assert sums() == {"supplier": -11_250, "customer": 3_800, "line": 20}

    # Quill's bottle takes 4.00 kg; the supply then weighs 2.80 kg where the books say 2.91: 110 g short.
    b.weigh(second, scale, 0, b.after(123), step="arrival")
    refill(supply, second, 4_000, 20, b.after(124))
    assert b.holds(supply) == 2_910
    b.weigh(supply, scale, 2_800, b.after(125), reason="the line was bled twice")
    assert sums() == {"supplier": -11_250, "customer": 3_800, "line": 40, "unaccounted": 110}

    # It goes back "empty": 2.80 kg, a quarter of the charge, return with it.
    delivering.give_back(key=b.key(), person=None, bottle=supply, supplier="Northfen Nitrous", happened_at=b.after(126))
    assert (b.holds(supply), b.holds(first), b.holds(second)) == (0, 500, 4_000)
    assert sums() == {"supplier": -11_250, "returned": 2_800, "customer": 3_800, "line": 40, "unaccounted": 110}


def test_a_mistyped_weighing_its_strike_and_the_right_figure():
    scale, bottle = b.scale(), b.bottle("T-0412")

    # It leaves with 4.50 kg and comes back; 9.42 kg is typed as 94.2 lb, far too heavy: filled elsewhere, it seems.
    b.weigh(bottle, scale, 4_500, b.after(0))
    b.go_out(bottle, b.after(1))
    b.come_in(bottle, b.after(50))
    gross = b.entry("94.2 lb")  # 94.2 × 453.59237 g = 42728.4 → 42728
    wrong = weighing.weigh(
        key=b.key(), person=None, bottle=bottle, scale=scale, gross=gross, step="arrival", happened_at=b.after(51)
    )
    assert (wrong.net_g, b.holds(bottle)) == (42_728 - b.TARE_G, 42_728 - b.TARE_G)
    assert Condition.objects.filter(code="contents unknown", end__isnull=True).exists()

    # Struck, with what the scale really said: 3.00 kg left, 1.50 used by the owner, nothing unknown.
    right = weighing.strike(key=b.key(), person=None, weighing=wrong, reason="typed in pounds", right=b.entry("9.42 kg"))
    assert (right.net_g, right.happened_at, b.holds(bottle)) == (3_000, b.after(51), 3_000)
    assert sums() == {"customer": -3_000}
    assert not Condition.objects.filter(end__isnull=True).exists()
    wrong.refresh_from_db()
    assert wrong.net_g == 42_728 - b.TARE_G  # what was said stays said


def test_a_weekend_without_power_entered_on_monday():
    scale, bottle, car = b.scale(), b.bottle("T-0500", owner="shop"), Car.objects.create(number="27")

    # Friday: 4.50 kg. Monday 8:00: 2.00 kg; nobody wrote anything down.
    b.weigh(bottle, scale, 4_500, b.after(0))
    b.weigh(bottle, scale, 2_000, b.after(64), reason="weekend without power, log follows")
    assert sums() == {"supplier": -4_500, "unaccounted": 2_500}

    # The log says: Saturday car 27 used 2.1 kg. Monday's books stay; what is unaccounted for shrinks.
    moving.use(key=b.key(), person=None, bottle=bottle, car=car, amount=b.entry("2.1 kg"), happened_at=b.after(30))
    assert b.holds(bottle) == 2_000
    assert sums() == {"supplier": -4_500, "car": 2_100, "unaccounted": 400}

    # And Sunday 400 g were let out in the yard: all is told.
    moving.vent(key=b.key(), person=None, bottle=bottle, amount=b.entry("400 g"), reason="yard", happened_at=b.after(50))
    assert b.holds(bottle) == 2_000
    assert sums() == {"supplier": -4_500, "car": 2_100, "vented": 400}

    # A weighing of Saturday is found on paper: it's kept and moves nothing.
    b.weigh(bottle, scale, 2_350, b.after(40))
    assert b.holds(bottle) == 2_000
    assert sums() == {"supplier": -4_500, "car": 2_100, "vented": 400}


def test_a_slow_leak_of_ten_grams_a_day_stands_out_instead_of_being_absorbed():
    scale, bottle = b.scale(), b.bottle("T-0600")
    b.weigh(bottle, scale, 4_000, b.after(0))
    # ± of the difference: √(24² + 24²) = 34 g, so three days say nothing and the fourth does.
    for day in (1, 2, 3):
        b.weigh(bottle, scale, 4_000 - 10 * day, b.after(24 * day))
        assert b.holds(bottle) == 4_000
    b.weigh(bottle, scale, 3_960, b.after(96), reason="bubbles at the valve")
    assert b.holds(bottle) == 3_960
    assert sums() == {"customer": -4_000, "unaccounted": 40}


def refill(source, target, arrived_g, line_g, at):
    """What a refill posts at its weighing."""
    moves = [
        Move(account_of(source), account_of(target), arrived_g, "weighed", 34),
        Move(account_of(source), own_account("line"), line_g, "computed", 10),
    ]
    book(act=b.act(), kind="refill", happened_at=at, moves=moves)
