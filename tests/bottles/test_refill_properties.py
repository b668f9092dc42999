"""Any sequence of refills, weighings, further supplies, strikes, reversals, uses and late entries keeps the books.

Each step is what a page does, through the same services, forecasts included. After every step the books
hold, no net is recomputed, a bottle is in one open refill at most, and what was closed was closed on a
weighing with the line disconnected.
"""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from typing import Any

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

from bottles.models import Bottle, Movement, Refill, Supply, Weighing
from bottles.services import moving, refill_steps, refilling, weighing
from bottles.services.refill_steps import Weight
from shop.base import clock
from shop.base.errors import Refusal
from shop.base.models import Act, Shop
from shop.cars.models import Car
from shop.physics.errors import PhysicsError
from tests.bottles import books as b
from tests.bottles.of_refill import SUPPLY_TARE_G, TARE_G, Works, grams, key
from tests.examples import times

BEGAN = datetime(2026, 3, 3, 8, 0, tzinfo=UTC)
NETS = st.integers(0, 5_200)
SUPPLY_NETS = st.integers(0, 16_000)
LATE = st.sampled_from([0, 0, 0, 0, 7, 45])  # minutes before now
ENDS = st.sampled_from(["", "", *dict(Refill.ENDS)])


class Fillings(RuleBasedStateMachine):
    """A morning at one station, in any order."""

    def __init__(self) -> None:
        super().__init__()
        self.minutes = 0

    @initialize()
    def open_shop(self) -> None:
        shop = Shop.objects.create(id=1, name="Ardenbeck Race Works", country="US", units="us", time_zone="UTC", height_m=180)
        self.car = Car.objects.create(number="27")
        with clock.pretend(BEGAN):
            self.works = Works(shop, None)
            self.works.station.supply_scale = self.works.scale.__class__.objects.create(
                code="SUP", name="supply scale", resolution_g=10, resolution_typed="10 g", error_g=20, error_typed="20 g",
                capacity_g=90_000, capacity_typed="90 kg",
            )  # fmt: skip
            self.works.station.save()
            self.supplies = [self.works.supply, self.works.connected("S-08", net_g=4_000)]
            self.bottles = [self.works.bottle, self.works.bottle_to_fill("T-0413", net_g=2_000)]
        self.nets: dict[int, tuple[int, int, int]] = {}
        self.opened = self.closed = 0

    def tried(self, does: Callable[[datetime], Any], late: int = 0) -> Any:
        """Do a thing ten minutes later; a refusal leaves everything as it was."""
        self.minutes += 10
        now = BEGAN + timedelta(minutes=self.minutes)
        before = (Weighing.objects.count(), Movement.objects.count(), Act.objects.count())
        with clock.pretend(now):
            try:
                return does(now - timedelta(minutes=late))
            except (Refusal, PhysicsError):
                assert (Weighing.objects.count(), Movement.objects.count(), Act.objects.count()) == before
        return None

    def one_open(self, pick: int) -> Refill | None:
        rows = list(Refill.objects.filter(closed_at__isnull=True).order_by("id"))
        return rows[pick % len(rows)] if rows else None

    def weight(self, net: int, line_off: bool, at: datetime, supply_net: int | None = None) -> Weight:
        supply = None if supply_net is None else grams(SUPPLY_TARE_G + supply_net)
        return Weight(gross=grams(TARE_G + net), line_off=line_off, supply_gross=supply, happened_at=at)

    @rule(which=st.integers(0, 1), source=st.integers(0, 1), net=st.integers(0, 3_000), reason=st.sampled_from(["", "a leak"]))
    def open(self, which: int, source: int, net: int, reason: str) -> None:
        def does(at: datetime) -> None:
            opening = self.works.opening(
                Bottle.objects.get(pk=self.bottles[which].pk), self.supplies[source], bottle_weight=grams(TARE_G + net),
                gauge=None, supply_weight=grams(SUPPLY_TARE_G + b.holds(self.supplies[source].bottle)), reason=reason,
                pressure_kept=True,
            )  # fmt: skip
            refilling.open_refill(key=key(), person=None, opening=opening)
            self.opened += 1

        self.tried(does)

    @precondition(lambda self: self.one_open(0) is not None)
    @rule(pick=st.integers(0, 9), net=NETS, supply=st.none() | SUPPLY_NETS, line_off=st.booleans(), ended=ENDS, late=LATE)
    def weigh_it(self, pick: int, net: int, supply: int | None, line_off: bool, ended: str, late: int) -> None:
        refill = self.one_open(pick)
        assert refill is not None

        def does(at: datetime) -> None:
            weight = self.weight(net, line_off, at, supply)
            refill_steps.weigh_refill(key=key(), person=None, refill=refill, weight=weight, ended_by=ended)

        self.tried(does, late)

    @precondition(lambda self: self.one_open(0) is not None)
    @rule(pick=st.integers(0, 9), source=st.integers(0, 1), net=NETS)
    def go_on(self, pick: int, source: int, net: int) -> None:
        refill, supply = self.one_open(pick), self.supplies[source]
        assert refill is not None

        def does(at: datetime) -> None:
            changes = {"gauge": None, "bottle_weight": grams(TARE_G + net),
                       "supply_weight": grams(SUPPLY_TARE_G + b.holds(supply.bottle))}  # fmt: skip
            asked, answer = self.works.asked(refill.bottle, supply), self.works.forecast(refill.bottle, supply, **changes)
            refill_steps.add_draw(
                key=key(), person=None, refill=refill, version=refill.version, asked=asked, answer=answer,
                weight=self.weight(net, False, at),
            )  # fmt: skip

        self.tried(does)

    @precondition(lambda self: self.one_open(0) is not None)
    @rule(pick=st.integers(0, 9), ended=st.sampled_from(list(dict(Refill.ENDS))))
    def close(self, pick: int, ended: str) -> None:
        refill = self.one_open(pick)
        assert refill is not None
        self.tried(
            lambda at: refill_steps.close_refill(
                key=key(), person=None, refill=refill, version=refill.version, ended_by=ended
            )
        )

    @precondition(lambda self: Weighing.objects.filter(strike__isnull=True).count() > 4)
    @rule(pick=st.integers(0, 10_000), right=st.none() | NETS)
    def strike(self, pick: int, right: int | None) -> None:
        rows = list(Weighing.objects.filter(strike__isnull=True).order_by("id"))
        wrong = rows[pick % len(rows)]
        figure = None if right is None else grams(wrong.tare.total_g + right)
        self.tried(lambda at: weighing.strike(key=key(), person=None, weighing=wrong, reason="mistyped", right=figure))

    @precondition(lambda self: Movement.objects.exists())
    @rule(pick=st.integers(0, 10_000))
    def reverse(self, pick: int) -> None:
        rows = list(Movement.objects.order_by("id"))
        wrong = rows[pick % len(rows)]
        self.tried(lambda at: moving.reverse_movement(key=key(), person=None, movement=wrong, reason="wrong bottle"))

    @rule(which=st.integers(0, 3), amount=st.integers(1, 2_000), late=LATE)
    def use(self, which: int, amount: int, late: int) -> None:
        bottle = [*self.bottles, *(supply.bottle for supply in self.supplies)][which]
        self.tried(
            lambda at: moving.use(
                key=key(), person=None, bottle=bottle, car=self.car, amount=grams(amount), happened_at=at
            ), late,
        )

    @rule(which=st.integers(0, 3), net=NETS, late=LATE, reason=st.sampled_from(["", "a leak"]))
    def weigh_outside(self, which: int, net: int, late: int, reason: str) -> None:
        bottle = [*self.bottles, *(supply.bottle for supply in self.supplies)][which]
        gross = grams((SUPPLY_TARE_G if which > 1 else TARE_G) + net)
        self.tried(
            lambda at: weighing.weigh(
                key=key(), person=None, bottle=bottle, scale=self.works.scale, gross=gross, happened_at=at, reason=reason
            ), late,
        )

    @invariant()
    def books_hold(self) -> None:
        if hasattr(self, "bottles"):
            b.check_books()

    @invariant()
    def no_net_is_recomputed(self) -> None:
        for row in Weighing.objects.select_related("tare"):
            said = (row.gross_g, row.net_g, row.error_g)
            assert self.nets.setdefault(row.pk, said) == said
            assert row.net_g == row.gross_g - row.tare.total_g

    @invariant()
    def a_bottle_is_in_one_open_refill_at_most(self) -> None:
        taken = list(Refill.objects.filter(closed_at__isnull=True).values_list("bottle", flat=True))
        assert len(taken) == len(set(taken))
        assert not Supply.objects.filter(bottle__in=taken).exists()

    @invariant()
    def what_is_closed_had_its_line_off(self) -> None:
        for refill in Refill.objects.filter(closed_at__isnull=False):
            rows = Weighing.objects.filter(refill=refill, bottle=refill.bottle, happened_at__lte=refill.closed_at)
            assert rows.filter(step="disconnected", net_g__lte=refill.limit_g).exists()


RUNS: list[int] = []


@pytest.mark.slow
@pytest.mark.django_db
def test_any_sequence_of_refills_keeps_the_books() -> None:
    class InOne(Fillings):
        """One run in a transaction that is rolled back at its end."""

        def __init__(self) -> None:
            super().__init__()
            self.block = transaction.atomic()
            self.block._from_testcase = True  # as Django's own: what must be outermost may stand within
            self.block.__enter__()

        def teardown(self) -> None:
            RUNS.append(getattr(self, "opened", 0))
            transaction.set_rollback(True)
            self.block.__exit__(None, None, None)

    run_state_machine_as_test(
        InOne,
        settings=settings(
            max_examples=times(12), stateful_step_count=20, deadline=None,
            suppress_health_check=list(HealthCheck), derandomize=True,
            phases=[Phase.generate],  # a failure prints its steps; making them fewer takes minutes
        ),
    )
    assert sum(RUNS) >= 10  # else nothing was tried
