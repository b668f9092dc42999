"""Every stamp seen is a row; one read wrongly is struck by a second, never changed."""

from __future__ import annotations

import uuid
from typing import Any

import pytest

from bottles.models import Stamp, StampStrike
from bottles.services.refusals import Contradicted, Retired
from bottles.services.stamps import record_stamp, strike_stamp
from shop.base.errors import NotReady, Refusal
from tests.bottles.of_register import bottle, seen

pytestmark = pytest.mark.django_db


def record(of: Any, kind: str, typed: str) -> Stamp:
    return record_stamp(key=uuid.uuid4(), person=None, bottle=of, stamp=seen(kind, typed))


def strike(stamp: Stamp, reason: str = "misread") -> StampStrike:
    return strike_stamp(key=uuid.uuid4(), person=None, stamp=stamp, reason=reason)


def form_data(**typed: Any) -> dict[str, Any]:
    return {"form_key": str(uuid.uuid4()), "kind": "test", "date": "05/2022"} | typed


@pytest.fixture
def desk(client_of: Any, front_desk: Any) -> Any:
    return client_of(front_desk)


@pytest.mark.parametrize(
    ("typed", "year", "month", "star", "plus", "facility"),
    [
        ("06/2021", 2021, 6, False, False, ""),
        ("2021/06", 2021, 6, False, False, ""),
        ("06/2021*", 2021, 6, True, False, ""),
        ("6/21+", 2021, 6, False, True, ""),
        ("9 [A1/32] 06", 2006, 9, False, False, "A123"),  # 49 CFR 180.213(d), from memory
    ],
)
def test_a_stamp_is_kept_as_typed_and_as_understood(
    shop: Any, typed: str, year: int, month: int, star: bool, plus: bool, facility: str
) -> None:
    row = record(bottle(mark="DOT-3AA2015", stamps={}), "test", typed)
    assert (row.year, row.month, row.star, row.plus, row.facility, row.typed) == (year, month, star, plus, facility, typed)


def test_star_and_facility_may_be_told_beside_it(desk: Any) -> None:
    bottle(mark="DOT-3AA2015", stamps={})
    assert desk.post("/b/T-0001/stamps", form_data(star="on", facility="B456")).status_code == 302
    row = Stamp.objects.get()
    assert row.star and not row.plus and row.facility == "B456"


def test_several_stamps_are_read_in_a_row(desk: Any) -> None:
    bottle()
    answer = desk.post("/b/T-0001/stamps", form_data())
    assert answer.url == "/b/T-0001/stamps"
    page = desk.get("/b/T-0001/stamps").content.decode()
    assert "05/2022" in page and "06/2024" in page


def test_an_end_of_life_may_be_still_to_come(desk: Any) -> None:
    bottle()
    assert desk.post("/b/T-0001/stamps", form_data(kind="end", date="03/2039")).status_code == 302


@pytest.mark.parametrize(
    ("typed", "status", "field", "code"),
    [
        ({"date": ""}, 422, "date", "required"),
        ({"date": "05/06"}, 422, "date", "ambiguous stamp"),
        ({"date": "31/02/2020"}, 422, "date", "not a stamp"),
        ({"date": "x" * 3_000_000}, 422, "date", "not a stamp"),
        ({"kind": ""}, 422, "kind", "required"),
        ({"kind": "party"}, 422, "kind", "invalid_choice"),
        ({"date": "05/2088"}, 409, "date", "stamp in the future"),
        ({"date": "06/2024"}, 409, "date", "stamp known"),
        ({"facility": "y" * 41}, 422, "facility", "max_length"),
    ],
)
def test_a_bad_stamp_gets_a_sentence_and_comes_back(desk: Any, typed: dict[str, str], status: int, field: str, code: str) -> None:
    bottle()
    answer = desk.post("/b/T-0001/stamps", form_data(**typed))
    assert answer.status_code == status
    form = answer.context["form"]
    assert form.has_error(field, code), form.errors.as_data()
    assert form["date"].value() == form_data(**typed)["date"]
    assert Stamp.objects.count() == 1


def test_a_test_before_it_was_made_is_refused(shop: Any) -> None:
    one = bottle(stamps={"made": "06/2020"})
    with pytest.raises(Contradicted) as refused:
        record(one, "test", "05/2020")
    assert refused.value.code == "test-before-manufacture"
    assert Stamp.objects.count() == 1


def test_a_star_on_aluminium_is_asked_about(desk: Any) -> None:
    bottle()
    answer = desk.post("/b/T-0001/stamps", form_data(star="on"))
    asked = {reason.code for reason in answer.context["form"].to_confirm}
    assert answer.status_code == 409 and "star-on-aluminium" in asked
    assert desk.post("/b/T-0001/stamps", form_data(star="on", confirmed=sorted(asked))).status_code == 302


def test_a_bottle_is_made_once_until_that_stamp_is_struck(shop: Any) -> None:
    one = bottle(stamps={"made": "06/2020"})
    with pytest.raises(NotReady) as refused:
        record(one, "made", "07/2020")
    assert refused.value.code == "stamped once"
    strike(Stamp.objects.get())
    assert record(one, "made", "07/2020").month == 7


def test_a_struck_stamp_stays_to_be_seen_and_counts_no_more(desk: Any) -> None:
    one = bottle()
    answer = desk.post(
        f"/b/T-0001/stamps/{Stamp.objects.get().pk}/strike", {"form_key": str(uuid.uuid4()), "reason": "it says 05, not 06"}
    )
    assert answer.status_code == 302
    page = desk.get("/b/T-0001").content.decode()
    assert "<s>06/2024</s>" in page and "struck: it says 05, not 06" in page
    assert "last test" in page  # missing again
    assert record(one, "test", "06/2024").pk  # and may be read anew


def test_a_stamp_is_struck_once_and_with_a_reason(shop: Any) -> None:
    bottle()
    stamp = Stamp.objects.get()
    with pytest.raises(Refusal) as refused:
        strike(stamp, "  ")
    assert refused.value.code == "no reason"
    strike(stamp)
    with pytest.raises(NotReady) as again:
        strike(stamp)
    assert again.value.code == "struck already"
    assert StampStrike.objects.count() == 1


def test_the_stamp_of_another_bottle_isn_t_struck_from_here(desk: Any) -> None:
    bottle()
    bottle(serial="2")
    other = Stamp.objects.get(bottle__code="T-0002")
    assert desk.get(f"/b/T-0001/stamps/{other.pk}/strike").status_code == 404


def test_a_bottle_retired_meanwhile_takes_no_stamp(shop: Any) -> None:
    from bottles.services.conditions import retire

    one = bottle()
    retire(key=uuid.uuid4(), person=None, bottle=one, reason="sold")
    with pytest.raises(Retired):
        record(one, "test", "05/2022")
    with pytest.raises(Retired):
        strike(Stamp.objects.get())
