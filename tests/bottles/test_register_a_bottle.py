"""A bottle comes into the register in a minute, from five things."""

from __future__ import annotations

import uuid
from datetime import timedelta
from typing import Any

import pytest
from django.utils import timezone

from bottles.models import Bottle, Stamp, Tare
from bottles.selectors.codes import next_code
from bottles.services.owners import Owner
from bottles.services.refusals import BottleKnown, CodeTaken, Unconfirmed
from bottles.services.registering import FirstFacts, Particulars, register_bottle
from shop.base.errors import Refusal
from shop.base.models import Act
from shop.people.models import Customer
from tests.bottles.of_register import bottle, form_data, seen

pytestmark = pytest.mark.django_db
URL = "/bottles/register"


@pytest.fixture
def desk(client_of: Any, front_desk: Any) -> Any:
    return client_of(front_desk)


def test_five_things_are_enough(desk: Any, front_desk: Any) -> None:
    answer = desk.post(URL, form_data())
    assert answer.status_code == 302 and answer.url == "/b/T-0001"
    registered = Bottle.objects.get(code="T-0001")
    assert (registered.serial, registered.mark, registered.charge_g) == ("88213", "DOT-3AL1800", 4536)  # 10 lb × 453.59237
    standing = registered.standing
    assert standing.tare.total_g == 6441  # 14.2 lb × 453.59237
    assert standing.ownership.kind == "shop"
    assert Stamp.objects.get(bottle=registered).typed == "06/2024"
    assert registered.act.person == front_desk


def test_what_was_typed_is_kept_beside_what_was_understood(desk: Any) -> None:
    desk.post(URL, form_data(size="10 lb 0 oz", tare="14-3"))
    registered = Bottle.objects.get()
    assert registered.charge_typed == "10 lb 0 oz"
    assert registered.standing.tare.parts.get().typed == "14-3"
    assert registered.standing.tare.total_g == 6435  # (14 × 16 + 3) oz × 28.349523125


def test_a_capacity_that_nobody_read_is_inferred_from_the_labelled_size(desk: Any) -> None:
    desk.post(URL, form_data())
    registered = Bottle.objects.get()
    assert registered.capacity_basis == "inferred"
    # 4,536 g at 68 % (49 CFR 173.304a(a)(2)) need 6,671 g of water, at 27.737 in³/lb: 6.68 L.
    assert 6670 <= registered.capacity_ml <= 6690
    page = desk.get("/b/T-0001").content.decode()
    assert "inferred from the labelled size" in page


def test_a_capacity_that_was_read_is_not_replaced_by_an_inferred_one(desk: Any) -> None:
    desk.post(URL, form_data(capacity="6.8 L"))
    registered = Bottle.objects.get()
    assert (registered.capacity_ml, registered.capacity_basis, registered.capacity_typed) == (6800, "stamped", "6.8 L")


def test_serial_and_mark_may_be_told_to_be_illegible(desk: Any) -> None:
    data = form_data(serial="", serial_illegible="on", mark="", mark_illegible="on")
    assert desk.post(URL, data).status_code == 302
    page = desk.get("/b/T-0001").content.decode()
    assert "serial not legible" in page and "mark not legible" in page
    assert "Can't be judged" in page


@pytest.mark.parametrize("name", ["serial", "mark"])
def test_serial_and_mark_are_not_left_out_by_oversight(desk: Any, name: str) -> None:
    answer = desk.post(URL, form_data(**{name: ""}))
    assert answer.status_code == 422
    assert answer.context["form"].has_error(name, "required")


def test_all_else_may_wait_and_the_page_lists_it(desk: Any) -> None:
    data = form_data(test_stamp="", tare="", size="")
    assert desk.post(URL, data).status_code == 302
    page = desk.get("/b/T-0001").content.decode()
    for missing in ("last test", "tare", "water capacity or labelled size", "dip (siphon) tube or none", "maker"):
        assert missing in page


def test_a_tare_may_be_a_list_of_what_is_on(desk: Any) -> None:
    desk.post(URL, form_data(tare="", tare_bottle="13 lb", tare_valve="1.2 lb", tare_ring="90 g"))
    tare = Tare.objects.get()
    assert {part.thing: part.grams for part in tare.parts.all()} == {"bottle": 5897, "valve": 544, "ring": 90}
    assert tare.total_g == 5897 + 544 + 90


def test_a_figure_and_a_list_are_not_both_taken(desk: Any) -> None:
    answer = desk.post(URL, form_data(tare_valve="1.2 lb"))
    assert answer.context["form"].has_error("tare", "both")
    assert not Bottle.objects.exists()


def test_codes_follow_one_another_by_use(desk: Any) -> None:
    desk.post(URL, form_data())
    desk.post(URL, form_data(serial="88214"))
    desk.post(URL, form_data(serial="1", use="supply", owner="supplier", supplier="Harrow Medical & Trade"))
    assert sorted(Bottle.objects.values_list("code", flat=True)) == ["S-01", "T-0001", "T-0002"]


def test_the_next_code_passes_by_what_was_typed_in_another_way(shop: Any) -> None:
    for code in ("T-0009", "T-10B", "T-0003"):
        bottle(code=code, serial=code)
    assert next_code("car") == "T-0010"
    bottle(code="T-9999", serial="x")
    assert next_code("car") == "T-10000"


def test_a_typed_code_is_kept_in_capitals_and_never_given_twice(shop: Any) -> None:
    assert bottle(code=" kit-7 ").code == "KIT-7"
    with pytest.raises(CodeTaken):
        bottle(code="KIT-7", serial="other")
    assert Bottle.objects.count() == 1


@pytest.mark.parametrize("code", ["../x", "A B", "-7", "Ü1", "X" * 21])
def test_a_code_that_no_label_carries_is_refused(shop: Any, code: str) -> None:
    with pytest.raises(Refusal) as refused:
        bottle(code=code)
    assert refused.value.code == "not a code"


def test_a_serial_known_for_that_maker_and_mark_leads_to_its_bottle(desk: Any) -> None:
    bottle(maker="Invented Cylinder Co")
    answer = desk.post(URL, form_data(maker="invented  cylinder CO", mark="dot-3al1800"))
    assert answer.status_code == 409
    assert answer.context["form"].has_error("serial", "bottle known")
    assert 'href="/b/T-0001"' in answer.content.decode()


def test_how_a_mark_is_spaced_makes_no_other_bottle(desk: Any) -> None:
    bottle()
    assert desk.post(URL, form_data(mark="DOT 3AL 1800")).context["form"].has_error("serial", "bottle known")


@pytest.mark.parametrize(
    "typed", [{"maker": ""}, {"maker": "Invented Cylinder Co", "mark": "", "mark_illegible": "on"}], ids=["no maker", "no mark"]
)
def test_where_maker_or_mark_isn_t_known_a_person_says_whether_it_is_the_same(desk: Any, typed: dict[str, str]) -> None:
    bottle(maker="Invented Cylinder Co")
    answer = desk.post(URL, form_data(**typed))
    form = answer.context["form"]
    assert answer.status_code == 409 and [reason.code for reason in form.to_confirm] == ["serial-known"]
    assert 'href="/b/T-0001"' in answer.content.decode()
    assert desk.post(URL, form_data(**typed, confirmed=["serial-known"])).url == "/b/T-0002"


def test_the_same_serial_of_another_maker_is_another_bottle(shop: Any) -> None:
    bottle(maker="Invented Cylinder Co")
    assert bottle(maker="Other Cylinder Co").code == "T-0002"


def test_two_bottles_whose_serial_is_not_legible_are_two(shop: Any) -> None:
    assert {bottle(serial="").code, bottle(serial="").code} == {"T-0001", "T-0002"}


def test_the_owner_is_a_customer_found_by_a_part_of_the_name(desk: Any) -> None:
    customer = Customer.objects.create(name="Ostrander")
    desk.post(URL, form_data(owner="customer", customer="ostr"))
    assert Bottle.objects.get().standing.ownership.customer == customer


@pytest.mark.parametrize(("owner", "field"), [("customer", "customer"), ("supplier", "supplier")])
def test_an_owner_has_a_name(desk: Any, owner: str, field: str) -> None:
    answer = desk.post(URL, form_data(owner=owner))
    assert answer.status_code == 422 and field in answer.context["form"].errors


# --- what can't be true, and what is unusual ------------------------------------------------------


def test_a_test_before_it_was_made_is_refused_and_nothing_is_written(desk: Any) -> None:
    answer = desk.post(URL, form_data(made_stamp="07/2024", test_stamp="06/2024"))
    assert answer.status_code == 409
    assert answer.context["form"].has_error("test_stamp", "test-before-manufacture")
    assert not Bottle.objects.exists() and not Act.objects.filter(code="bottle.registered").exists()


@pytest.mark.parametrize(
    ("typed", "code"),
    [
        ({"capacity": "4 L"}, "charge-above-capacity"),  # 10 lb into 4 L: 1.13 kg/L
        ({"mark": "DOT-3AL1500"}, "service-pressure-too-low"),  # least 1800: 49 CFR 173.304a(a)(2)
        ({"mark": "DOT-39"}, "not-refillable"),
        ({"mark": "pi ISO 7866 PH250"}, "foreign-mark"),  # 49 CFR 173.301(j)
        ({"mark": "XX-99"}, "mark-unknown"),
        ({"tare": "142 lb"}, "tare-implausible"),
        ({"wall": "steel"}, "wall-contradicts-mark"),
    ],
)
def test_what_is_unusual_is_asked_and_then_taken(desk: Any, typed: dict[str, str], code: str) -> None:
    answer = desk.post(URL, form_data(**typed))
    assert answer.status_code == 409
    form = answer.context["form"]
    assert form.has_error("__all__", "unconfirmed")
    asked = {reason.code for reason in form.to_confirm}
    assert code in asked
    assert 'type="checkbox" name="confirmed"' in answer.content.decode()
    assert not Bottle.objects.exists()
    assert desk.post(URL, form_data(**typed, confirmed=sorted(asked))).status_code == 302


def test_each_warning_has_a_tick_of_its_own(desk: Any) -> None:
    data = form_data(mark="DOT-3AL1500", capacity="4 L")
    answer = desk.post(URL, data | {"confirmed": ["charge-above-capacity"]})
    assert answer.status_code == 409
    assert {"charge-above-capacity", "service-pressure-too-low"} <= {r.code for r in answer.context["form"].to_confirm}


def test_what_was_confirmed_once_is_not_asked_again(shop: Any, client_of: Any, front_desk: Any) -> None:
    with pytest.raises(Unconfirmed) as asked:
        bottle(mark="DOT-3AL1500")
    codes = [reason.code for reason in asked.value.reasons]
    register_bottle(
        key=uuid.uuid4(), person=None, particulars=Particulars(serial="1", mark="DOT-3AL1500"),
        first=FirstFacts(Owner("shop")), confirmed=codes,
    )
    data = {"form_key": str(uuid.uuid4()), "kind": "test", "date": "05/2022"}
    assert client_of(front_desk).post("/b/T-0001/stamps", data).status_code == 302


# --- bad input: a sentence each, what was typed comes back, nothing half-written ------------------

TOO_LONG = "9" * (3 * 1024 * 1024)


@pytest.mark.parametrize(
    ("field", "typed", "code"),
    [
        ("tare", "abc", "not_a_number"),
        ("tare", "1,234", "ambiguous_comma"),
        ("tare", "1e9 kg", "exponent"),
        ("tare", "-5 lb", "negative"),
        ("tare", "14 stone", "unknown_unit"),
        ("tare", "14 psi", "other_kind"),
        ("tare", "0 lb", "nothing"),
        ("tare", TOO_LONG, "too long"),
        ("size", "ten", "not_a_number"),
        ("capacity", "6.8 furlong", "unknown_unit"),
        ("capacity", "2 mL", "out of range"),
        ("test_stamp", "13/2024", "no such month"),
        ("test_stamp", "05/06", "ambiguous stamp"),
        ("test_stamp", "12/2099", "stamp in the future"),
        ("test_stamp", "yesterday", "not a stamp"),
        ("test_stamp", TOO_LONG, "not a stamp"),
        ("serial", TOO_LONG, "max_length"),
        ("mark", "DOT\0", "null_characters_not_allowed"),
        ("code", "a b", "not a code"),
        ("owner", "nobody", "invalid_choice"),
        ("use", "bomb", "invalid_choice"),
    ],
    ids=lambda value: value if isinstance(value, str) and len(value) < 30 else "",
)
def test_a_bad_entry_gets_a_sentence_and_nothing_is_registered(desk: Any, field: str, typed: str, code: str) -> None:
    answer = desk.post(URL, form_data(**{field: typed}))
    assert answer.status_code == 422
    form = answer.context["form"]
    assert form.has_error(field, code), form.errors.as_data()
    assert form[field].value() == typed
    assert not Bottle.objects.exists()


def test_a_double_click_registers_once_and_the_second_goes_to_the_first(desk: Any) -> None:
    data = form_data()
    assert desk.post(URL, data).url == "/b/T-0001"
    again = desk.post(URL, data)
    assert again.status_code == 302 and again.url == "/b/T-0001"
    assert Bottle.objects.count() == 1


def test_at_an_open_counter_the_bottle_is_registered_by_whoever_scans(desk: Any, make_user: Any) -> None:
    from shop.people.services.identifying import digest

    other = make_user("front_desk", name="Mara")
    other.badge_digest = digest("badge-7")
    other.save()
    session = desk.session
    session["shared_counter"] = True
    session.save()
    assert desk.post(URL, form_data()).status_code == 422
    desk.post(URL, form_data(who="badge-7"))
    assert Bottle.objects.get().act.person == other


def test_a_bottle_with_a_future_first_day_is_refused(shop: Any) -> None:
    with pytest.raises(Refusal) as refused:
        register_bottle(
            key=uuid.uuid4(), person=None, particulars=Particulars(serial="1", mark="DOT-3AL1800"),
            first=FirstFacts(Owner("shop"), since=timezone.now() + timedelta(days=2)),
        )
    assert refused.value.code == "in the future"
    assert not Bottle.objects.exists()


def test_a_bottle_known_to_the_service_is_refused_with_itself(shop: Any) -> None:
    first = bottle()
    with pytest.raises(BottleKnown) as refused:
        bottle(stamps={"test": seen("test", "05/2023").date.typed})
    assert refused.value.bottle == first


def test_a_code_that_another_desk_took_a_moment_ago_is_followed_by_the_next(shop: Any, monkeypatch: Any) -> None:
    first = bottle()
    seen_then = iter([first.code])  # what this desk saw before the other one saved
    monkeypatch.setattr("bottles.services.registering.next_code", lambda use: next(seen_then, None) or next_code(use))
    second = bottle(serial="2")
    assert second.code == "T-0002"
    assert second.act.subject == "bottle:T-0002"
    assert Act.objects.filter(code="bottle.registered").count() == 2
