"""After the refill: where the scale says it ended, on what was forecast before."""

from __future__ import annotations

import html
import re
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from bottles.models import Forecast, Refill
from bottles.selectors.refills import course_of
from bottles.services.refill_steps import weigh_refill
from bottles.views.forecast_place import Came, place
from bottles.views.refill_rows import compared
from bottles.views.refill_words import RefillWords
from shop.physics.formatting import unit_system
from tests.bottles.of_refill import AMBIENT_PA, Works, key

pytestmark = pytest.mark.django_db(transaction=True)

WORDS = RefillWords(unit_system("metric"), AMBIENT_PA)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


def forecast(low: int = 3_900, likely: int | None = 4_200, high: int = 4_300) -> Forecast:
    return Forecast(low_g=low, likely_g=likely, high_g=high, result={"target_g": 4_614, "start_g": 314})


def came(grams: int, ended_by: str = "flow ceased", *, goes_on: bool = False) -> Came:
    return Came(grams, 20, ended_by, goes_on)


@pytest.mark.parametrize(
    ("grams", "ended_by", "word", "kind"),
    [
        (4_100, "flow ceased", "within what was forecast", "yes"),
        (3_885, "flow ceased", "within what was forecast", "yes"),  # within the ± of its weighings
        (3_700, "flow ceased", "less than forecast", "after"),
        (4_400, "limit", "more than forecast", "after"),
        (3_700, "by hand", "stopped before it got there", "open"),
    ],
)
def test_it_lies_inside_or_outside_the_band_as_far_as_the_scale_can_tell(
    grams: int, ended_by: str, word: str, kind: str
) -> None:
    placed = place(forecast(), came(grams, ended_by), WORDS)
    assert (placed["word"], placed["kind"]) == (word, kind)


def test_an_open_refill_below_its_forecast_is_only_not_there_yet() -> None:
    assert place(forecast(), came(1_000, "", goes_on=True), WORDS)["word"] == "not there yet"


def test_its_distance_from_the_likely_figure_is_said_where_there_is_one() -> None:
    assert place(forecast(), came(4_100), WORDS)["off"] == "100 g less than likely"
    assert place(forecast(), came(4_205), WORDS)["off"] == "as the likely figure has it"
    assert place(forecast(likely=None), came(4_100), WORDS)["off"] == ""


@pytest.mark.parametrize("grams", [-5, 0, 3_900, 4_300, 9_000])
def test_whatever_came_the_mark_stays_on_the_drawing_and_keeps_the_order(grams: int) -> None:
    drawn = place(forecast(), came(grams), WORDS)["drawn"]
    assert 20 <= drawn["mark"] <= 580 and 20 <= drawn["low"] <= drawn["low"] + drawn["width"] <= 580
    assert (drawn["mark"] < drawn["low"]) == (grams < 3_900)
    assert (drawn["mark"] > drawn["low"] + drawn["width"]) == (grams > 4_300)


def test_the_refills_page_and_its_receipt_show_it(client_of: Any, front_desk: Any, works: Works) -> None:
    refill = works.open()
    client = client_of(front_desk)
    pages = [reverse("bottles:refill", args=[refill.pk]), reverse("bottles:receipt", args=[refill.pk])]
    assert all("by the scale" not in said(client, page) for page in pages)  # nothing was weighed yet
    weigh_refill(key=key(), person=front_desk, refill=refill, weight=works.weight(4_590), ended_by="limit")
    for page in pages:
        assert "by the scale 9.5 ±0.1 lb came over (arrow)" in said(client, page), page
        assert "within what was forecast" in said(client, page) and "the fill limit was reached." in said(client, page)


def test_a_refill_without_a_forecast_has_no_place_on_one(front_desk: Any, works: Works) -> None:
    refill = works.open()
    weigh_refill(key=key(), person=front_desk, refill=refill, weight=works.weight(4_590), ended_by="limit")
    course = course_of(Refill.objects.get(pk=refill.pk))
    assert compared(course, WORDS)
    course.draws[0].forecast = None
    assert compared(course, WORDS) is None


def said(client: Client, address: str) -> str:
    answer = client.get(address)
    assert answer.status_code == 200
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]+>", " ", answer.content.decode())))
