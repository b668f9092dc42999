"""The page of what was learned: forecast against the scale, the figure, what lies far outside, by whom."""

from __future__ import annotations

import html
import re
from typing import Any

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from bottles.models import Refill
from bottles.services import refill_steps as steps
from bottles.services.learning import gather, learn
from bottles.services.weighing import strike
from tests.bottles.of_refill import TARE_G, Works, degrees, key
from tests.bottles.test_learning import COOL, learned, refilled, several

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def words_of(answer: Any) -> str:
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]+>", " ", answer.content.decode())))


def page(client: Client, **query: str) -> Any:
    answer = client.get(reverse("bottles:learning"), query)
    assert answer.status_code == 200
    return answer


def test_before_the_first_refill_it_says_what_to_do_and_that_the_figure_is_a_prior(works: Works, client_of: Any) -> None:
    told = words_of(page(client_of(works.person)))
    assert "No refill is closed yet." in told
    assert "0.50 ±0.50 prior, common practice" in told
    assert "No refill told it so far, 5 are needed" in told


def test_each_refill_stands_beside_its_forecast(works: Works, client_of: Any) -> None:
    refill = refilled(works, "T-0701", 0.5)
    answer = page(client_of(works.person))
    assert len(answer.context["rows"]) == 1
    (row,) = answer.context["rows"]
    assert row["cells"][1:3] == ["T-0701", "S-T-0701"] and row["cells"][-1] == "within"
    assert reverse("bottles:refill", args=[refill.pk]) in answer.content.decode()
    assert answer.context["overall"]["inside"].startswith("1 of 1")
    assert "<svg" in answer.content.decode()


def test_the_fitted_figure_is_said_with_its_refills_and_what_stayed_out(works: Works, client_of: Any) -> None:
    several(works)
    refilled(works, "T-0790", wet=True)
    (row, *_) = [row for row in learned(works) if row.size_ml]
    told = words_of(page(client_of(works.person)))
    assert f"{row.figure_milli / 1000:.2f} ±{row.deviation_milli / 500:.2f} fitted 6 refills" in told
    assert "size over 5 to 7.5 L" in told
    assert "Sprayed through the vapour, without a dip tube" in told and "Too few of its own: that of the whole shop holds." in told
    assert "1: weighed wet: ice adds to the reading" in told


def test_what_is_not_compared_is_counted_with_its_reason(works: Works, client_of: Any) -> None:
    refilled(works, "T-0702", ended_by="by hand")
    refilled(works, "T-0703", method="pumped")
    supply = works.connected("S-0900", net_g=None, last_held="nitrous")
    gauge_alone = works.open(supply=supply)
    steps.weigh_refill(key=key(), person=works.person, refill=gauge_alone, weight=works.weight(3_000), ended_by="flow ceased")
    told = words_of(page(client_of(works.person)))
    assert "Not compared (3)" in told and "No refill can be compared yet." in told
    for why in ("stopped by hand before the flow ceased", "pumped", "the supply bottle was known by its gauge alone"):
        assert f"1: {why}" in told


def far_one(works: Works) -> Refill:
    """A refill of which far less came than any reading allows."""
    into = works.bottle_to_fill("T-0666")
    refill = works.open(into, works.connected("S-0666"), bottle_temperature=degrees(COOL))
    done = steps.weigh_refill(
        key=key(), person=works.person, refill=refill, weight=works.weight(700), ended_by="flow ceased"
    )
    assert done.closed
    return refill


def test_a_refill_far_outside_is_named_with_its_causes_until_its_weight_is_struck(works: Works, client_of: Any) -> None:
    refill = far_one(works)
    refilled(works, "T-0701", 0.5)
    answer = page(client_of(works.person))
    (far,) = answer.context["far"]
    assert far["code"] == "T-0666" and far["url"] == reverse("bottles:refill", args=[refill.pk])
    assert "less than likely" in far["difference"] and 1 <= len(far["causes"]) <= 4
    assert "Far outside their band" in words_of(answer)
    weighing = refill.weighings.get(step="disconnected")
    strike(key=key(), person=works.person, weighing=weighing, reason="another bottle was on the scale")
    assert page(client_of(works.person)).context["far"] == []


def test_people_are_told_apart_for_the_manager_alone_by_name_and_never_ranked(
    works: Works, manager: Any, technician: Any, client_of: Any
) -> None:
    refilled(works, "T-0701", 0.9)
    works.person = technician
    refilled(works, "T-0702", 0.5)
    groups = {group["name"]: group for group in page(client_of(manager)).context["groups"]}
    rows = groups["By person who opened it"]["rows"]
    names = [row[0] for row in rows]
    assert len(names) == 2 and names == sorted(names)
    assert all("1 of 1" in row[4] for row in rows)  # with its count and its interval
    for person in (technician, works.person):
        told = page(client_of(person))
        assert not any("person" in group["name"] for group in told.context["groups"])
        assert "By person" not in words_of(told)


def test_groups_go_by_supply_bottle_size_and_way(works: Works, client_of: Any) -> None:
    refilled(works, "T-0701", bottle=works.bottle_to_fill("T-0701", dip_tube="none"))
    refilled(works, "T-0702")
    groups = {group["name"]: group["rows"] for group in page(client_of(works.person)).context["groups"]}
    assert [row[0] for row in groups["By supply bottle"]] == ["S-T-0701", "S-T-0702"]
    assert [row[:2] for row in groups["By size of the bottle to fill"]] == [["over 5 to 7.5 L", "2"]]
    assert {row[0] for row in groups["By way of entering"]} == {
        "Under the vapour, through a dip tube", "Sprayed through the vapour, without a dip tube",
    }  # fmt: skip


def test_the_page_asks_as_much_for_many_refills_as_for_few(
    works: Works, client_of: Any, django_assert_max_num_queries: Any
) -> None:
    client = client_of(works.person)
    several(works, 2)
    learn(key=key(), shop=works.shop, gathered=gather(works.shop))
    page(client)
    with CaptureQueriesContext(connection) as few:
        page(client)
    for number in range(5):
        refilled(works, f"T-{750 + number}")
    with django_assert_max_num_queries(len(few)):
        page(client)


def test_a_refill_that_ended_at_its_limit_counts_with_the_room_it_had(works: Works, client_of: Any) -> None:
    """The reading to stop at lies below the target by the scale's ±: that's no error of the forecast."""
    refill = works.open(bottle_temperature=degrees("-15 °C"))
    stop = works.weight(refill.stop_at_g - TARE_G)
    done = steps.weigh_refill(key=key(), person=works.person, refill=refill, weight=stop, close_when_full=True)
    assert done.closed and refill.target_g > refill.stop_at_g - TARE_G
    (row,) = page(client_of(works.person)).context["rows"]
    assert row["cells"][5] == "0.0 oz" and row["cells"][-1] == "within"
