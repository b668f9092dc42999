"""The pages of the scale and the books: what is typed is kept, a sentence for each bad figure."""

from __future__ import annotations

import uuid

import pytest

from bottles.models import Delivery, Movement, Scale, ScaleCheck, Weighing
from shop.base import clock
from shop.cars.models import Car
from tests.bottles import books as b

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def today(shop):
    with clock.pretend(b.after(24 * 30)):
        yield


@pytest.fixture
def desk(front_desk, client_of):
    return client_of(front_desk)


@pytest.fixture
def boss(manager, client_of):
    return client_of(manager)


def form(scale: Scale, gross: str, **more: object) -> dict[str, object]:
    return {"form_key": str(uuid.uuid4()), "scale": scale.pk, "gross": gross, "step": "stored"} | more


def codes(response, field: str) -> list[str]:
    return [error.code for error in response.context["form"].errors.as_data().get(field, [])]


@pytest.mark.parametrize(
    ("typed", "code"),
    [
        ("twelve", "not_a_number"),
        ("1,234", "ambiguous_comma"),
        ("1e9 kg", "exponent"),
        ("-3 kg", "negative"),
        ("12 stone", "unknown_unit"),
        ("12 psi", "other_kind"),
        ("24-17", "ounces"),
        ("5000 kg", "too_large"),
        ("", "required"),
        ("6.3 kg", "tare_above_gross"),
        ("61 kg", "beyond the scale"),
        ("9" * 3_000_000, "too long"),
    ],
)
def test_each_bad_weight_has_its_sentence_keeps_what_was_typed_and_writes_nothing(desk, typed, code):
    bottle, scale = b.bottle(), b.scale()
    response = desk.post(f"/b/{bottle.code}/weigh", form(scale, typed))
    assert response.status_code in (409, 422)
    assert codes(response, "gross") == [code]
    assert response.context["form"]["gross"].value() == typed
    assert len(response.content) < 3_200_000
    assert not Weighing.objects.exists()


@pytest.mark.parametrize(("typed", "code"), [("2030-01-01T10:00", "in the future"), ("yesterday", "not a time")])
def test_a_time_to_come_or_no_time_is_refused(desk, typed, code):
    bottle, scale = b.bottle(), b.scale()
    response = desk.post(f"/b/{bottle.code}/weigh", form(scale, "10 kg", happened_at=typed))
    assert codes(response, "happened_at") == [code]
    assert not Weighing.objects.exists()


@pytest.mark.parametrize(("style", "grams"), [("kg", 11_060), ("lb", 5_017), ("g", 11)])
def test_a_bare_number_is_taken_in_the_scales_own_unit_whatever_the_person_reads(desk, style, grams):
    # the shop reads pounds; 11.06 lb = 5016.7 g → 5017; 11.06 g → 11
    bottle, scale = b.bottle(), b.scale(style=style)
    type(bottle).objects.update(capacity_ml=None)
    desk.post(f"/b/{bottle.code}/weigh", form(scale, "11.06"))
    found = Weighing.objects.first()
    assert (found.gross_g if found else None) == (grams if grams > b.TARE_G else None)


def test_the_reason_is_asked_for_beside_what_was_typed_and_then_it_is_saved(desk):
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    typed = form(scale, "9.42 kg")
    response = desk.post(f"/b/{bottle.code}/weigh", typed)
    assert (response.status_code, codes(response, "reason")) == (409, ["needs a reason"])
    assert response.context["form"]["gross"].value() == "9.42 kg"
    response = desk.post(f"/b/{bottle.code}/weigh", typed | {"reason": "valve weeps"})
    assert (response.status_code, response["Location"]) == (302, "/b/T-0001")
    assert b.holds(bottle) == 3_000


def test_the_form_arriving_again_is_answered_with_the_first_and_weighs_once(desk):
    bottle, scale = b.bottle(), b.scale()
    typed = form(scale, "10 kg")
    answers = [desk.post(f"/b/{bottle.code}/weigh", typed) for _ in range(2)]
    assert [answer["Location"] for answer in answers] == ["/b/T-0001"] * 2
    assert Weighing.objects.count() == 1


def test_a_bottle_retired_meanwhile_is_answered_with_a_sentence(desk):
    bottle, scale = b.bottle(), b.scale()
    type(bottle).objects.update(retired_at=b.after(1))
    response = desk.post(f"/b/{bottle.code}/weigh", form(scale, "10 kg"))
    assert (response.status_code, codes(response, "__all__")) == (409, ["retired"])


def test_the_page_shows_contents_of_the_limit_books_and_the_pressure_to_expect(desk):
    bottle, scale = b.bottle(), b.scale()
    type(bottle).objects.update(mark="DOT-3AL1800", charge_g=4_536)  # 10.0 lb
    b.weigh(bottle, scale, 4_309, b.after(0))  # 9.5 lb
    page = desk.get(f"/b/{bottle.code}/weigh?t=20 C").content.decode()
    assert "9.5 of 10.0 lb" in page
    assert "94 % of its limit" in page  # 4309 / 4536 = 94.99, down
    # Vapour pressure at 293.15 K is 50.525 bar (NIST WebBook, nitrous oxide, from memory), 718 psi at a gauge
    # at 180 m (0.992 bar): (50.525 − 0.992) bar = 718.4 psi
    assert "718 psi (liquid and vapour)" in page


def test_scales_say_whether_they_were_checked_today(desk, boss):
    scale = b.scale()
    assert "Not checked today" in desk.get("/scales/").content.decode()
    check = {"form_key": str(uuid.uuid4()), "known": "10 kg", "read": "10.01"}
    assert desk.post(f"/scales/{scale.pk}/check", check).status_code == 302
    assert ScaleCheck.objects.get().read_g == 10_010
    assert "Checked today" in desk.get("/scales/").content.decode()
    with clock.pretend(b.after(24 * 31)):
        assert "Not checked today" in desk.get("/scales/").content.decode()
    assert desk.get("/scales/add").status_code == 403
    assert boss.get("/scales/add").status_code == 200


def test_a_scale_is_added_changed_and_a_stale_change_shows_both(boss):
    typed = {
        "form_key": str(uuid.uuid4()), "code": "b", "name": "bench", "style": "lb", "resolution": "0.02", "error": "0.05 lb",
        "capacity": "130", "active": "on",
    }  # fmt: skip
    assert boss.post("/scales/add", typed).status_code == 302
    scale = Scale.objects.get()
    # 0.02 lb = 9.07 g; 0.05 lb = 22.7 g; 130 lb = 58,967 g
    assert (scale.code, scale.resolution_g, scale.error_g, scale.capacity_g) == ("B", 9, 23, 58_967)
    changed = typed | {"form_key": str(uuid.uuid4()), "version": 1, "name": "counter"}
    assert boss.post(f"/scales/{scale.pk}/change", changed).status_code == 302
    stale = typed | {"form_key": str(uuid.uuid4()), "version": 1, "name": "yard"}
    response = boss.post(f"/scales/{scale.pk}/change", stale)
    assert (response.status_code, codes(response, "name")) == (409, ["stale"])
    assert "counter" in response.content.decode()


@pytest.mark.parametrize(
    ("field", "typed", "code"),
    [
        ("resolution", "0", "no resolution"),
        ("capacity", "0.1", "capacity"),
        ("error", "20 lb", "error"),
        ("code", "TAKEN", "code taken"),
    ],
)
def test_a_scale_that_cannot_be_is_refused(boss, field, typed, code):
    b.scale("TAKEN")
    data = {
        "form_key": str(uuid.uuid4()), "code": "b", "name": "bench", "style": "lb", "resolution": "0.02", "error": "0.05 lb",
        "capacity": "130", "active": "on",
    }  # fmt: skip
    response = boss.post("/scales/add", data | {field: typed})
    assert codes(response, field) == [code]
    assert Scale.objects.count() == 1


def test_a_delivery_says_what_ticket_and_scale_differ_by(desk):
    supply, scale = b.bottle("S-07", owner="supplier", is_in=False), b.scale()
    typed = {
        "form_key": str(uuid.uuid4()), "supplier": "Northfen Nitrous", "ticket": "881", "ticket_net": "11.30 kg", "lot": "L7",
        "race_grade": "yes", "scale": scale.pk, "gross": "17.67", "place": b.place().pk,
    }  # fmt: skip
    response = desk.post(f"/b/{supply.code}/deliver", typed, follow=True)
    # 11,250 g = 24.80 lb, 11,300 g = 24.91 lb: 50 g = 0.1 lb short
    assert "Ticket 881 says 24.9 lb, our scale 24.8 ±0.1 lb: 0.1 lb short." in response.content.decode()
    delivery = Delivery.objects.get()
    assert (delivery.race_grade, delivery.lot, delivery.weighing.net_g) == (True, "L7", 11_250)


def test_use_vent_return_strike_and_reverse_from_their_pages(desk, boss):
    bottle, scale = b.bottle("S-07", owner="shop"), b.scale()
    car = Car.objects.create(number="27")
    kept = b.weigh(bottle, scale, 4_000, b.after(0))
    key = lambda: {"form_key": str(uuid.uuid4())}  # noqa: E731
    assert desk.post("/b/S-07/use", key() | {"car": car.pk, "amount": "1 kg"}).status_code == 302
    assert desk.post("/b/S-07/vent", key() | {"reason": "yard", "scale": scale.pk, "gross": "9.32 kg"}).status_code == 302
    assert (b.holds(bottle), b.balance("car"), b.balance("vented")) == (2_900, 1_000, 100)
    used = Movement.objects.get(kind="use")
    address = f"/nitrous/movements/{used.pk}/reverse"
    assert desk.post(address, key() | {"reason": "x"}).status_code == 403
    assert boss.post(address, key() | {"reason": "another bottle"}).status_code == 302
    # the vent was told by the scale: 9.32 kg stays true, so the kilogram is short now
    assert (b.holds(bottle), b.balance("car"), b.balance("vented") + b.balance("unaccounted")) == (2_900, 0, 1_100)
    assert desk.post(f"/weighings/{kept.pk}/strike", key() | {"reason": ""}).status_code == 422
    assert desk.post(f"/weighings/{kept.pk}/strike", key() | {"reason": "mistyped", "right": "10.52"}).status_code == 302
    assert desk.post("/b/S-07/return", key() | {"supplier": "Northfen Nitrous"}).status_code == 302
    assert (b.holds(bottle), b.balance("returned")) == (0, 2_900)
    b.check_books()


@pytest.mark.parametrize("amount", [{}, {"amount": "1 kg", "gross": "9 kg"}])
def test_either_an_amount_or_the_scale_and_what_was_typed_is_kept(desk, amount):
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    response = desk.post(
        f"/b/{bottle.code}/vent", {"form_key": str(uuid.uuid4()), "reason": "yard", "scale": scale.pk} | amount
    )
    assert (response.status_code, codes(response, "amount")) == (422, ["one of two"])
    assert response.context["form"]["reason"].value() == "yard"


def test_the_balance_keeps_a_wrong_day_and_shows_this_month(boss):
    page = boss.get("/nitrous?first=2026-03-20&last=2026-03-01")
    assert codes(page, "last") == ["before the first"]
    assert boss.get("/nitrous?first=nonsense&last=").status_code == 200
    assert boss.get("/nitrous?first=0001-01-01&last=9999-12-31").status_code == 200
    assert boss.get("/nitrous/stock-take?since=9999-12-31").status_code == 200


def test_stock_take_and_balance_show_their_figures(boss):
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    b.weigh(bottle, scale, 3_500, b.after(2), reason="nobody knows")
    page = boss.get("/nitrous?first=2026-03-01&last=2026-03-31").content.decode()
    assert "The books sum to zero" in page
    assert "nobody knows" in page
    page = boss.get("/nitrous/stock-take").content.decode()
    assert "1 of 1" in page
    assert "/b/T-0001/weigh?step=stocktake" in page
