"""What an edit form shows and what it saves again are the same grams, whoever opens it.

A bare number was meant in the units of whoever typed it; someone who reads the other units opens
the form, changes nothing and saves.
"""

from __future__ import annotations

import uuid
from typing import Any

import pytest
from django.test import Client
from hypothesis import given
from hypothesis import strategies as st

from bottles.models import Bottle, Scale, Station, Tare
from shop.base.fields import mass_shown_back
from shop.base.models import Place
from shop.physics.units import parse_mass
from tests.bottles.of_register import form_data
from tests.factories import StationFactory

pytestmark = pytest.mark.django_db

FIGURES = {
    Bottle: ("capacity_ml", "charge_g", "permit_charge_g", "own_limit_g"),
    Scale: ("resolution_g", "error_g", "capacity_g"),
    Station: (
        "hose_length_um", "hose_bore_um", "hose_pull_g", "line_loss_g", "gauge_tolerance_pa", "thermometer_tolerance_mk"
    ),
    Place: ("limit_g",),
}  # fmt: skip


@pytest.fixture
def readers(make_user: Any, client_of: Any) -> dict[str, Client]:
    """A manager who reads pounds and one who reads kilograms."""
    found = {}
    for units in ("us", "metric"):
        person = make_user("manager", name=f"reads {units}")
        person.units = units
        person.save()
        found[units] = client_of(person)
    return found


def key() -> str:
    return str(uuid.uuid4())


def drawn(client: Client, address: str) -> dict[str, Any]:
    """What a browser would post of a page as it's drawn."""
    form = client.get(address).context["form"]
    held = {name: form[name].value() for name in form.fields if form[name].value() not in (None, "", False)}
    return {name: "on" if value is True else value for name, value in held.items()} | {"form_key": key()}


def figures(model: Any) -> dict[str, Any]:
    return model.objects.order_by("-id").values(*FIGURES[model])[0]


BOTH_WAYS = pytest.mark.parametrize(("typist", "opener"), [("us", "metric"), ("metric", "us"), ("us", "us")])


@BOTH_WAYS
@pytest.mark.parametrize("size", ["10", "10.0 lb", "9-15", "4.536 kg", "160 oz"])
def test_a_bottles_figures_stay_whoever_saves_them_again(
    readers: dict[str, Client], typist: str, opener: str, size: str
) -> None:
    told = {"permit": "SU 999", "permit_charge": "9.5 lb", "own_limit": "9.25 lb", "capacity": "6.8" if size != "10" else ""}
    if size == "10" and typist == "metric":
        told |= {"size": "4.5", "permit_charge": "4.3", "own_limit": "4.2"}
    typed = form_data(size=size, tare="6420 g") | told
    answer = readers[typist].post("/bottles/register", typed)
    assert answer.status_code == 302, answer.context["form"].errors
    address = f"/b/{Bottle.objects.get().code}/edit"
    readers[typist].post(address, drawn(readers[typist], address) | told)
    before = figures(Bottle)
    assert None not in before.values()
    answer = readers[opener].post(address, drawn(readers[opener], address))
    assert answer.status_code == 302, answer.context["form"].errors
    assert figures(Bottle) == before


@BOTH_WAYS
@pytest.mark.parametrize("tare", [{"tare": "14.2"}, {"tare_bottle": "13", "tare_valve": "1.2", "tare_ring": "3 oz"}])
def test_a_tare_begun_from_the_one_in_force_weighs_the_same(
    readers: dict[str, Client], typist: str, opener: str, tare: dict[str, str]
) -> None:
    readers[typist].post("/bottles/register", form_data(tare=""))
    address = f"/b/{Bottle.objects.get().code}/tare"
    assert readers[typist].post(address, {"form_key": key(), "tare_basis": "weighed"} | tare).status_code == 302
    assert readers[opener].post(address, drawn(readers[opener], address)).status_code == 302
    first, again = Tare.objects.order_by("id")
    assert again.total_g == first.total_g
    assert [part.grams for part in again.parts.order_by("thing")] == [part.grams for part in first.parts.order_by("thing")]


@BOTH_WAYS
@pytest.mark.parametrize("style", ["kg", "lb", "lb oz", "g"])
def test_a_scales_figures_are_read_in_its_own_unit(
    readers: dict[str, Client], typist: str, opener: str, style: str
) -> None:
    bare = {"resolution": "20", "error": "40", "capacity": "60000"} if style == "g" else {
        "resolution": "0.02", "error": "0.05", "capacity": "130",
    }  # fmt: skip
    typed = {"form_key": key(), "code": "B", "name": "bench", "style": style, "active": "on"} | bare
    assert readers[typist].post("/scales/add", typed).status_code == 302
    before, address = figures(Scale), f"/scales/{Scale.objects.get().pk}/change"
    assert readers[opener].post(address, drawn(readers[opener], address)).status_code == 302
    assert figures(Scale) == before


def test_a_scale_that_writes_otherwise_from_now_on_keeps_its_figures(readers: dict[str, Client]) -> None:
    typed = {
        "form_key": key(), "code": "B", "name": "bench", "style": "lb", "active": "on", "resolution": "0.02", "error": "0.05",
        "capacity": "130",
    }  # fmt: skip
    readers["us"].post("/scales/add", typed)
    before, address = figures(Scale), f"/scales/{Scale.objects.get().pk}/change"
    changed = drawn(readers["us"], address) | {"style": "kg"}
    assert readers["us"].post(address, changed).status_code == 302
    assert figures(Scale) == before


@BOTH_WAYS
def test_a_stations_figures_stay_whoever_saves_them_again(readers: dict[str, Client], typist: str, opener: str) -> None:
    bare = {
        "us": {"hose_length": "5", "hose_bore": ".19", "hose_pull": "0.1", "line_loss": "0.03", "gauge_tolerance": "30",
               "thermometer_tolerance": "2"},
        "metric": {"hose_length": "1.5", "hose_bore": "4.8", "hose_pull": "0.05", "line_loss": "0.02", "gauge_tolerance": "2",
                   "thermometer_tolerance": "1"},
    }[typist]  # fmt: skip
    station = StationFactory()
    address = f"/stations/{station.pk}"
    page = drawn(readers[typist], address) | bare | {"pulls": "up"}
    assert readers[typist].post(address, page).status_code == 302
    before = figures(Station)
    assert None not in before.values()
    assert readers[opener].post(address, drawn(readers[opener], address)).status_code == 302
    assert figures(Station) == before


@given(
    number=st.decimals(min_value="0.01", max_value="99", places=2),
    unit=st.sampled_from(["", " lb", " kg", " oz", " g"]),
    typist=st.sampled_from(["lb", "kg", "lb oz", "g"]),
    opener=st.sampled_from(["lb", "kg", ""]),
)
def test_any_weight_shown_back_means_the_same_grams(number: Any, unit: str, typist: str, opener: str) -> None:
    typed = parse_mass(f"{number}{unit}", default_unit=typist)
    shown = mass_shown_back(typed.stored, typed.typed, meant=opener)
    for style in [opener] if opener else ["lb", "kg", "lb oz", "g"]:
        assert parse_mass(shown, default_unit=style).stored == typed.stored
    if unit:
        assert shown == typed.typed


def test_a_text_that_no_longer_fits_its_grams_gives_way_to_them() -> None:
    assert mass_shown_back(4536, "ten pounds", meant="lb") == "4536 g"
    assert mass_shown_back(4536, "", meant="lb") == "4536 g"
    assert mass_shown_back(None, "", meant="lb") == ""
