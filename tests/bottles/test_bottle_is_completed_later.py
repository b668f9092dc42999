"""What is written of a bottle is completed and corrected; its page, its owner, its list and its history."""

from __future__ import annotations

import uuid
from datetime import timedelta
from typing import Any

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from bottles.models import Bottle, Ownership
from bottles.rules.lying import how_it_lies
from bottles.services.owners import Owner, change_owner
from bottles.services.registering import Particulars, change_bottle
from bottles.views.sections import SECTIONS
from shop.base import clock
from shop.base.errors import NotReady, Stale
from shop.base.models import Act
from tests.bottles.of_register import bottle
from tests.factories import CarFactory, CustomerFactory, PlaceFactory, placed

pytestmark = pytest.mark.django_db


@pytest.fixture
def desk(client_of: Any, front_desk: Any) -> Any:
    return client_of(front_desk)


def drawn(client: Any, address: str, **typed: Any) -> dict[str, Any]:
    """What a browser would post of a page as it's drawn, changed where a test says so."""
    form = client.get(address).context["form"]
    held = {name: form[name].value() for name in form.fields if form[name].value() not in (None, "", False)}
    return {name: "on" if value is True else value for name, value in held.items()} | {"form_key": str(uuid.uuid4())} | typed


def test_the_page_of_a_bottle_answers_to_its_label_whatever_the_case(desk: Any) -> None:
    bottle()
    assert desk.get("/b/t-0001").status_code == 200
    assert desk.get("/b/T-9999").status_code == 404


def test_saving_the_page_as_it_is_drawn_changes_nothing(desk: Any) -> None:
    one = bottle(charge_g=4536, charge_typed="10 lb", permit="SU 999", permit_charge_g=4500, own_limit_g=4400, race_grade=True)
    before = {field.name: getattr(one, field.name) for field in Bottle._meta.fields if field.name != "version"}
    assert desk.post("/b/T-0001/edit", drawn(desk, "/b/T-0001/edit")).status_code == 302
    after = Bottle.objects.get()
    assert {name: getattr(after, name) for name in before} == before
    assert Act.objects.get(code="bottle.changed").changes == {}


def test_what_was_missing_is_completed_and_the_history_says_what(desk: Any) -> None:
    bottle(serial="", capacity_ml=None, capacity_basis="unknown", capacity_typed="")
    assert "water capacity or labelled size" in desk.get("/b/T-0001").content.decode()
    data = drawn(desk, "/b/T-0001/edit", serial="88213", capacity="6.8 L", dip_tube="dip")
    data.pop("serial_illegible")
    assert desk.post("/b/T-0001/edit", data).status_code == 302
    page = desk.get("/b/T-0001").content.decode()
    assert "water capacity or labelled size" not in page and "415 in³ (6.80 L)" in page
    assert "serial number from nothing to “88213”" in page
    assert "dip (siphon) tube from “unknown” to “dip”" in page


def test_of_two_who_change_it_the_second_sees_both_texts_and_may_save_again(desk: Any, client_of: Any, technician: Any) -> None:
    bottle(outlet="CGA 1")
    mine = drawn(desk, "/b/T-0001/edit", outlet="mine")
    bench = client_of(technician)
    bench.post("/b/T-0001/edit", drawn(bench, "/b/T-0001/edit", outlet="theirs"))
    answer = desk.post("/b/T-0001/edit", mine)
    assert answer.status_code == 409
    form = answer.context["form"]
    assert form.has_error("outlet", "stale") and form["outlet"].value() == "mine"
    assert "theirs" in answer.content.decode()
    assert Bottle.objects.get().outlet == "theirs"
    again = mine | {"version": form["version"].value(), "form_key": str(uuid.uuid4())}
    assert desk.post("/b/T-0001/edit", again).status_code == 302
    assert Bottle.objects.get().outlet == "mine"


def test_an_old_version_is_refused_by_the_service_and_leaves_no_act(shop: Any) -> None:
    one = bottle()
    with pytest.raises(Stale):
        change_bottle(
            key=uuid.uuid4(), person=None, bottle=one, version=7, particulars=Particulars(serial="1", mark="DOT-3AL1800")
        )
    assert not Act.objects.filter(code="bottle.changed").exists()


def test_a_bottle_can_t_be_changed_into_another_that_is_known(desk: Any) -> None:
    bottle()
    bottle(serial="2")
    answer = desk.post("/b/T-0002/edit", drawn(desk, "/b/T-0002/edit", serial="88213"))
    assert answer.status_code == 409 and answer.context["form"].has_error("serial", "bottle known")
    assert 'href="/b/T-0001"' in answer.content.decode()


def test_a_changed_size_infers_the_capacity_anew_until_one_is_read(desk: Any) -> None:
    bottle(capacity_ml=None, capacity_basis="unknown", capacity_typed="", charge_g=4536, charge_typed="10 lb")
    ten = Bottle.objects.get().capacity_ml
    desk.post("/b/T-0001/edit", drawn(desk, "/b/T-0001/edit", size="5 lb"))
    assert Bottle.objects.get().capacity_ml == pytest.approx(ten / 2, abs=2)
    desk.post("/b/T-0001/edit", drawn(desk, "/b/T-0001/edit", capacity="3.5 L"))
    assert (Bottle.objects.get().capacity_ml, Bottle.objects.get().capacity_basis) == (3500, "stamped")


# --- whose it is ----------------------------------------------------------------------------------


def test_a_new_owner_is_a_new_row_and_the_old_one_stays(desk: Any) -> None:
    bottle()
    CustomerFactory(name="Quill Garage")
    data = {"form_key": str(uuid.uuid4()), "owner": "customer", "customer": "Quill Garage", "since": str(clock.today())}
    assert desk.post("/b/T-0001/owner", data).status_code == 302
    assert "Quill Garage" in desk.get("/b/T-0001").content.decode()
    assert Ownership.objects.count() == 2


def test_an_owner_told_late_with_an_earlier_day_doesn_t_replace_the_present_one(shop: Any) -> None:
    one = bottle()
    change_owner(
        key=uuid.uuid4(), person=None, bottle=one, owner=Owner("supplier", supplier="Harrow Trade Supply"),
        since=clock.today() - timedelta(days=90),
    )
    one.standing.refresh_from_db()
    assert one.standing.ownership.kind == "shop"


def test_the_same_owner_twice_is_said_and_not_written(shop: Any) -> None:
    with pytest.raises(NotReady) as refused:
        change_owner(key=uuid.uuid4(), person=None, bottle=bottle(), owner=Owner("shop"), since=clock.today())
    assert refused.value.code == "same owner"


def test_an_owner_from_tomorrow_is_refused_with_what_was_typed(desk: Any) -> None:
    bottle()
    tomorrow = str(clock.today() + timedelta(days=1))
    data = {"form_key": str(uuid.uuid4()), "owner": "supplier", "supplier": "Harrow Trade Supply", "since": tomorrow}
    answer = desk.post("/b/T-0001/owner", data)
    assert answer.status_code == 409 and answer.context["form"].has_error("since", "in the future")
    assert answer.context["form"]["supplier"].value() == "Harrow Trade Supply"


def test_the_history_holds_no_customer_s_name(desk: Any) -> None:
    bottle(owner=Owner("customer", CustomerFactory(name="Ostrander")))
    assert not Act.objects.filter(changes__icontains="Ostrander").exists()


# --- the page -------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("use", "tube", "words"),
    [
        ("supply", "dip", "upright"),
        ("supply", "none", "Upside down, in a stand"),
        ("car", "dip", "low and rearward end: valve forward"),
        ("car", "none", "valve end is the low and rearward end"),
        ("supply", "unknown", "Not known"),
        ("car", "", "Not known"),
        ("stock", "none", "Stored upright"),
    ],
)
def test_how_it_must_lie_follows_from_its_tube_and_use(use: str, tube: str, words: str) -> None:
    lying = how_it_lies(use, tube)
    assert words in lying.sentence
    assert lying.basis == "common practice"


def test_a_supply_bottle_is_held_twice() -> None:
    assert all("two chains or straps" in how_it_lies("supply", tube).held for tube in ("dip", "none", "unknown"))


def test_the_head_says_where_it_is_and_what_is_wanted(desk: Any) -> None:
    customer = CustomerFactory(name="Ostrander")
    CarFactory(number="27", customer=customer)
    placed(bottle(owner=Owner("customer", customer)), "in", place=PlaceFactory(name="counter"), wanted="refill")
    page = desk.get("/b/T-0001").content.decode()
    assert "Ostrander" in page and "car 27" in page and "wanted: refill" in page


def test_every_section_of_the_page_exists(shop: Any) -> None:
    from django.template.loader import get_template
    from django.utils.module_loading import import_string

    for template, function in SECTIONS:
        assert get_template(template) and callable(import_string(function))


def test_history_says_who_when_and_what(desk: Any, front_desk: Any) -> None:
    bottle(front_desk)
    page = desk.get("/b/T-0001/history").content.decode()
    assert "registered it" in page and front_desk.name in page


# --- the list -------------------------------------------------------------------------------------


@pytest.fixture
def three(shop: Any) -> None:
    bottle(owner=Owner("customer", CustomerFactory(name="Ostrander")))
    placed(bottle(serial="S7", use="supply", owner=Owner("supplier", supplier="Harrow")), "in", place=PlaceFactory(code="RACK"))
    bottle(serial="", stamps={}, tare=None)


@pytest.mark.parametrize(
    ("query", "codes"),
    [
        ("", ["S-01", "T-0001", "T-0002"]),
        ("owner=customer", ["T-0001"]),
        ("owner=supplier", ["S-01"]),
        ("use=supply", ["S-01"]),
        ("place=RACK", ["S-01"]),
        ("place=NOWHERE", ["S-01", "T-0001", "T-0002"]),
        ("state=in", ["S-01"]),
        ("state=out", ["T-0001", "T-0002"]),
        ("state=incomplete", ["T-0002"]),
        ("state=stopped", []),
        ("q=ostr", ["T-0001"]),
        ("q=88213", ["T-0001"]),
        ("q=%00%27%22", []),
    ],
)
def test_the_list_is_narrowed(desk: Any, three: None, query: str, codes: list[str]) -> None:
    assert [row["code"] for row in desk.get(f"/bottles/?{query}").context["rows"]] == codes


def test_the_list_asks_the_database_the_same_however_long_it_is(desk: Any, three: None) -> None:
    def queries() -> int:
        with CaptureQueriesContext(connection, ) as caught:
            assert desk.get("/bottles/").status_code == 200
        return len(caught)

    few = queries()
    for number in range(20):
        bottle(serial=f"N{number}")
    assert queries() == few


def test_the_page_asks_the_database_the_same_however_long_its_history(desk: Any) -> None:
    from bottles.services.tares import start_tare
    from tests.bottles.of_register import new_tare

    one = bottle(stamps={})

    def queries() -> int:
        with CaptureQueriesContext(connection) as caught:
            assert desk.get("/b/T-0001").status_code == 200
        return len(caught)

    few = queries()
    for grams in (6500, 6510, 6520):
        start_tare(key=uuid.uuid4(), person=None, bottle=one, tare=new_tare(bottle=f"{grams} g"))
    assert queries() == few
