"""The invented past as steps: the same for the same day, right on every day of the calendar."""

from collections import Counter
from dataclasses import replace
from datetime import date, datetime, timedelta
from itertools import islice
from zoneinfo import ZoneInfo

import pytest

from shop.demo import names
from shop.demo.counter import ON_THE_COUNTER
from shop.demo.kit import countries, kit_for
from shop.demo.steps import text_of
from shop.demo.world import SEED, plan

EDGES = [
    date(2028, 2, 29), date(2027, 2, 28), date(2028, 3, 1), date(2026, 12, 31), date(2027, 1, 1), date(2027, 3, 31),
    date(2027, 4, 30), date(2027, 3, 14), date(2027, 11, 7), date(2027, 5, 31),
]  # fmt: skip  # leap day, ends of months and of the year, the days on which United States clocks change
DAY = date(2026, 12, 1)


def steps_of(today: date, country: str = "US", months: float = 1, seed: int = SEED) -> list:
    return list(plan(today=today, kit=kit_for(country), history_months=months, seed=seed))


@pytest.mark.parametrize("country", countries())
def test_same_seed_and_day_give_the_same_bytes(country):
    assert text_of(steps_of(DAY, country)) == text_of(steps_of(DAY, country))


def test_another_seed_or_day_gives_another_past():
    told = text_of(steps_of(DAY))
    assert told != text_of(steps_of(DAY, seed=SEED + 1))
    assert told != text_of(steps_of(DAY + timedelta(days=1)))


@pytest.mark.parametrize("today", EDGES)
def test_on_any_day_the_past_lies_before_it_and_in_order(today):
    kit = kit_for("US")
    steps = steps_of(today, months=0.5)
    assert len({step.name for step in steps}) == len(steps)
    midnight = datetime(today.year, today.month, today.day, tzinfo=ZoneInfo(kit.time_zone))
    assert max(step.at for step in steps) < midnight
    last: dict[str, datetime] = {}
    for step in steps:
        for code in filter(None, (step.values.get("bottle"), step.values.get("supply"),
                                  step.values.get("code") if step.verb == "bottle.register" else None)):  # fmt: skip
            assert step.at >= last.get(code, step.at), step
            last[code] = step.at


@pytest.mark.parametrize("country", countries())
def test_the_plan_has_enough_of_everything(country):
    verbs = Counter(step.verb for step in steps_of(DAY, country))
    assert verbs["bottle.register"] >= 60
    assert verbs["customer.add"] >= 25
    assert verbs["car.add"] >= 20
    assert verbs["station.add"] >= 2
    assert verbs["scale.add"] >= 3


def test_the_counter_comes_first():
    """Before anything that needs thermodynamics, which take seconds to load."""
    first = list(islice(plan(today=DAY, kit=kit_for("US")), 60))
    waits = [step.values["bottle"] for step in first if step.verb == "custody.in" and "fill" in step.values["wanted"]]
    assert sorted(waits) == sorted(ON_THE_COUNTER)
    assert [step.values["bottle"] for step in first if step.verb == "supply.connect"][:1] == ["S-01"]


def test_weights_are_written_as_the_shops_scales_write():
    us = {step.values["scale"]: step.values["gross"] for step in steps_of(DAY) if step.verb == "weigh"}
    assert us["BENCH-1"].endswith(" lb")
    metric = list(plan(today=DAY, kit=replace(kit_for("US"), units="metric"), history_months=0.2))
    assert all(step.values["gross"].endswith(" kg") for step in metric if step.verb in ("weigh", "deliver"))


def test_every_owner_and_car_is_in_the_book():
    known = {someone.name for someone in names.CUSTOMERS}
    assert {car.owner for car in names.CARS} - {""} <= known
    owners = {step.values["owner"] for step in steps_of(DAY) if step.verb == "bottle.register"}
    assert owners - {"shop", "supplier"} <= known
