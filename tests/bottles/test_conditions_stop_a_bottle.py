"""What is wrong is noted by whoever sees it and ended by whoever may; condemned and retired are final."""

from __future__ import annotations

import uuid
from datetime import date, timedelta
from typing import Any

import pytest

from bottles.models import Bottle, Condition, ConditionEnd
from bottles.services.conditions import end_condition, note_condition, retire
from bottles.services.refusals import Final, Retired
from shop.base import clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from tests.bottles.of_register import bottle

pytestmark = pytest.mark.django_db


def note(of: Any, code: str = "dent", **more: Any) -> Condition:
    return note_condition(key=uuid.uuid4(), person=None, bottle=of, code=code, **{"seen_on": clock.today()} | more)


def end(condition: Condition, how: str = "looked at again, it's the label") -> ConditionEnd:
    return end_condition(key=uuid.uuid4(), person=None, condition=condition, how=how)


def form_data(**typed: Any) -> dict[str, Any]:
    return {"form_key": str(uuid.uuid4()), "seen_on": str(clock.today())} | typed


def test_what_is_seen_stands_on_the_page_until_it_is_ended(shop: Any, client_of: Any, front_desk: Any, technician: Any) -> None:
    bottle()
    desk = client_of(front_desk)
    assert desk.post("/b/T-0001/condition", form_data(code="dent", note="left shoulder")).status_code == 302
    page = desk.get("/b/T-0001").content.decode()
    assert "What is wrong with it" in page and "left shoulder" in page
    assert "say what ended it" not in page  # that is for technicians and managers
    bench = client_of(technician)
    address = f"/b/T-0001/condition/{Condition.objects.get().pk}/end"
    assert address in bench.get("/b/T-0001").content.decode()
    assert bench.post(address, form_data(how="examined by the test house")).status_code == 302
    page = bench.get("/b/T-0001").content.decode()
    assert "What was wrong with it once" in page and "examined by the test house" in page


def test_the_front_desk_ends_nothing(shop: Any, client_of: Any, front_desk: Any) -> None:
    condition = note(bottle())
    answer = client_of(front_desk).post(f"/b/T-0001/condition/{condition.pk}/end", form_data(how="fine"))
    assert answer.status_code == 403 and not ConditionEnd.objects.exists()


def test_the_same_is_noted_once_while_it_is_open(shop: Any) -> None:
    one = bottle()
    first = note(one)
    with pytest.raises(NotReady) as refused:
        note(one)
    assert refused.value.code == "noted already"
    end(first)
    assert note(one).pk != first.pk


def test_a_condition_is_ended_once(shop: Any) -> None:
    condition = note(bottle())
    end(condition)
    with pytest.raises(NotReady) as again:
        end(condition)
    assert again.value.code == "ended already"


@pytest.mark.parametrize(
    ("typed", "field", "code"),
    [
        ({"code": ""}, "code", "required"),
        ({"code": "ugly"}, "code", "invalid_choice"),
        ({"code": "other"}, "note", "required"),
        ({"code": "dent", "seen_on": "soon"}, "seen_on", "invalid"),
        ({"code": "dent", "note": "x" * 3_000_000}, "note", "max_length"),
    ],
)
def test_bad_input_gets_a_sentence(shop: Any, client_of: Any, front_desk: Any, typed: Any, field: str, code: str) -> None:
    bottle()
    answer = client_of(front_desk).post("/b/T-0001/condition", form_data(**typed))
    assert answer.status_code == 422
    assert answer.context["form"].has_error(field, code)
    assert not Condition.objects.exists()


def test_nothing_is_seen_tomorrow(shop: Any) -> None:
    with pytest.raises(Refusal) as refused:
        note(bottle(), seen_on=clock.today() + timedelta(days=1))
    assert refused.value.code == "in the future"


# --- for good -------------------------------------------------------------------------------------


def test_only_a_manager_condemns_and_nothing_ends_it(shop: Any, client_of: Any, technician: Any, manager: Any) -> None:
    bottle()
    data = form_data(note="expired, marked by the test house", sure="on")
    assert client_of(technician).post("/b/T-0001/condemn", data).status_code == 403
    boss = client_of(manager)
    assert boss.post("/b/T-0001/condemn", data).status_code == 302
    condemned = Condition.objects.get()
    assert condemned.code == "condemned"
    with pytest.raises(Final):
        end(condemned)
    assert "/end" not in boss.get("/b/T-0001").content.decode()
    assert Act.objects.filter(code="bottle.condemned", person=manager).count() == 1


def test_to_condemn_is_ticked_and_explained(shop: Any, client_of: Any, manager: Any) -> None:
    bottle()
    answer = client_of(manager).post("/b/T-0001/condemn", form_data(note=""))
    form = answer.context["form"]
    assert answer.status_code == 422 and form.has_error("note", "required") and form.has_error("sure", "required")


def test_a_retired_bottle_takes_no_more_entries_but_stays_to_be_read(shop: Any, client_of: Any, manager: Any) -> None:
    one = bottle()
    condition = note(one)
    boss = client_of(manager)
    assert boss.post("/b/T-0001/retire", form_data(reason="scrapped", sure="on")).status_code == 302
    for refused in (
        lambda: note(one, "leak"),
        lambda: end(condition),
        lambda: retire(key=uuid.uuid4(), person=None, bottle=one, reason="again"),
    ):
        with pytest.raises(Retired):
            refused()
    page = boss.get("/b/T-0001").content.decode()
    assert "Retired" in page and "because: scrapped" in page and "/b/T-0001/edit" not in page
    assert "T-0001" not in boss.get("/bottles/").content.decode()
    assert "T-0001" in boss.get("/bottles/?state=retired").content.decode()


def test_a_bottle_retired_by_someone_else_meanwhile_says_so_and_keeps_what_was_typed(
    shop: Any, client_of: Any, front_desk: Any
) -> None:
    one = bottle()
    desk = client_of(front_desk)
    desk.get("/b/T-0001/condition")
    retire(key=uuid.uuid4(), person=None, bottle=one, reason="scrapped")
    answer = desk.post("/b/T-0001/condition", form_data(code="dent", note="left shoulder"))
    assert answer.status_code == 409
    form = answer.context["form"]
    assert form.has_error("__all__", "retired") and form["note"].value() == "left shoulder"
    assert not Condition.objects.exists()


def test_a_bottle_on_a_station_or_in_a_refill_isn_t_retired(shop: Any) -> None:
    from bottles.models import Station, Supply

    one = bottle(use="supply")
    station = Station.objects.create(
        code="1", name="Station 1", hose_length_um=1_500_000, hose_length_typed="1.5 m", hose_bore_um=4800, hose_bore_typed="4.8 mm"
    )
    supply = Supply.objects.create(station=station, bottle=one)
    with pytest.raises(NotReady) as refused:
        retire(key=uuid.uuid4(), person=None, bottle=one, reason="empty")
    assert refused.value.code == "on a station"
    supply.delete()
    retire(key=uuid.uuid4(), person=None, bottle=one, reason="empty")
    assert Bottle.objects.get().retired_at.date() >= date(2020, 1, 1)
