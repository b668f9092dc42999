"""The form in which a plan is told has a number, and a kept plan of another form isn't shown.

So a form that changes without a new number would be read by a page that doesn't know it.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from datetime import timedelta
from typing import Any

import pytest

from bottles.models import Station
from bottles.rules.planning.told import TOLD
from tests import factories
from tests.bottles.of_plan import NOW, a_morning, plan, told, used, wants
from tests.bottles.of_refill import Works

pytestmark = pytest.mark.django_db

# By number: what the names of everything that is told come to.
FORMS = {3: "50a874d1186d5128"}


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Iterator[Works]:
    yield from a_morning(shop, front_desk)


def names(value: Any, at: str = "") -> Iterator[tuple[str, bool]]:
    """Every path of names in what is told, and whether there's anything at it."""
    if isinstance(value, dict):
        for name, each in value.items():
            yield from names(each, f"{at}.{name}")
    elif isinstance(value, list):
        yield f"{at}[]", bool(value)
        for each in value:
            yield from names(each, f"{at}[]")
    else:
        yield at, True


def a_day_with_everything(works: Works) -> dict[str, Any]:
    """A plan in which nothing that can be told is missing."""
    used(works, 2_000)
    supply = works.connected("S-09", net_g=None, last_held="nitrous")
    works.connected("S-10", net_g=4_000)
    dented, unweighed = works.bottle_to_fill("T-0500"), works.bottle_to_fill("T-0501")
    factories.ConditionFactory(bottle=dented, code="dent")
    wants(dented)
    factories.placed(unweighed, "out", happened_at=NOW - timedelta(minutes=50))
    factories.placed(unweighed, "in", happened_at=NOW - timedelta(minutes=40))
    wants(unweighed)
    for number in range(3):
        wants(works.bottle_to_fill(f"T-{510 + number}"), NOW + timedelta(hours=1))
    works.open(works.bottle, supply)
    Station.objects.update(pumped=True, pump_note="700 bar, 40 °C, made for nitrous oxide")
    return told(plan(works, closes="10:00"))


def test_what_a_plan_tells_changes_with_its_number_alone(works: Works) -> None:
    found: dict[str, bool] = {}
    for name, there in names(a_day_with_everything(works)):
        found[name] = found.get(name, False) or there
    assert [name for name, there in found.items() if not there] == []  # else its own names are missing
    form = hashlib.sha256("\n".join(sorted(found)).encode()).hexdigest()[:16]
    assert FORMS.get(TOLD) == form, (
        f"What a plan tells isn't form {TOLD} any more. Plans that are kept would be read wrongly: raise TOLD in "
        f"bottles/rules/planning/told.py, and write {form!r} beside the new number in FORMS. Never change an older one."
    )
