"""A station is set up once; a supply bottle hangs on one station at most."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from django.urls import reverse

from bottles.models import Refill, Station, Supply
from bottles.services import stations
from shop.base.errors import Refusal, Stale
from shop.physics.units import ambient_pressure
from tests import factories
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db(transaction=True)

FORM = {
    "code": "ST2", "name": "Station 2", "hose_length": "5 ft", "hose_bore": ".19 in", "hose_pull": "2 oz", "pulls": "up",
    "line_loss": "", "gauge_tolerance": "30 psi", "thermometer_tolerance": "2 °F", "active": "on",
}  # fmt: skip


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    return Works(shop, front_desk)


@pytest.fixture
def values() -> stations.StationValues:
    return stations.StationValues(
        code="ST2", name="Station 2", hose_length_um=1_500_000, hose_length_typed="1.5 m", hose_bore_um=4_800,
        hose_bore_typed="4.8 mm", scale=factories.ScaleFactory(),
    )  # fmt: skip


def refusal(call: Any, **arguments: Any) -> str:
    with pytest.raises(Refusal) as caught:
        call(key=key(), person=None, **arguments)
    return caught.value.code


def test_a_manager_sets_up_a_station_in_the_units_of_the_shop(shop: Any, manager: Any, client_of: Any) -> None:
    client = client_of(manager)
    scale = factories.ScaleFactory()
    answer = client.post(reverse("bottles:station_add"), {**FORM, "form_key": str(key()), "scale": scale.pk})
    assert answer.status_code == 302
    station = Station.objects.get()
    # 5 ft = 1.524 m, 0.19 in = 4.826 mm, 2 oz = 56.7 g, 30 psi = 206 843 Pa, 2 °F = 1.111 K (NIST SP 811, appendix B.8).
    assert (station.hose_length_um, station.hose_bore_um, station.hose_pull_g) == (1_524_000, 4_826, -57)
    assert (station.gauge_tolerance_pa, station.thermometer_tolerance_mk) == (206_843, 1_111)
    assert (station.hose_length_typed, station.line_loss_g) == ("5 ft", None)


def test_what_a_form_shows_and_what_it_saves_again_are_the_same(shop: Any, manager: Any, client_of: Any) -> None:
    client = client_of(manager)
    client.post(reverse("bottles:station_add"), {**FORM, "form_key": str(key())})
    before = Station.objects.values().get()
    page = client.get(reverse("bottles:station", args=[before["id"]]))
    shown = {name: value for name, value in page.context["form"].initial.items() if value not in (None, False)}
    answer = client.post(reverse("bottles:station", args=[before["id"]]), {**shown, "form_key": str(key())})
    assert answer.status_code == 302
    after = Station.objects.values().get()
    kept = {name for name in before if not name.endswith("_typed")} - {"version"}
    assert {name: after[name] for name in kept} == {name: before[name] for name in kept}


@pytest.mark.parametrize(
    ("field", "typed"),
    [("hose_length", "five feet"), ("hose_bore", ""), ("hose_bore", "3 m"), ("hose_length", "900 m"), ("gauge_tolerance", "1,234"),
     ("line_loss", "1e9 kg"), ("hose_pull", "-2 oz")],
)  # fmt: skip
def test_figures_that_no_station_has_get_a_sentence(shop: Any, manager: Any, client_of: Any, field: str, typed: str) -> None:
    answer = client_of(manager).post(reverse("bottles:station_add"), {**FORM, field: typed, "form_key": str(key())})
    assert answer.status_code in (409, 422)
    form = answer.context["form"]
    assert list(form.errors) == [field] and form[field].value() == typed
    assert Station.objects.count() == 0


def test_a_pump_shows_its_plate(values: stations.StationValues) -> None:
    assert refusal(stations.add_station, values=replace(values, pumped=True)) == "out of range"
    noted = replace(values, pumped=True, pump_note="for nitrous oxide, 120 bar, oil-free")
    assert stations.add_station(key=key(), person=None, values=noted).pumped


def test_one_scale_doesnt_carry_both_bottles(values: stations.StationValues) -> None:
    assert refusal(stations.add_station, values=replace(values, supply_scale=values.scale)) == "out of range"


def test_a_code_belongs_to_one_station(values: stations.StationValues) -> None:
    stations.add_station(key=key(), person=None, values=values)
    assert refusal(stations.add_station, values=values) == "code taken"


def test_two_managers_changes_dont_overwrite_each_other(values: stations.StationValues) -> None:
    station = stations.add_station(key=key(), person=None, values=values)
    stations.change_station(key=key(), person=None, station=station, version=1, values=replace(values, name="by the door"))
    with pytest.raises(Stale):
        stations.change_station(key=key(), person=None, station=station, version=1, values=replace(values, name="at the back"))
    assert Station.objects.get().name == "by the door"


def test_a_supply_bottle_hangs_on_one_station_at_most(works: Works) -> None:
    other = works.make_station(code="ST2", name="Station 2")
    assert refusal(stations.connect, station=other, bottle=works.supply.bottle) == "on a station"
    stations.disconnect(key=key(), person=None, supply=works.supply)
    stations.connect(key=key(), person=None, station=other, bottle=works.supply.bottle)
    assert Supply.objects.get().station == other


def test_connecting_says_where_it_stands_and_taking_off_where_it_goes(works: Works) -> None:
    place = factories.PlaceFactory(kind="station", name="filling bench")
    shelf = factories.PlaceFactory(name="back shelf")
    station = works.make_station(code="ST2", name="Station 2", place=place)
    stations.disconnect(key=key(), person=None, supply=works.supply, place=shelf)
    bottle = works.supply.bottle
    assert bottle.custodies.latest("id").place == shelf
    stations.connect(key=key(), person=None, station=station, bottle=bottle)
    assert bottle.custodies.latest("id").place == place


def test_what_isnt_in_the_shop_or_is_being_filled_isnt_connected(works: Works) -> None:
    away = factories.owned(factories.BottleFactory(use="supply"))
    assert refusal(stations.connect, station=works.station, bottle=away) == "not in"
    works.open()
    assert refusal(stations.connect, station=works.station, bottle=works.bottle) == "open refill"
    works.station.active = False
    works.station.save()
    assert refusal(stations.connect, station=works.station, bottle=works.bottle_to_fill("T-0413")) == "station out of use"


def test_a_supply_that_is_drawn_on_stays_until_the_refill_is_closed(works: Works) -> None:
    works.open()
    assert refusal(stations.disconnect, supply=works.supply) == "open refill"
    Refill.objects.update(closed_at="2026-12-01T12:00Z", ended_by="abandoned")
    stations.disconnect(key=key(), person=None, supply=works.supply)
    assert refusal(stations.disconnect, supply=works.supply) == "taken off"


def test_a_station_in_use_isnt_put_out_of_use(works: Works, values: stations.StationValues) -> None:
    quiet = replace(values, active=False)
    assert refusal(stations.change_station, station=works.station, version=1, values=quiet) == "supplies connected"
    Supply.objects.all().delete()
    stations.change_station(key=key(), person=None, station=works.station, version=1, values=quiet)
    assert not Station.objects.get().active


def test_the_desk_connects_what_the_list_offers(works: Works, front_desk: Any, client_of: Any) -> None:
    spare = works.connected("S-20")
    spare.delete()
    client = client_of(front_desk)
    assert client.post(reverse("bottles:station", args=[works.station.pk]), {}).status_code == 403
    address = reverse("bottles:connect", args=[works.station.pk])
    offered = client.get(address).context["form"].fields["bottle"].queryset
    assert [bottle.code for bottle in offered] == ["S-20"]
    once = str(key())
    for _ in range(2):
        answer = client.post(address, {"form_key": once, "bottle": offered[0].pk})
        assert answer.status_code == 302
    assert Supply.objects.count() == 2
    supply = Supply.objects.get(bottle__code="S-20")
    assert b"S-20" in client.get(reverse("bottles:stations")).content
    assert client.post(reverse("bottles:disconnect", args=[supply.pk]), {"form_key": str(key())}).status_code == 302
    assert client.post(reverse("bottles:disconnect", args=[supply.pk]), {"form_key": str(key())}).status_code == 409


PLATE = {"pumped": "on", "pump_note": "oil-free, made for nitrous oxide", "pump_most": "1500 psi", "pump_least": "150 psi"}


def test_a_pumps_plate_is_read_as_gauge_at_the_shops_height_and_kept_as_typed(shop: Any, manager: Any, client_of: Any) -> None:
    client = client_of(manager)
    answer = client.post(reverse("bottles:station_add"), {**FORM, **PLATE, "pump_most": "101 bara", "form_key": str(key())})
    assert answer.status_code == 302
    station = Station.objects.get()
    # 150 psi × 6894.757 Pa = 1 034 214 Pa over the air at 180 m (NIST SP 811, appendix B.8); bara is absolute already.
    ambient = round(ambient_pressure(float(shop.height_m)))
    assert station.pump_least_pa == pytest.approx(1_034_214 + ambient, abs=1)
    assert (station.pump_most_pa, station.pump_most_typed, station.pump_least_typed) == (10_100_000, "101 bara", "150 psi")
    page = client.get(reverse("bottles:stations")).content.decode()
    assert "entered as “101 bara”" in page
    assert "150 psi gauge, entered as “150 psi”" in page


def test_what_the_form_shows_of_a_pump_saves_the_same_again(shop: Any, manager: Any, client_of: Any) -> None:
    client = client_of(manager)
    client.post(reverse("bottles:station_add"), {**FORM, **PLATE, "pump_least": "10.5", "form_key": str(key())})
    before = Station.objects.values().get()
    for units in ("us", "metric"):
        type(manager).objects.filter(pk=manager.pk).update(units=units)
        shown = client.get(reverse("bottles:station", args=[before["id"]])).context["form"]
        held = {name: shown[name].value() for name in shown.fields if shown[name].value() not in (None, False, "")}
        held["version"] = Station.objects.get().version
        assert client.post(reverse("bottles:station", args=[before["id"]]), held | {"form_key": str(key())}).status_code == 302
        after = Station.objects.values().get()
        assert (after["pump_most_pa"], after["pump_least_pa"]) == (before["pump_most_pa"], before["pump_least_pa"])


@pytest.mark.parametrize(
    ("changes", "field"),
    [
        ({"pumped": ""}, "pumped"), ({"pump_most": "20 psi"}, "pump_most"), ({"pump_most": "30000 psi"}, "pump_most"),
        ({"pump_least": "1100 psi"}, "pump_least"), ({"pump_most": "200 psi", "pump_least": "300 psi"}, "pump_least"),
        ({"pump_least": "cold"}, "pump_least"),
    ],
)  # fmt: skip
def test_a_plate_that_no_pump_has_is_refused(
    shop: Any, manager: Any, client_of: Any, changes: dict[str, str], field: str
) -> None:
    typed = {**FORM, **PLATE, **changes, "form_key": str(key())}
    answer = client_of(manager).post(reverse("bottles:station_add"), typed)
    assert answer.status_code in (409, 422)
    assert field in answer.context["form"].errors
    assert not Station.objects.exists()
