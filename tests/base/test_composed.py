"""A query that is composed once has the rows of one that is composed each time."""

from __future__ import annotations

import datetime
from collections.abc import Iterable
from typing import Any

import pytest
from django.db import connection
from django.db.models import F, Max, Prefetch, QuerySet
from django.test.utils import CaptureQueriesContext

from bottles.models import Bottle, Custody, Stamp, Weighing
from shop.base.composed import LENGTHS, composed
from shop.base.models import Act, Policy
from tests import factories

pytestmark = pytest.mark.django_db
NOON = datetime.datetime(2026, 3, 1, 12, tzinfo=datetime.UTC)


@pytest.fixture
def bottles(shop: Any) -> list[Bottle]:
    found = []
    for number in range(7):
        bottle = factories.BottleFactory(code=f"T-{number:04}")
        factories.StampFactory(bottle=bottle, kind="test", year=2020 + number, month=1)
        factories.weighed(bottle, gross_g=6_000 + number, tare_g=5_000)
        factories.placed(bottle, "in", happened_at=NOON + datetime.timedelta(days=number))
        found.append(bottle)
    return found


def by_keys(keys: Iterable[int]) -> QuerySet[Bottle]:
    return Bottle.objects.filter(pk__in=keys).order_by("-code")


def with_its_act(key: int) -> QuerySet[Weighing]:
    return Weighing.objects.filter(bottle=key).select_related("scale", "act").annotate(code=F("bottle__code"))


def years(key: int, keys: Iterable[int], later: int) -> QuerySet[Any]:
    """One key stands in two places, and not in the order of the arguments."""
    found = Stamp.objects.filter(bottle__in=keys, year__gt=2000).exclude(bottle=later)
    return (found | Stamp.objects.filter(bottle=key)).order_by("year").values_list("bottle_id", "year", "act__recorded_at")


def since(moment: datetime.datetime, text: str) -> QuerySet[Any]:
    return Custody.objects.filter(happened_at__gte=moment, bottle__code__gt=text).values_list("bottle", flat=True).order_by("id")


def test_keys_in_any_number_find_their_rows_each_time_anew(bottles: list[Bottle]) -> None:
    ask = composed(by_keys)
    for many in (1, 2, 3, 5, 7, 4, 1, 0):
        keys = [bottle.pk for bottle in bottles[:many]]
        assert ask(keys) == list(by_keys(keys))


def test_more_keys_than_a_text_is_kept_for_are_asked_for_all_the_same(bottles: list[Bottle]) -> None:
    keys = [bottle.pk for bottle in bottles] + list(range(-LENGTHS[-1], 0))
    assert composed(by_keys)(keys) == bottles[::-1]


def test_objects_come_with_what_was_selected_and_named(bottles: list[Bottle]) -> None:
    ask = composed(with_its_act)
    for bottle in (*bottles, bottles[0]):
        with CaptureQueriesContext(connection) as queries:
            (row,) = ask(bottle.pk)
            said = (row.scale.name, row.act.recorded_at, row.code)
        plain = with_its_act(bottle.pk).get()
        assert row == plain and said == (plain.scale.name, plain.act.recorded_at, bottle.code)
        assert len(queries) == 1


def test_each_value_goes_to_all_of_its_places(bottles: list[Bottle]) -> None:
    ask = composed(years)
    first, *others = (bottle.pk for bottle in bottles)
    for key, keys, later in ((first, others, others[2]), (others[0], [first], first), (first, others[:3], first)):
        assert ask(key, keys, later) == list(years(key, keys, later))


def test_moments_days_and_texts_are_compared_as_ever(bottles: list[Bottle]) -> None:
    ask = composed(since)
    for days, text in ((0, "T-0001"), (3, "T-0001"), (6, "T"), (30, "T")):
        moment = NOON + datetime.timedelta(days=days)
        assert ask(moment, text) == list(since(moment, text))
    policy = Policy.objects.create(act=factories.ActFactory(), effective_from=datetime.date(2026, 4, 1), values={})

    @composed
    def begun(on: datetime.date) -> QuerySet[Policy]:
        return Policy.objects.filter(effective_from__lte=on)

    assert [begun(datetime.date(2026, month, day)) for month, day in ((3, 31), (4, 1))] == [[], [policy]]


def test_it_is_composed_once_and_sees_what_changed_since(bottles: list[Bottle]) -> None:
    made = []

    @composed
    def latest() -> QuerySet[Any]:
        made.append("once")
        return Act.objects.values_list("id", flat=True).order_by("-id")[:1]

    before = latest()
    act = factories.ActFactory()
    assert before != latest() == [act.pk]
    assert made == ["once"]


def test_an_argument_that_is_not_compared_as_it_is_is_refused(bottles: list[Bottle]) -> None:
    @composed
    def shifted(key: int) -> QuerySet[Bottle]:
        return Bottle.objects.filter(pk__lt=key + 1)

    with pytest.raises(TypeError, match="shifted doesn't compare"):
        shifted(bottles[0].pk)


def test_what_takes_more_than_one_query_is_refused(bottles: list[Bottle]) -> None:
    @composed
    def with_stamps(key: int) -> QuerySet[Bottle]:
        return Bottle.objects.filter(pk=key).prefetch_related(Prefetch("stamps"))

    with pytest.raises(TypeError, match="more than one query"):
        with_stamps(bottles[0].pk)


def test_groups_are_counted_as_ever(bottles: list[Bottle]) -> None:
    def heaviest(keys: Iterable[int]) -> QuerySet[Any]:
        found = Weighing.objects.filter(bottle__in=keys).order_by().values("scale").annotate(most=Max("gross_g"))
        return found.order_by("scale").values_list("scale", "most")

    keys = [bottle.pk for bottle in bottles[:5]]
    assert composed(heaviest)(keys) == list(heaviest(keys))
