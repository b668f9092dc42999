"""The pages of a refill, as a person at the desk goes through them."""

from __future__ import annotations

import html
import re
import time
from datetime import timedelta
from typing import Any

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from bottles.models import Condition, Refill, ScaleCheck, Weighing
from shop.base import clock
from shop.base.models import Act
from tests import factories
from tests.bottles.of_refill import Works, balance, holds, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def client(works: Works, front_desk: Any, client_of: Any) -> Client:
    return client_of(front_desk)


def filled(works: Works, **changes: str) -> dict[str, str]:
    """What is typed to open a refill, in the units of this shop: pounds, psi, °F."""
    typed = {
        "form_key": str(key()), "supply": str(works.supply.pk), "bottle_weight": "6.72 kg", "gauge": "718",
        "supply_temperature": "68", "taken": "wall", "bottle_temperature": "10", "bottle_taken": "wall", "start": "weighed",
        "method": "chilled", "look_all": "on",
    }  # fmt: skip
    return typed | changes


def words_of(answer: Any) -> str:
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]+>", " ", answer.content.decode())))


def fill(client: Client, works: Works, **changes: str) -> Any:
    return client.post(reverse("bottles:fill", args=[works.bottle.code]), filled(works, **changes))


def test_the_page_shows_where_to_stop_before_anything_is_typed(client: Client, works: Works) -> None:
    page = words_of(client.get(reverse("bottles:fill", args=["T-0412"])))
    assert "Stop at 11.01 kg on scale B (24 lb 4 oz)" in page
    assert "The forecast waits for: the supply bottle's temperature, the temperature of the bottle to fill" in page


def test_without_javascript_a_button_works_the_forecast_out_and_saves_nothing(client: Client, works: Works) -> None:
    acts = Act.objects.count()
    answer = fill(client, works, forecast="yes")
    assert answer.status_code == 200 and "Goes over:" in words_of(answer)
    assert answer.context["form"]["gauge"].value() == "718"
    assert Act.objects.count() == acts


def test_one_submission_opens_it_and_goes_to_its_page(client: Client, works: Works) -> None:
    answer = fill(client, works)
    refill = Refill.objects.get()
    assert answer["Location"] == reverse("bottles:refill", args=[refill.pk])
    page = words_of(client.get(answer["Location"]))
    assert "Stop at 11.01 kg" in page and "S-07" in page
    assert client.get(reverse("bottles:fill", args=["T-0412"]))["Location"] == answer["Location"]
    assert "T-0412" in words_of(client.get(reverse("bottles:refills")))


def test_a_reload_of_the_posted_form_opens_nothing_more(client: Client, works: Works) -> None:
    typed = filled(works)
    address = reverse("bottles:fill", args=["T-0412"])
    first, again = client.post(address, typed), client.post(address, typed)
    assert first["Location"] == again["Location"] and Refill.objects.count() == 1


@pytest.mark.parametrize(
    ("field", "typed"),
    [("bottle_weight", "heavy"), ("bottle_weight", "1,234"), ("bottle_weight", "1e9 kg"), ("bottle_weight", "-3 kg"),
     ("bottle_weight", "5 kg"), ("bottle_weight", "7 stones"), ("gauge", "nine hundred"), ("supply_temperature", "200"),
     ("happened_at", "2099-01-01T10:00"), ("bottle_weight", "9" * 3_000_000)],
    ids=lambda value: value[:12],
)  # fmt: skip
def test_bad_input_gets_a_sentence_and_keeps_what_was_typed(
    client: Client, works: Works, field: str, typed: str
) -> None:
    before = Act.objects.count(), Weighing.objects.count()
    answer = fill(client, works, **{field: typed})
    assert answer.status_code in (409, 422)
    form = answer.context["form"]
    assert form.errors and form[field].value() == typed and form["method"].value() == "chilled"
    assert words_of(answer).count("to put right") == 1
    assert (Act.objects.count(), Weighing.objects.count()) == before and Refill.objects.count() == 0


def test_the_look_is_answered_item_by_item(client: Client, works: Works) -> None:
    unlooked = fill(client, works, look_all="")
    assert unlooked.status_code == 422 and list(unlooked.context["form"].errors) == ["look_all"]
    assert fill(client, works, look_all="", look_ok="outlet").status_code == 409
    answer = fill(client, works, look_failed="outlet")
    assert answer["Location"] == works.bottle.get_absolute_url()
    assert Condition.objects.get().code == "dirty outlet" and Refill.objects.count() == 0
    assert "Not filled. Noted on the bottle" in words_of(client.get(answer["Location"]))


def test_a_target_above_the_limit_is_refused_beside_its_field(client: Client, works: Works) -> None:
    answer = fill(client, works, target="12 lb")
    assert answer.status_code == 422 and list(answer.context["form"].errors) == ["target"]
    assert Refill.objects.count() == 0
    assert "It may hold no more than 10.2 lb" in words_of(answer)
    assert "It may hold no more than 10.2 lb" in live(client, works, target="12 lb")
    assert fill(client, works, target="9 lb").status_code == 302


def test_a_weight_that_forbids_filling_is_told_while_typing(client: Client, works: Works) -> None:
    light = live(client, works, bottle_weight="5 kg")
    assert "weighs less than its tare" in light and "Goes over" not in light
    heavy = live(client, works, bottle_weight="12 kg")
    assert "It holds its limit already: don't add to it" in heavy
    assert "Goes over" not in heavy and "Stop at" not in heavy
    assert "It holds its target already" in live(client, works, target="200 g")


def test_a_warmer_must_be_listed(client: Client, works: Works) -> None:
    answer = fill(client, works, method="warmed")
    assert answer.status_code == 422 and list(answer.context["form"].errors) == ["heater_listed"]
    assert fill(client, works, method="warmed", heater_listed="on").status_code == 302


def test_the_days_first_fill_checks_the_scale_right_there(client: Client, works: Works) -> None:
    works.station.scale = factories.ScaleFactory(name="scale C")
    works.station.save()
    assert "The day's first fill on scale C" in words_of(client.get(reverse("bottles:fill", args=["T-0412"])))
    assert list(fill(client, works).context["form"].errors) == ["check_known", "check_read"]
    typed = {"check_known": "10 kg", "check_read": "10.00 kg"}
    assert fill(client, works, **typed).status_code == 302
    assert ScaleCheck.objects.filter(scale=works.station.scale, passed=True).count() == 1


def test_a_scale_that_fails_its_check_there_is_kept_as_failed(client: Client, works: Works) -> None:
    works.station.scale = factories.ScaleFactory(name="scale C")
    works.station.save()
    answer = fill(client, works, check_known="10 kg", check_read="10.3 kg")
    assert answer.status_code == 409 and "check_read" in answer.context["form"].errors
    assert ScaleCheck.objects.filter(passed=False).count() == 1 and Refill.objects.count() == 0


def test_an_empty_bottle_asks_whether_it_kept_its_pressure(client: Client, works: Works) -> None:
    works.bottle = works.bottle_to_fill("T-0413", net_g=0)
    typed = {"bottle_weight": "6.42 kg", "start": "vented"}
    assert list(fill(client, works, **typed).context["form"].errors) == ["pressure"]
    assert fill(client, works, pressure="none", **typed).status_code == 409
    assert fill(client, works, pressure="purged", **typed).status_code == 302


def test_a_bottle_that_must_not_be_filled_shows_why_and_no_form(client: Client, works: Works) -> None:
    factories.ConditionFactory(bottle=works.bottle, code="crack")
    page = client.get(reverse("bottles:fill", args=["T-0412"]))
    assert "Must not be filled" in words_of(page) and b"bottle_weight" not in page.content


# --- the part that answers while one types ----------------------------------------------------------


def live(client: Client, works: Works, **changes: str) -> str:
    answer = client.post(reverse("bottles:forecast_live", args=["T-0412"]), filled(works, **changes))
    assert answer.status_code == 200
    return words_of(answer)


def test_while_typing_nothing_is_saved_and_nothing_breaks(client: Client, works: Works) -> None:
    acts = Act.objects.count()
    assert "The forecast waits for: the temperature of the bottle to fill" in live(client, works, bottle_temperature="")
    assert "Its temperature:" in live(client, works, supply_temperature="6x8")
    assert "Goes over:" in live(client, works)
    assert "between -40 °C and 52 °C" in live(client, works, bottle_temperature="-80")
    assert "isn't connected any more" in live(client, works, supply="99999")
    assert Act.objects.count() == acts


def test_a_supply_that_may_not_be_emptied_is_told_before_anything_is_weighed(client: Client, works: Works) -> None:
    factories.ConditionFactory(bottle=works.supply.bottle, code="leak")
    assert "S-07 may not be emptied into another bottle." in live(client, works)


def test_a_pump_has_stops_of_its_own(client: Client, works: Works) -> None:
    assert "has no pump written down" in live(client, works, method="pumped")
    works.station.pumped, works.station.pump_note = True, "120 bar"
    works.station.save()
    assert "the limits of its plate (120 bar)" in live(client, works, method="pumped")


def test_what_isnt_a_reading_may_be_missing_from_a_forecast(client: Client, works: Works) -> None:
    answer = fill(client, works, forecast="yes", look_all="", bottle_weight="")
    assert not answer.context["form"].errors and "Goes over:" in words_of(answer)


def test_a_danger_sign_hides_the_figure_to_stop_at(client: Client, works: Works) -> None:
    page = live(client, works, gauge="1100")
    assert "Danger sign" in page and "weigh it now" in page
    assert "Stop at" not in page and "Goes over" not in page
    answer = fill(client, works, gauge="1100")
    assert answer.status_code == 409 and list(answer.context["form"].errors) == ["gauge"]


def test_a_gauge_below_is_told_beside_the_forecast(client: Client, works: Works) -> None:
    page = live(client, works, gauge="500")
    assert "readings contradict each other" in page and "no liquid is left, or a reading is wrong" in page


def test_the_limit_the_cold_and_what_is_left_are_said(client: Client, works: Works) -> None:
    page = live(client, works)
    for words in (
        "quick",
        "slow to condense",
        "kept at temperature",
        "Chill it to",
        "S-07 will have",
        "The line keeps",
    ):
        assert words in page, words


# --- an open refill -----------------------------------------------------------------------------------


def weigh(client: Client, refill: Refill, **typed: str) -> Any:
    values = {"form_key": str(key()), "line": "off", "ended_by": ""} | typed
    return client.post(reverse("bottles:refill", args=[refill.pk]), values)


def test_a_second_weight_closes_it_and_the_receipt_says_so(client: Client, works: Works) -> None:
    refill = works.open()
    assert weigh(client, refill, gross="11.01 kg", ended_by="limit").status_code == 302
    refill.refresh_from_db()
    assert refill.ended_by == "limit" and holds(works.bottle) == 4_590
    sheet = words_of(client.get(reverse("bottles:receipt", args=[refill.pk])))
    for words in ("Empty weight 6.42 kg", "Full weight 11.01 kg", "Left at 11.01 kg", "10.1 ±0.1 lb", "S-07", "by filling density",
                  "front desk", "US-2026-01", "not a certificate", "· full"):  # fmt: skip
        assert words in sheet, words
    assert client.get(reverse("bottles:receipt", args=[refill.pk])).content.count(b"<h1") == 1


def test_a_weight_that_proves_a_full_fill_closes_it_and_a_short_one_does_not(works: Works, client: Any) -> None:
    refill = works.open()
    weigh(client, refill, gross="10.40 kg", ended_by="weighed")
    refill.refresh_from_db()
    assert refill.closed_at is None
    weigh(client, refill, gross="11.01 kg", line="on", ended_by="weighed")
    refill.refresh_from_db()
    assert refill.closed_at is None  # the line still pulls
    weigh(client, refill, gross="11.01 kg", wet="on", ended_by="weighed")
    refill.refresh_from_db()
    assert refill.closed_at is None  # ice may be part of it
    weigh(client, refill, gross="11.01 kg", ended_by="weighed")
    refill.refresh_from_db()
    assert refill.ended_by == "limit"


def test_a_wet_weight_isnt_called_full(client: Client, works: Works) -> None:
    refill = works.open()
    weigh(client, refill, gross="11.01 kg", wet="on", ended_by="limit")
    assert Refill.objects.get().closed_at is None
    weigh(client, refill, gross="11.01 kg", wet="on", ended_by="by hand")
    sheet = words_of(client.get(reverse("bottles:receipt", args=[refill.pk])))
    assert "weighed wet: a full fill isn't proven" in sheet and "· full" not in sheet


def test_the_line_is_off_before_it_closes(client: Client, works: Works) -> None:
    refill = works.open()
    answer = weigh(client, refill, gross="11.01 kg", line="on", ended_by="limit")
    assert answer.status_code == 422 and Weighing.objects.filter(refill=refill).count() == 0
    weigh(client, refill, gross="11.01 kg", line="on")
    answer = client.post(
        reverse("bottles:refill_close", args=[refill.pk]), {"form_key": str(key()), "version": 1, "ended_by": "limit"}
    )
    assert answer.status_code == 409


def test_an_overfull_bottle_is_a_timer_on_every_machine(
    client: Client, works: Works, technician: Any, client_of: Any
) -> None:
    refill = works.open()
    weigh(client, refill, gross="11.72 kg", ended_by="limit")
    elsewhere = client_of(technician)  # another person, another session
    page = words_of(elsewhere.get(reverse("bottles:refill", args=[refill.pk])))
    for words in (
        "Overfull by 1.5 lb",
        "full of liquid",
        "must come out",
        "Outdoors",
        "Upright, its dip (siphon) tube lets liquid out",
    ):
        assert words in page, words
    assert "Stop at" not in page
    assert "overfull" in words_of(elsewhere.get(reverse("bottles:refills")))
    weigh(elsewhere, refill, gross="11.02 kg", ended_by="limit")
    assert Refill.objects.get().ended_by == "limit" and balance("vented") == 700


def test_it_waits_and_goes_on(client: Client, works: Works, shop: Any) -> None:
    refill = works.open()
    address = reverse("bottles:refill_wait", args=[refill.pk])
    until = (clock.now() + timedelta(minutes=30)).astimezone(clock.zone(shop))
    typed = {"form_key": str(key()), "version": "1", "until": f"{until:%Y-%m-%dT%H:%M}", "note": "chill"}
    assert client.post(address, typed).status_code == 302
    assert f"chill until {until:%H:%M}" in words_of(client.get(reverse("bottles:refill", args=[refill.pk])))
    late = client.post(address, typed | {"form_key": str(key())})
    assert late.status_code == 409 and Refill.objects.get().version == 2  # someone else's wait isn't overwritten
    past = client.post(address, typed | {"form_key": str(key()), "version": "2", "until": "2020-01-01T10:00"})
    assert past.status_code == 409
    client.post(address, {"form_key": str(key()), "version": "2", "until": ""})
    assert Refill.objects.get().wait_until is None


def test_it_goes_on_from_another_supply_of_the_station(client: Client, works: Works) -> None:
    works.connected("S-09")
    refill = works.open()
    address = reverse("bottles:refill_supply", args=[refill.pk])
    page = client.get(address)
    offered = [supply.bottle.code for supply in page.context["form"].fields["supply"].queryset]
    assert offered == ["S-09"]
    shown = {name: page.context["form"][name].value() for name in page.context["form"].fields}
    typed = {name: value for name, value in shown.items() if value not in (None, False)} | {
        "form_key": str(key()),
        "gross": "8.42 kg",
    }
    looked = client.post(address, typed | {"forecast": "yes"})
    assert looked.status_code == 200 and "Goes over:" in words_of(looked)
    while_typing = client.post(address, typed | {"forecast": "yes"}, headers={"HX-Request": "true"})
    assert b"Goes over" in while_typing.content and b"<html" not in while_typing.content
    assert refill.draws.count() == 1  # nothing was saved by looking
    assert client.post(address, typed).status_code == 302
    assert [draw.source.code for draw in refill.draws.order_by("id")] == ["S-07", "S-09"]
    assert holds(works.bottle) == 2_000


def test_the_bottles_page_tells_forecast_against_what_came(client: Client, works: Works) -> None:
    refill = works.open()
    weigh(client, refill, gross="11.01 kg", ended_by="limit")
    page = words_of(client.get(works.bottle.get_absolute_url()))
    assert "came 9.5 ±0.1 lb" in page and "within what was forecast" in page


def test_a_closed_refill_takes_no_more(client: Client, works: Works) -> None:
    refill = works.open()
    weigh(client, refill, gross="11.01 kg", ended_by="limit")
    assert weigh(client, refill, gross="11.02 kg").status_code == 409
    assert client.get(reverse("bottles:refill", args=[refill.pk])).status_code == 200


def test_the_lists_ask_as_many_questions_for_many_refills_as_for_one(
    client: Client, works: Works, django_assert_max_num_queries: Any
) -> None:
    for number in range(2):
        works.open(works.bottle_to_fill(f"T-050{number}"))
    address = reverse("bottles:refills")
    client.get(address)
    with CaptureQueriesContext(connection) as few:
        client.get(address)
    works.open(works.bottle_to_fill("T-0509"))
    with django_assert_max_num_queries(len(few)):
        client.get(address)


def test_the_forecast_answers_at_once(client: Client, works: Works) -> None:
    live(client, works)  # loads the states of nitrous oxide, once a process
    started = time.perf_counter()
    live(client, works)
    assert time.perf_counter() - started < 2
