"""A saved refill beside bare transactions, each on the disc: of one row, and of as many rows as it writes itself.

The goal is ten transactions of one row; it's missed (DEVELOPERS.md says by how much and why), so the
ratio is printed and what fails is an act that asks the database more often than it did.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from functools import partial
from typing import Any

import pytest
from django.db import connection, transaction
from django.test.utils import CaptureQueriesContext

from bottles.models import Refill
from bottles.services.refill_steps import weigh_refill
from bottles.services.refilling import Opening, open_refill
from shop.base import clock
from shop.base.models import Act
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import in_turn
from tests.bottles.of_refill import Works, key

pytestmark = [pytest.mark.benchmark, pytest.mark.django_db(transaction=True)]

ROUNDS = 11
# The first closing opens the account of line losses (four) and asks for a fit (seven; one while a fit waits already).
MOST_STATEMENTS = {"opened": 31, "weighed": 27, "closed": 41}


def test_a_saved_refill_is_worth_few_bare_transactions(shop: Any, front_desk: Any, tell: Told) -> None:
    works = Works(shop, front_desk)
    # The forecast is worked out before an act begins; test_pages weighs that.
    to_open: list[Opening] = [works.opening(works.bottle_to_fill(f"T-{3000 + n}")) for n in range(ROUNDS + 1)]
    to_weigh: list[Refill] = []
    to_close: list[Refill] = []

    def bare(rows: int = 1) -> None:
        with transaction.atomic():
            for _ in range(rows):
                Act.objects.create(key=key(), recorded_at=clock.now(), code="test.made", subject="test")

    def opened() -> None:
        found = open_refill(key=key(), person=works.person, opening=to_open.pop())
        assert found.refill is not None
        to_weigh.append(found.refill)

    def weighed() -> None:
        refill = to_weigh.pop()
        weigh_refill(key=key(), person=works.person, refill=refill, weight=works.weight(600, line_off=False))
        to_close.append(refill)

    def closed() -> None:
        found = weigh_refill(
            key=key(), person=works.person, refill=to_close.pop(), weight=works.weight(900), ended_by="by hand"
        )
        assert found.closed

    acts = {"opened": opened, "weighed": weighed, "closed": closed}
    rows = {}
    for name, act in acts.items():
        asked = statements(act)
        assert len(asked) <= MOST_STATEMENTS[name], "\n".join(asked)
        rows[name] = sum(one.startswith(("INSERT", "UPDATE")) for one in asked)
    jobs = {"bare": bare} | acts | {f"{name}, its rows": partial(bare, many) for name, many in rows.items()}
    measured = in_turn(jobs, rounds=ROUNDS - 1, calls=dict.fromkeys(jobs, 1) | {"bare": 5}, clock=time.perf_counter)
    assert Refill.objects.filter(closed_at__isnull=False).count() == ROUNDS + 1
    for name in acts:
        tell(f"refill, {name}", measured, name, beside="bare", goal=10, worst=math.inf)
        tell(f"refill, {name}", measured, name, beside=f"{name}, its rows")


def statements(act: Callable[[], None]) -> list[str]:
    """What an act says to the database."""
    with CaptureQueriesContext(connection) as queries:
        act()
    return [one["sql"] for one in queries.captured_queries]
