"""The desk's own little shop: a station with its scale, a supply bottle, a customer and their bottles."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

from bottles.models import Bottle
from shop.base import clock
from tests import factories
from tests.bottles.of_refill import Works


class Desk(Works):
    """As `Works`, with a counter where customers' bottles come in, and what each has agreed to."""

    def __post_init__(self) -> None:
        super().__post_init__()
        factories.PlaceFactory(code="COUNTER", name="the counter", kind="counter")
        self.customer: Any = factories.CustomerFactory(name="Ostrander")
        factories.ConsentFactory(customer=self.customer)

    def customers(self, code: str, **changes: Any) -> Bottle:
        """A customer's bottle, weighed here once and out with its owner since."""
        bottle = self.bottle_to_fill(code, **changes)
        factories.owned(bottle, self.customer)
        factories.placed(bottle, "out", with_whom="Ostrander", happened_at=clock.now() - timedelta(minutes=30))
        return bottle
