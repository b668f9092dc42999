"""Any sequence of weighings, deliveries, fills, uses, strikes, reversals and late entries keeps the books.

Checked after every step: each balance equals its lines, everything sums to zero, no bottle is
below nothing at any time (not only at the end), no net is recomputed, and the weighing that rules
last is within its ± of the books.
"""

from __future__ import annotations

import pytest
from django.db import transaction
from hypothesis import HealthCheck, Phase, settings
from hypothesis import strategies as st
from hypothesis.stateful import (
    RuleBasedStateMachine,
    initialize,
    invariant,
    precondition,
    rule,
    run_state_machine_as_test,
)

from bottles.models import Movement, Weighing
from bottles.selectors.history import history_of
from bottles.services import delivering, moving, weighing
from bottles.services.booking import book
from bottles.services.gaps import gap_of
from bottles.services.posting import Move, account_of, own_account
from shop.base import clock
from shop.base.errors import Refusal
from shop.base.models import Shop
from shop.cars.models import Car
from tests.bottles import books as b
from tests.examples import times

AMOUNTS = st.integers(1, 3_000)
NETS = st.integers(0, 12_000)
LATE = st.sampled_from([0, 0, 0, 0.5, 3, 10])  # hours before now; most things are recorded as they happen


class Books(RuleBasedStateMachine):
    """A shop's days in any order."""

    def __init__(self) -> None:
        super().__init__()
        self.hour = 0.0

    @initialize()
    def open_shop(self) -> None:
        Shop.objects.create(id=1, name="Ardenbeck Race Works", country="US", units="us", time_zone="UTC")
        self.scale = b.scale()
        self.car = Car.objects.create(number="27")
        self.bottles = [
            b.bottle("S-01", owner="supplier"), b.bottle("T-0001"), b.bottle("T-0002", owner="shop"),
        ]  # fmt: skip
        self.nets: dict[int, tuple[int, int, int]] = {}

    def at(self, late: float):
        """Let an hour pass and return when a thing happened that is recorded now."""
        self.hour += 1
        return b.after(max(0.0, self.hour - late))

    def tried(self, does) -> None:
        """Do a thing at the present hour; a refusal leaves everything as it was."""
        before = (Weighing.objects.count(), Movement.objects.count())
        with clock.pretend(b.after(self.hour)):
            try:
                does()
            except Refusal:
                assert (Weighing.objects.count(), Movement.objects.count()) == before

    @rule(which=st.integers(0, 2), net=NETS, late=LATE, wet=st.booleans(), reason=st.sampled_from(["", "a leak"]))
    def weigh(self, which, net, late, wet, reason):
        at = self.at(late)
        self.tried(lambda: b.weigh(self.bottles[which], self.scale, net, at, wet=wet, reason=reason))

    @rule(net=NETS, late=LATE, by_scale=st.booleans())
    def deliver(self, net, late, by_scale):
        at = self.at(late)
        on = moving.OnScale(self.scale, b.grams(b.TARE_G + net)) if by_scale else None
        ticket = delivering.Ticket("Northfen Gases", "1", b.grams(11_300), "L1")
        self.tried(
            lambda: delivering.deliver(
                key=b.key(), person=None, bottle=self.bottles[0], ticket=ticket, place=b.place(), weighed=on, happened_at=at
            )
        )

    @rule(late=LATE)
    def give_back(self, late):
        at = self.at(late)
        self.tried(
            lambda: delivering.give_back(key=b.key(), person=None, bottle=self.bottles[0], supplier="x", happened_at=at)
        )

    @rule(which=st.integers(1, 2), amount=AMOUNTS, late=LATE)
    def fill(self, which, amount, late):
        at = self.at(late)

        def fill() -> None:
            moves = [
                Move(account_of(self.bottles[0]), account_of(self.bottles[which]), amount, "weighed", 34),
                Move(account_of(self.bottles[0]), own_account("line"), 15, "computed", 10),
            ]
            book(act=b.act(), kind="refill", happened_at=at, moves=moves)

        self.tried(fill)

    @rule(which=st.integers(0, 2), amount=AMOUNTS, late=LATE, car=st.booleans())
    def use_or_vent(self, which, amount, late, car):
        at = self.at(late)
        common = {"key": b.key(), "person": None, "bottle": self.bottles[which], "amount": b.grams(amount), "happened_at": at}
        if car:
            self.tried(lambda: moving.use(**common, car=self.car))
        else:
            self.tried(lambda: moving.vent(**common, reason="overfull, outdoors"))

    @rule(which=st.integers(0, 2), net=NETS)
    def vent_by_the_scale(self, which, net):
        at = self.at(0)
        on = moving.OnScale(self.scale, b.grams(b.TARE_G + net))
        self.tried(
            lambda: moving.vent(
                key=b.key(), person=None, bottle=self.bottles[which], weighed=on, reason="overfull", happened_at=at
            )
        )

    @rule(which=st.integers(1, 2), out=st.booleans())
    def go_out_or_come_in(self, which, out):
        at = self.at(0)
        (b.go_out if out else b.come_in)(self.bottles[which], at)

    @precondition(lambda self: Weighing.objects.filter(strike__isnull=True).exists())
    @rule(pick=st.integers(0, 10_000), right=st.none() | NETS)
    def strike(self, pick, right):
        self.at(0)
        rows = list(Weighing.objects.filter(strike__isnull=True).order_by("id"))
        wrong = rows[pick % len(rows)]
        figure = None if right is None else b.grams(b.TARE_G + right)
        self.tried(lambda: weighing.strike(key=b.key(), person=None, weighing=wrong, reason="mistyped", right=figure))

    @precondition(lambda self: Movement.objects.exists())
    @rule(pick=st.integers(0, 10_000))
    def reverse(self, pick):
        self.at(0)
        rows = list(Movement.objects.order_by("id"))
        wrong = rows[pick % len(rows)]
        self.tried(lambda: moving.reverse_movement(key=b.key(), person=None, movement=wrong, reason="wrong bottle"))

    @invariant()
    def books_hold(self) -> None:
        if not hasattr(self, "bottles"):
            return
        b.check_books()
        assert not Movement.objects.filter(reverses__reverses__isnull=False).exists()

    @invariant()
    def no_net_is_recomputed(self) -> None:
        for row in Weighing.objects.all():
            said = (row.gross_g, row.net_g, row.error_g)
            assert self.nets.setdefault(row.pk, said) == said
            assert row.net_g == row.gross_g - row.tare.total_g

    @invariant()
    def the_last_word_is_the_scales(self) -> None:
        for bottle in getattr(self, "bottles", []):
            history = history_of(bottle)
            if history.ruling and history.ruling[-1] is history.latest:
                gap = gap_of(history, history.latest)
                assert gap.opening or abs(gap.grams) <= gap.error_g, bottle


@pytest.mark.django_db
def test_any_sequence_keeps_the_books():
    class InOne(Books):
        """One run in a transaction that is rolled back at its end."""

        def __init__(self) -> None:
            super().__init__()
            self.block = transaction.atomic()
            self.block._from_testcase = True  # as Django's own: what must be outermost may stand within
            self.block.__enter__()

        def teardown(self) -> None:
            transaction.set_rollback(True)
            self.block.__exit__(None, None, None)

    run_state_machine_as_test(
        InOne,
        settings=settings(
            max_examples=times(20), stateful_step_count=25, deadline=None,
            suppress_health_check=list(HealthCheck), derandomize=True,
            phases=[Phase.generate],  # a failure prints its steps; making them fewer takes minutes
        ),
    )
