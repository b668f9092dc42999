"""The tare is a dated list of what is on: a new list starts a new tare, old weighings keep theirs."""

from __future__ import annotations

import uuid
from datetime import timedelta
from typing import Any

import pytest
from django.utils import timezone

from bottles.models import Tare, Weighing
from bottles.rules.tares import error_of, together
from bottles.services.refusals import Retired, Unconfirmed
from bottles.services.tares import start_tare
from shop.base.errors import Refusal
from tests.bottles.of_register import bottle, new_tare
from tests.factories import ActFactory, ScaleFactory

pytestmark = pytest.mark.django_db


def weigh(of: Any, typed_g: int, at: Any = None) -> Weighing:
    """What a scale said of it, judged by the tare in force."""
    from bottles.services.standing import restate

    tare = restate(of).tare
    row = Weighing.objects.create(
        act=ActFactory(), bottle=of, scale=ScaleFactory(), tare=tare, step="arrival", gross_g=typed_g, typed=f"{typed_g} g",
        net_g=typed_g - tare.total_g, error_g=28, happened_at=at or timezone.now(),
    )
    restate(of)
    return row


def start(of: Any, tare: Any, **more: Any) -> Tare:
    return start_tare(key=uuid.uuid4(), person=None, bottle=of, tare=tare, **more)


def form_data(**typed: Any) -> dict[str, Any]:
    return {"form_key": str(uuid.uuid4()), "tare_basis": "weighed"} | typed


def test_a_new_list_starts_a_new_tare_and_old_weighings_keep_theirs(shop: Any) -> None:
    one = bottle(tare="6420 g")
    weighing = weigh(one, 10_920)
    start(one, new_tare("weighed", bottle="6420 g", ring="90 g"))
    one.standing.refresh_from_db()
    assert one.standing.tare.total_g == 6510
    weighing.refresh_from_db()
    assert (weighing.tare.total_g, weighing.net_g) == (6420, 4500)
    assert Tare.objects.filter(bottle=one).count() == 2


def test_a_list_that_is_told_late_doesn_t_replace_a_younger_one(shop: Any) -> None:
    one = bottle(tare="6420 g")
    start(one, new_tare(bottle="6500 g"), since=timezone.now() - timedelta(days=30))
    one.standing.refresh_from_db()
    assert one.standing.tare.total_g == 6420


def test_the_form_begins_with_the_list_in_force(shop: Any, client_of: Any, technician: Any) -> None:
    one = bottle(tare=None)
    start(one, new_tare("weighed", bottle="13 lb", valve="1.2 lb"))
    form = client_of(technician).get("/b/T-0001/tare").context["form"]
    assert form["tare_bottle"].value() == "13 lb" and form["tare_valve"].value() == "1.2 lb"
    assert not form["tare"].value()


def test_a_tare_is_started_from_the_page_with_what_changed(shop: Any, client_of: Any, technician: Any) -> None:
    bottle()
    answer = client_of(technician).post(
        "/b/t-0001/tare", form_data(tare_bottle="14.2 lb", tare_ring="3 oz", reason="bracket ring fitted")
    )
    assert answer.status_code == 302 and answer.url == "/b/T-0001"
    page = client_of(technician).get("/b/T-0001").content.decode()
    assert "because: bracket ring fitted" in page and "typed “3 oz”" in page and "Earlier tares" in page


def test_a_tare_above_the_last_gross_is_asked_about(shop: Any) -> None:
    one = bottle(tare="6420 g")
    weigh(one, 6600, at=timezone.now() - timedelta(days=1))
    with pytest.raises(Unconfirmed) as asked:
        start(one, new_tare(bottle="6900 g"))
    assert [reason.code for reason in asked.value.reasons] == ["tare above gross"]
    assert start(one, new_tare(bottle="6900 g"), confirmed={"tare above gross"}).total_g == 6900


def test_a_tare_that_was_on_at_a_lighter_weighing_can_t_be(shop: Any) -> None:
    one = bottle(tare="6420 g")
    weigh(one, 6600)
    with pytest.raises(Refusal) as refused:
        start(one, new_tare(bottle="6900 g"), since=timezone.now() - timedelta(days=3), confirmed={"tare above gross"})
    assert refused.value.code == "tare above gross"
    assert Tare.objects.count() == 1


@pytest.mark.parametrize(
    ("typed", "field", "code"),
    [
        ({}, "tare", "required"),
        ({"tare": "14.2 lb", "tare_valve": "1 lb"}, "tare", "both"),
        ({"tare_valve": "heavy"}, "tare_valve", "not_a_number"),
        ({"tare": "1,234"}, "tare", "ambiguous_comma"),
        ({"tare": "1e9 kg"}, "tare", "exponent"),
        ({"tare": "-3 kg"}, "tare", "negative"),
        ({"tare": "9" * 3_000_000}, "tare", "too long"),
        ({"tare": "14.2 lb", "since": "2999-01-01T10:00"}, "since", "in the future"),
        ({"tare": "14.2 lb", "since": "last week"}, "since", "not a time"),
        ({"tare": "14.2 lb", "tare_error": "a bit"}, "tare_error", "not_a_number"),
    ],
)
def test_a_bad_tare_gets_a_sentence_and_comes_back(
    shop: Any, client_of: Any, technician: Any, typed: dict[str, str], field: str, code: str
) -> None:
    bottle(tare=None)
    answer = client_of(technician).post("/b/T-0001/tare", form_data(**typed))
    assert answer.status_code == 422
    form = answer.context["form"]
    assert form.has_error(field, code), form.errors.as_data()
    assert all(form[name].value() == value for name, value in typed.items())
    assert not Tare.objects.exists()


@pytest.mark.parametrize("typed", ["50 g", "500 kg"])
def test_a_tare_that_no_bottle_has_is_refused(shop: Any, client_of: Any, technician: Any, typed: str) -> None:
    bottle(tare=None)
    answer = client_of(technician).post("/b/T-0001/tare", form_data(tare=typed))
    assert answer.status_code == 409
    assert answer.context["form"].has_error("tare", "tare out of range")


def test_a_double_click_starts_one_tare(shop: Any, client_of: Any, technician: Any) -> None:
    bottle(tare=None)
    data = form_data(tare="14.2 lb")
    client = client_of(technician)
    assert client.post("/b/T-0001/tare", data).url == client.post("/b/T-0001/tare", data).url == "/b/T-0001"
    assert Tare.objects.count() == 1


def test_a_bottle_retired_meanwhile_takes_no_tare(shop: Any) -> None:
    from bottles.services.conditions import retire

    one = bottle()
    retire(key=uuid.uuid4(), person=None, bottle=one, reason="scrapped")
    with pytest.raises(Retired):
        start(one, new_tare(bottle="6500 g"))


# --- its ± ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("typed", "grams", "unit", "error"),
    [
        ("6.420 kg", 6420, "kg", 10),  # a gram written, but ten at least
        ("6.42 kg", 6420, "kg", 10),
        ("6.4 kg", 6400, "kg", 100),
        ("6 kg", 6000, "kg", 100),  # without decimals a tenth
        ("14.2 lb", 6441, "lb", 46),  # 0.1 lb = 45.36 g, up
        ("14-3", 6435, "lb oz", 29),  # 1 oz = 28.35 g, up
        ("14 lb 3.5 oz", 6449, "lb oz", 10),  # 0.1 oz = 2.8 g
        ("0 g", 0, "g", 0),
    ],
)
def test_a_figure_is_as_uncertain_as_it_was_written(typed: str, grams: int, unit: str, error: int) -> None:
    assert error_of(typed, grams, unit) == error


def test_a_scale_behind_a_figure_may_say_worse() -> None:
    assert error_of("6.42 kg", 6420, "kg", scale_g=50) == 50


def test_errors_of_a_list_add_as_squares_and_round_up() -> None:
    assert together([30, 40]) == 50
    assert together([10, 10]) == 15  # √200 = 14.14


def test_the_scale_that_it_was_weighed_on_counts_for_the_whole_list(shop: Any, client_of: Any, technician: Any) -> None:
    bottle(tare=None)
    scale = ScaleFactory(error_g=60)
    client_of(technician).post("/b/T-0001/tare", form_data(tare="6.42 kg", tare_scale=scale.pk))
    assert Tare.objects.get().error_g == 60


def test_a_typed_error_holds(shop: Any, client_of: Any, technician: Any) -> None:
    bottle(tare=None)
    client_of(technician).post("/b/T-0001/tare", form_data(tare="6.42 kg", tare_error="25 g"))
    assert Tare.objects.get().error_g == 25
