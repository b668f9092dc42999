"""Bad input on every page that saves: a sentence beside its field, what was typed kept, nothing half-written.

The pages are those of the permission table, so that a new one is tried too.
"""

from __future__ import annotations

import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django import forms
from django.test import Client
from django.urls import reverse

from bottles.models import Bottle
from shop.base import clock
from shop.base.fields import InstantField, PressureField, QuantityField, TemperatureField
from shop.base.models import Act
from shop.people import kept
from tests.conftest import PASSWORD
from tests.permissions_table import TABLE, Page, World
from tests.test_permissions import address_of, saves

pytestmark = pytest.mark.django_db

FORMS = [page for page in TABLE if saves(page) and page.get == 200]
PASTE = "9" * 3_000_000
BELOW_ZERO = (TemperatureField, PressureField)
BAD = [
    ("twelve", {"not_a_number", "unknown_unit"}),
    ("1,234", {"ambiguous_comma"}),
    ("1e9 {unit}", {"exponent"}),
    ("-3 {unit}", {"negative"}),
    ("12 furlongs", {"unknown_unit"}),
    ("12 volts", {"unknown_unit"}),
    ("9" * 300, {"too_long", "too long"}),
    (PASTE, {"too_long", "too long"}),
]


@pytest.fixture
def world(shop: Any) -> World:
    return World()


@pytest.fixture
def someone(make_user: Callable[..., Any]) -> Any:
    return make_user("front_desk", "technician", "manager", name="Mara K.")


@pytest.fixture
def client(someone: Any, client_of: Callable[..., Client]) -> Client:
    return client_of(someone)


def drawn(client: Client, address: str) -> tuple[Any, dict[str, Any]]:
    """A page's form, and what a browser would post of it untouched."""
    form = client.get(address).context["form"]
    held = {name: form[name].value() for name in form.fields if form[name].value() not in (None, "", False)}
    return form, {name: "on" if value is True else value for name, value in held.items()} | {"form_key": str(uuid.uuid4())}


def fields_of(form: Any, kind: type[forms.Field]) -> list[str]:
    return [name for name, field in form.fields.items() if isinstance(field, kind)]


def refused(client: Client, address: str, typed: dict[str, Any], name: str, codes: set[str]) -> None:
    before = Act.objects.count()
    answer = client.post(address, typed)
    assert answer.status_code in (409, 422), (name, typed[name][:20])
    form = answer.context["form"]
    found = {error.code for error in form.errors.as_data().get(name, [])}
    assert found & codes, (name, typed[name][:20], form.errors.as_data())
    assert form[name].value() == typed[name]
    assert all(sentence.endswith((".", "?")) for sentence in form.errors[name]), form.errors[name]
    assert Act.objects.count() == before
    assert answer.content.count(b'id="errors"') == 1


@pytest.mark.parametrize("page", FORMS, ids=lambda page: page.name)
def test_no_field_of_a_quantity_takes_what_isnt_one(page: Page, world: World, client: Client) -> None:
    address = address_of(page, world)
    form, untouched = drawn(client, address)
    for name in fields_of(form, QuantityField):
        for bad, codes in BAD:
            if bad.startswith("-") and (isinstance(form.fields[name], BELOW_ZERO) or name in ("height", "thermometer_tolerance")):
                continue  # a temperature, a gauge and a shop may stand below zero; too far below is refused elsewhere
            refused(client, address, untouched | {name: bad.format(unit=form.fields[name].default_unit)}, name, codes)


@pytest.mark.parametrize("page", FORMS, ids=lambda page: page.name)
def test_no_field_of_a_time_takes_what_isnt_one(page: Page, world: World, client: Client) -> None:
    address = address_of(page, world)
    form, untouched = drawn(client, address)
    for name in fields_of(form, InstantField):
        refused(client, address, untouched | {name: "last Tuesday"}, name, {"not a time"})
        refused(client, address, untouched | {name: PASTE}, name, {"max_length"})
        if name != "until":  # a refill may wait for a time to come; how long is its own rule
            refused(client, address, untouched | {name: "2999-01-01T10:00"}, name, {"in the future", "not a promise"})


@pytest.mark.parametrize("page", FORMS, ids=lambda page: page.name)
def test_no_field_falls_over_a_paste_or_a_null(page: Page, world: World, client: Client) -> None:
    address = address_of(page, world)
    form, untouched = drawn(client, address)
    for name, field in form.fields.items():
        if isinstance(field, QuantityField | InstantField | forms.BooleanField) or field.widget.is_hidden:
            continue
        before = Act.objects.count()
        for bad in ("word " * 600_000, "a\0b"):
            answer = client.post(address, untouched | {name: bad})
            assert answer.status_code in (409, 422), (name, bad[:9])
            assert name in answer.context["form"].errors, (name, answer.context["form"].errors.as_data())
        assert Act.objects.count() == before


@pytest.mark.parametrize("page", FORMS, ids=lambda page: page.name)
def test_an_expired_form_gives_back_what_was_typed_after_signing_in(
    page: Page, world: World, client: Client, someone: Any
) -> None:
    address = address_of(page, world)
    form, untouched = drawn(client, address)
    typed = {
        name: f"typed into {name}" for name, field in form.fields.items()
        if isinstance(field, forms.CharField) and name not in kept.NOT_KEPT and not isinstance(field.widget, forms.PasswordInput)
    }  # fmt: skip
    before = Act.objects.count()
    client.logout()
    answer = client.post(address, untouched | typed)
    assert answer.status_code == 401
    packed = answer.context["form"].initial["kept"]
    back = client.post(
        reverse("people:sign_in"), {"name": someone.sign_in_name, "password": PASSWORD, "kept": packed}
    )
    assert back["Location"] == address
    again = client.get(address).context["form"]
    assert {name: again[name].value() for name in typed if name in again.fields} == {
        name: value for name, value in typed.items() if name in again.fields
    }
    assert Act.objects.count() == before  # coming back saves nothing


# --- retired by someone else, between the drawing of the form and its sending -------------------------

SENT: dict[str, dict[str, Any]] = {
    "bottles:edit": {"outlet": "CGA 1"},
    "bottles:tare": {"tare": "14.2 lb"},
    "bottles:stamps": {"date": "06/2024", "kind": "test"},
    "bottles:strike_stamp": {"reason": "another bottle's"},
    "bottles:owner": {"owner": "shop"},
    "bottles:condition": {"code": "leak"},
    "bottles:end_condition": {"how": "seen again by the test house: within the limits"},
    "bottles:check_in": {"brought_by": "R. Quill"},
    "bottles:wanted": {"wanted": "refill"},
    "bottles:condemn": {"sure": "on", "note": "crack at the neck"},
    "bottles:retire": {"reason": "scrapped", "sure": "on"},
    "bottles:weigh": {"gross": "10 kg", "step": "stored"},
    "bottles:deliver": {"supplier": "Northfen", "ticket": "1", "ticket_net": "10 kg"},
    "bottles:give_back": {"supplier": "Northfen"},
    "bottles:use": {"amount": "1 kg"},
    "bottles:vent": {"amount": "1 kg", "reason": "yard"},
    "bottles:fill": {
        "supply_temperature": "20 °C", "bottle_temperature": "-12 °C", "bottle_weight": "6.72 kg", "check_known": "10 kg",
        "check_read": "10 kg", "look_all": "on", "pressure": "kept", "start": "vented",
    },
}
# Where it stands, and that it left the shop, is known of a retired bottle too.
STAYS_OPEN = {"bottles:hand_over", "bottles:move"}


def test_every_form_about_one_bottle_is_tried_with_a_retired_one(world: World) -> None:
    of_one = {page.name for page in FORMS if "code" in page.args(world)}
    assert of_one == SENT.keys() | STAYS_OPEN


@pytest.mark.parametrize("page", [page for page in FORMS if page.name in SENT], ids=lambda page: page.name)
def test_a_bottle_retired_meanwhile_takes_nothing_more_and_says_so(page: Page, world: World, client: Client) -> None:
    address = address_of(page, world)
    form, untouched = drawn(client, address)
    choices = {
        name: next((pk for pk in field.queryset.values_list("pk", flat=True)), "")
        for name, field in form.fields.items() if isinstance(field, forms.ModelChoiceField) and name not in untouched
    }  # fmt: skip
    Bottle.objects.filter(pk=world.bottle.pk).update(retired_at=clock.now(), version=2)
    of_it = Act.objects.exclude(code="scale.checked")  # a known weight on a scale is a fact by itself
    before = of_it.count()
    answer = client.post(address, untouched | choices | SENT[page.name])
    assert answer.status_code == 409, (answer.status_code, getattr(answer.context["form"], "errors", None))
    codes = {error.code for errors in answer.context["form"].errors.as_data().values() for error in errors}
    assert "retired" in codes, codes
    assert of_it.count() == before
