"""What stands behind a forecast on its page: its width, what would help, the course, starts, the fills left."""

from __future__ import annotations

import html
import re
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from bottles.models import Fit, Forecast, Refill, Tare
from shop.base import clock
from shop.base.models import Act
from tests import factories
from tests.bottles.of_refill import TARE_G, Works, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    front_desk.units = "metric"
    front_desk.save()
    return Works(shop, front_desk)


@pytest.fixture
def client(works: Works, front_desk: Any, client_of: Any) -> Client:
    return client_of(front_desk)


def typed(works: Works, **changes: str) -> dict[str, str]:
    """A warm bottle that won't be full by pressure alone."""
    read = {
        "form_key": str(key()), "supply": str(works.supply.pk), "bottle_weight": f"{TARE_G + 300} g", "gauge": "49.5 bar",
        "supply_temperature": "20 °C", "taken": "wall", "bottle_temperature": "15 °C", "bottle_taken": "wall",
        "start": "weighed", "method": "pressure", "look_all": "on",
    }  # fmt: skip
    return read | changes


def live(client: Client, works: Works, **changes: str) -> str:
    return said(client.post(reverse("bottles:forecast_live", args=["T-0412"]), typed(works, **changes)))


def details(client: Client, works: Works, **changes: str) -> str:
    return said(client.post(reverse("bottles:course_live", args=["T-0412"]), typed(works, **changes)))


def said(answer: Any) -> str:
    assert answer.status_code == 200
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]+>", " ", answer.content.decode())))


# --- width --------------------------------------------------------------------------------------------


def test_the_span_is_taken_apart_and_the_one_measurement_is_named(client: Client, works: Works) -> None:
    page = live(client, works)
    assert "What makes the span this wide" in page
    assert re.search(r"how much vapour condenses figure 0\.50 ±0\.50, common practice ±\d+ g", page)
    assert re.search(r"the temperature of the bottle to fill ±1 °C, on its wall ±\d+ g", page)
    assert "Only more refills of this shop, each weighed to its end, narrow it much" in page


def test_a_temperature_taken_in_the_air_is_worth_taking_again(client: Client, works: Works) -> None:
    page = live(client, works, taken="air", bottle_taken="air", bottle_temperature="-4 °C", gauge="")
    assert "take the temperature of the bottle to fill on its wall, not in the air" in page.lower()
    assert "±4 °C, in the air beside it" in page


def test_a_supply_known_by_its_gauge_alone_is_worth_weighing(client: Client, works: Works) -> None:
    works.supply = works.connected("S-09", net_g=None)
    page = live(client, works)
    assert re.search(r"Weigh the supply bottle: it would narrow the span by about [\d.]+ k?g\.", page)
    assert "the supply bottle's weight" in page and "between what its readings allow" in page
    assert "What would help, and what S-09 will have left, can't be said before it's weighed." in page
    assert re.search(r"So it may hold [\d.]+ kg – [\d.]+ kg", page) and "Would help" not in page
    assert "Weigh the supply bottle" not in details(client, works) and "weigh it, then its course" in details(client, works)


def test_a_finer_scale_is_asked_for_only_where_it_narrows(client: Client, works: Works) -> None:
    # How vapour condenses is well known here: the weight of the bottle to fill is what is unsure.
    Fit.objects.create(
        act=factories.ActFactory(), way="", figure_milli=500, deviation_milli=1, informative=40, bounds=0, physics_version="1"
    )
    works.scale.error_g = 600
    works.scale.save()
    page = live(client, works)
    assert re.search(r"the weight of the bottle to fill ±0\.60 kg, weighed now", page)
    assert re.search(r"Weigh the bottle to fill on a finer scale: it would narrow the span by about [\d.]+ k?g\.", page)
    # As unsure by its tare alone, no scale would help.
    works.scale.error_g = 5
    works.scale.save()
    Tare.objects.create(
        act=factories.ActFactory(), bottle=works.bottle, since=clock.now(), total_g=TARE_G, error_g=600, basis="stamped"
    )
    page = live(client, works)
    assert re.search(r"the weight of the bottle to fill ±0\.60 kg, weighed now", page) and "finer scale" not in page


def test_a_fill_that_is_full_in_every_case_has_no_width_and_needs_no_help(client: Client, works: Works) -> None:
    page = live(client, works, bottle_temperature="-30 °C")
    assert "The limit is reached, by the lowest figure too" in page
    assert "What makes the span" not in page and "Would help" not in page and "narrow" not in page
    assert "Lowest" not in page and "Highest" not in page  # one figure, said once


def test_where_nothing_goes_over_it_says_so_in_a_word(client: Client, works: Works) -> None:
    page = live(client, works, bottle_temperature="45 °C", bottle_weight=f"{TARE_G + 1_500} g")
    assert "Goes over: nothing" in page and "likely 0" not in page


def test_a_danger_sign_is_named_once(client: Client, works: Works) -> None:
    page = live(client, works, gauge="90 bar")
    assert page.count("Danger sign") == 1 and "Nothing is filled from it until this is settled" in page


# --- what would help ------------------------------------------------------------------------------------


def test_a_short_fill_says_what_would_help_with_its_cautions(client: Client, works: Works) -> None:
    page = live(client, works)
    assert "A short fill" in page and "Would help" in page
    assert re.search(r"Chill it to −?\d+ °C: full if vapour condenses quickly; to −?\d+ °C: full, likely", page)
    assert re.search(r"Let vapour out while it fills: \d+ g, full", page) and "never breathe it" in page
    assert "by a listed device, where local code permits it" in page and "Never above 52 °C on any part" in page
    assert "Dry it before the weighing" in page


def test_the_shops_own_freezer_says_how_cold_and_how_long(client: Client, works: Works) -> None:
    assert "No freezer or bath of the shop says how cold it gets" in live(client, works)
    factories.PlaceFactory(code="COLD", name="the chest freezer", kind="freezer", coldest_mk=248_150)
    page = live(client, works)
    assert re.search(r"in the chest freezer: [\d.]+( h)? to [\d.]+ (min|h)", page)
    assert "the heat passed is common practice" in page and "No freezer or bath of the shop" not in page


def test_a_freezer_that_is_not_cold_enough_is_told_as_that(client: Client, works: Works) -> None:
    factories.PlaceFactory(code="COOL", name="the drinks cooler", kind="freezer", coldest_mk=280_150)
    page = live(client, works)
    assert "Chill it to 7 °C, as cold as it gets here" in page and "more goes over, still a short fill" in page
    assert "in the drinks cooler:" not in page  # no time to a temperature that it doesn't reach
    assert "For a full fill it must be at" in page


def test_a_cold_that_the_bottle_has_already_is_not_asked_for(client: Client, works: Works) -> None:
    factories.PlaceFactory(code="COOL", name="the drinks cooler", kind="freezer", coldest_mk=280_150)
    page = live(client, works, bottle_temperature="0 °C")  # full if it's quick, and colder than any place here
    assert "The limit is reached at best" in page and "For a full fill it must be at" not in page


def test_more_for_the_cautious_case_alone_is_told_as_that(client: Client, works: Works) -> None:
    page = live(client, works, bottle_temperature="-4 °C")
    assert "The limit is likely reached" in page
    assert re.search(r"as cold as it gets here: .+ more goes over, still a short fill if vapour is slow to condense\.", page)


def test_venting_first_and_purging_belong_to_their_starts(client: Client, works: Works) -> None:
    assert "Vent it to the room before filling" in live(client, works, start="own vapour", bottle_weight=f"{TARE_G + 700} g")
    assert "Purge the air out of it first" in live(client, works, start="air", bottle_weight=f"{TARE_G} g")


def test_an_empty_bottle_on_the_scale_may_be_vented_first_as_the_starts_say(client: Client, works: Works) -> None:
    empty = f"{TARE_G + 700} g"
    page = live(client, works, bottle_weight=empty)
    more = re.search(r"Vent it to the room before filling: ([\d.]+ k?g) more in it at the end, likely still a short fill; "
                     r"([\d.]+ k?g) of nitrous is lost", page)  # fmt: skip
    assert more is not None
    rows = {row[0]: row[1:] for row in client.post(
        reverse("bottles:course_live", args=["T-0412"]), typed(works, bottle_weight=empty)
    ).context["details"]["starts"]}  # fmt: skip
    assert rows["Vented to the room"][-1] == f"{more[1]} more"
    assert "Vent it to the room" not in live(client, works, bottle_weight=f"{TARE_G + 1_500} g")


# --- the course, other starts, the fills left -----------------------------------------------------------


def test_the_details_show_the_course_as_curves_with_the_same_numbers(client: Client, works: Works) -> None:
    answer = client.post(reverse("bottles:course_live", args=["T-0412"]), typed(works))
    page, raw = said(answer), answer.content.decode()
    assert raw.count("<svg") == 2 and raw.count("<table") >= 3 and "<html" not in raw
    assert re.search(r"Nine tenths of what goes over is there after (about \d+ min|less than a minute)", page)
    assert "Gauge (bar)" in page and "In the bottle (kg)" in page and "common practice, no source" in page


def test_the_curve_ends_at_the_likely_figure(client: Client, works: Works) -> None:
    forecast = works.forecast(bottle_temperature=works.readings().supply_temperature)
    answer = client.post(reverse("bottles:course_live", args=["T-0412"]), typed(works, bottle_temperature="20 °C"))
    rows = answer.context["details"]["course"]["charts"][1]["rows"]
    assert float(rows[0][1]) == pytest.approx(forecast.start_g / 1000, abs=0.006)
    assert forecast.likely_g is not None
    assert float(rows[-1][1]) == pytest.approx((forecast.start_g + forecast.likely_g) / 1000, abs=0.011)
    assert [float(row[0]) for row in rows] == sorted(float(row[0]) for row in rows)


def test_each_start_is_shown_with_what_it_costs(client: Client, works: Works) -> None:
    answer = client.post(
        reverse("bottles:course_live", args=["T-0412"]), typed(works, start="vented", bottle_weight=f"{TARE_G + 10} g")
    )
    rows = {row[0]: row[1:] for row in answer.context["details"]["starts"]}
    assert list(rows) == ["Vented to the room", "Still full of its own vapour, no liquid", "Open before, air not purged"]
    assert rows["Vented to the room"][-1] == "as it is"
    assert rows["Open before, air not purged"][-1].endswith(" less")


def test_the_fills_left_are_counted_with_warming_up_and_without(client: Client, works: Works) -> None:
    answer = client.post(reverse("bottles:course_live", args=["T-0412"]), typed(works, bottle_temperature="-30 °C"))
    warmed, straight = answer.context["details"]["fills"]
    assert int(warmed[1]) >= int(straight[1]) >= 1 and int(warmed[2]) >= int(warmed[1])
    assert "doesn't reach isn't written down" in said(answer)
    works.supply.bottle.below_tube_ml = 500
    works.supply.bottle.save()
    page = details(client, works, bottle_temperature="-30 °C")
    left = r"Of what it leaves behind \(heel\) 39\d g is liquid below the end of the dip \(siphon\) tube: it comes as vapour alone"
    assert re.search(left, page)


def test_a_supply_that_gives_no_full_fill_says_what_it_gives(client: Client, works: Works) -> None:
    page = details(client, works)
    assert "doesn't give one full fill" in page and "would likely get" in page


@pytest.mark.parametrize(
    ("changes", "sentence"),
    [({"bottle_temperature": ""}, "It waits for: the temperature of the bottle to fill."),
     ({"supply_temperature": "6x8"}, "Its temperature:"),
     ({"bottle_weight": "12 kg"}, "Nothing goes over, so there is no course."),
     ({"gauge": "62 bar"}, "Nothing goes over, so there is no course.")],
    ids=["too little", "wrong", "full", "danger"],
)  # fmt: skip
def test_without_a_forecast_the_details_say_why(
    client: Client, works: Works, changes: dict[str, str], sentence: str
) -> None:
    acts = Act.objects.count()
    page = details(client, works, **changes)
    assert sentence in page and "Show the course" in page and "Nine tenths" not in page
    assert Act.objects.count() == acts


def test_without_javascript_a_button_shows_the_course_on_the_whole_page(client: Client, works: Works) -> None:
    acts = Act.objects.count()
    address = reverse("bottles:fill", args=["T-0412"])
    assert "Show the course" in said(client.get(address)) and "Nine tenths" not in said(client.get(address))
    answer = client.post(address, typed(works, course="yes"))
    page = said(answer)
    assert "Goes over:" in page and "Nine tenths" in page and answer.context["form"]["gauge"].value() == "49.5 bar"
    assert "<html" in answer.content.decode() and Act.objects.count() == acts


# --- a pump, another supply bottle ------------------------------------------------------------------------


def pumping(works: Works) -> None:
    works.station.pumped, works.station.pump_note = True, "120 bar"
    works.station.pump_most_pa, works.station.pump_least_pa = 12_000_000, 1_500_000
    works.station.save()


def test_a_pumped_refill_is_forecast_by_its_own_stops_and_kept(client: Client, works: Works) -> None:
    pumping(works)
    page = live(client, works, method="pumped")
    assert "pumped quickly" in page and "pumped, kept at temperature" in page and "slow to condense" not in page
    assert "The limit is reached, by the lowest figure too" in page and "Would help" not in page
    assert "highest delivery pressure 119.0 bar" in page and "Never run the pump dry" in page and "oil" in page
    assert "A pump sets its own pace" in details(client, works, method="pumped")
    assert client.post(reverse("bottles:fill", args=["T-0412"]), typed(works, method="pumped")).status_code == 302
    kept = Forecast.objects.get()
    assert kept.result["pumped"]["quick"]["stopped_by"] == "fill limit"
    assert kept.low_g == kept.result["target_g"] - kept.result["start_g"] == kept.high_g


def test_where_a_station_has_a_pump_pumped_is_offered_and_the_choice_stands(client: Client, works: Works) -> None:
    address = reverse("bottles:fill", args=["T-0412"])
    assert client.get(address).context["form"]["method"].value() == "pressure"
    pumping(works)
    assert client.get(address).context["form"]["method"].value() == "pumped"
    assert client.post(address, typed(works, forecast="yes")).context["form"]["method"].value() == "pressure"
    assert "pumped quickly" not in live(client, works) and client.post(address, typed(works)).status_code == 302
    assert Refill.objects.get().method == "pressure"


def test_a_pump_ends_with_the_supplys_liquid_between_what_its_weight_leaves_open(client: Client, works: Works) -> None:
    pumping(works)
    works.supply = works.connected("S-09", net_g=5_000)
    assert "the supply's liquid runs out: stop the pump before it draws vapour" in live(client, works, method="pumped")
    client.post(reverse("bottles:fill", args=["T-0412"]), typed(works, method="pumped"))
    kept = Forecast.objects.get()
    assert kept.likely_g is not None and kept.low_g < kept.likely_g < kept.high_g


def test_a_forecast_by_pressure_has_nothing_of_a_pump(client: Client, works: Works) -> None:
    client.post(reverse("bottles:fill", args=["T-0412"]), typed(works))
    assert Forecast.objects.get().result["pumped"] is None


def test_going_on_the_hoses_pull_is_no_nitrous_and_stays_in_the_stop_figure(client: Client, works: Works) -> None:
    works.station.hose_pull_g = 120
    works.station.save()
    works.supply = works.connected("S-09")
    refill = works.open(supply=works.supply.station.supplies.get(bottle__code="S-07"))
    address = reverse("bottles:refill_supply", args=[refill.pk])
    read = typed(works, gross=f"{TARE_G + 2_120} g", version="1", forecast="yes")
    on = client.post(address, read | {"line": "on"})
    assert on.context["forecast"]["inputs"][3]["value"] == "2.00 kg"
    assert "+ 0.120 kg pull of the hose" in on.context["forecast"]["stop"]["sum"]
    off = client.post(address, read | {"line": "off"})
    assert off.context["forecast"]["inputs"][3]["value"] == "2.12 kg"
    assert "Nine tenths" in said(client.post(address, read | {"course": "yes"}, headers={"HX-Request": "true"}))


def test_going_on_keeps_to_the_target_that_the_refill_was_opened_with(client: Client, works: Works) -> None:
    works.connected("S-09")
    client.post(reverse("bottles:fill", args=["T-0412"]), typed(works, target="3 kg"))
    refill = Refill.objects.get()
    works.supply = works.station.supplies.get(bottle__code="S-09")
    read = typed(works, gross=f"{TARE_G + 2_000} g", version="1", forecast="yes", line="off")
    answer = client.post(reverse("bottles:refill_supply", args=[refill.pk]), read)
    assert answer.context["forecast"]["inputs"][4] == {"name": "Target", "value": "3.00 kg"}


def test_going_on_there_is_no_start_to_choose_any_more(client: Client, works: Works) -> None:
    works.connected("S-09")
    client.post(reverse("bottles:fill", args=["T-0412"]), typed(works))
    refill = Refill.objects.get()
    works.supply = works.station.supplies.get(bottle__code="S-09")
    read = typed(works, gross=f"{TARE_G + 2_000} g", version="1", course="yes", line="off")
    answer = client.post(reverse("bottles:refill_supply", args=[refill.pk]), read)
    found = answer.context["details"]
    assert found["course"] and found["starts"] == [] and "How the bottle starts" not in said(answer)
