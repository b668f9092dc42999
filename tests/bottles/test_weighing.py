"""A weighing: what is kept of it, what it says of the books, and what it refuses."""

from __future__ import annotations

import pytest

from bottles.models import Condition, Movement, ScaleCheck, Tare, Weighing
from bottles.services import scales, weighing
from shop.base import clock
from shop.base.errors import AlreadyDone, Refusal
from shop.cars.models import Car
from shop.physics.units import in_own_unit, parse_mass
from tests.bottles import books as b

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def today(shop):
    with clock.pretend(b.after(24 * 30)):
        yield


def test_net_is_gross_less_tare_to_the_gram_and_kept_as_typed():
    bottle, scale = b.bottle(), b.scale()
    kept = weighing.weigh(key=b.key(), person=None, bottle=bottle, scale=scale, gross=b.entry("24-6", "lb"))
    # 24 lb 6 oz = 390 oz; 390 × 28.349523125 g = 11056.31 → 11056 (NIST SP 811, B.8)
    assert (kept.gross_g, kept.net_g, kept.typed) == (11_056, 11_056 - b.TARE_G, "24-6")
    assert kept.error_g == b.NET_ERROR_G


@pytest.mark.parametrize("typed", ["24-6", "24 lb 6 oz", "24.4 lb", "11.06 kg", "11060 g", "390 oz"])
def test_an_entry_shown_back_in_its_own_unit_and_typed_again_gives_the_same_grams(typed):
    first = parse_mass(typed, default_unit="lb")
    again = parse_mass(in_own_unit(first.stored, first.unit), default_unit="lb")
    assert again.stored == first.stored


def test_a_late_weighing_takes_the_tare_in_force_then_and_old_weighings_keep_theirs():
    bottle, scale = b.bottle(), b.scale()
    first = b.weigh(bottle, scale, 4_000, b.after(0))
    Tare.objects.create(act=b.act(), bottle=bottle, since=b.after(10), total_g=7_000, error_g=10, basis="weighed")
    late = b.weigh(bottle, scale, 4_000, b.after(5))
    now = weighing.weigh(key=b.key(), person=None, bottle=bottle, scale=scale, gross=b.grams(11_000))
    first.refresh_from_db()
    assert (first.net_g, late.net_g, now.net_g) == (4_000, 4_000, 4_000)
    assert late.tare_id == first.tare_id != now.tare_id


def test_the_first_weighing_opens_a_customers_books_from_the_customer():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    assert (b.holds(bottle), b.balance("customer"), b.balance("supplier")) == (4_000, -4_000, 0)
    assert Movement.objects.get().kind == "opening"


@pytest.mark.parametrize("owner", ["shop", "supplier"])
def test_the_first_weighing_of_the_shops_or_the_suppliers_opens_from_the_supplier(owner):
    bottle, scale = b.bottle(owner=owner), b.scale()
    b.weigh(bottle, scale, 11_300, b.after(0))
    assert (b.holds(bottle), b.balance("supplier")) == (11_300, -11_300)


def test_within_the_uncertainty_of_the_difference_nothing_is_posted_and_a_slow_leak_adds_up():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    # √(24² + 24²) = 33.9 → 34
    b.weigh(bottle, scale, 3_980, b.after(1))
    b.weigh(bottle, scale, 3_966, b.after(2))
    assert Movement.objects.count() == 1
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, 3_965, b.after(3))
    assert refused.value.code == "needs a reason"
    b.weigh(bottle, scale, 3_965, b.after(3), reason="valve stem weeps")
    assert (b.holds(bottle), b.balance("unaccounted")) == (3_965, 35)
    assert Movement.objects.get(kind="adjust").note == "valve stem weeps"


def test_a_customers_bottle_that_comes_back_lighter_was_used_by_its_owner_no_question_asked():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_500, b.after(0))
    b.go_out(bottle, b.after(1))
    b.come_in(bottle, b.after(48))
    b.weigh(bottle, scale, 300, b.after(49), step="arrival")
    assert (b.holds(bottle), b.balance("customer"), b.balance("unaccounted")) == (300, -300, 0)


def test_the_shops_bottle_that_was_on_a_car_was_used_by_the_car():
    bottle, scale = b.bottle(owner="shop"), b.scale()
    car = Car.objects.create(number="27")
    b.weigh(bottle, scale, 4_500, b.after(0))
    b.go_out(bottle, b.after(1), "car", car)
    b.come_in(bottle, b.after(9))
    b.weigh(bottle, scale, 2_000, b.after(10))
    assert (b.balance("car"), b.balance("supplier")) == (2_500, -4_500)


def test_a_gap_of_a_bottle_that_never_left_asks_for_a_reason_and_nothing_is_half_written():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    before = (Weighing.objects.count(), Movement.objects.count())
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, 3_500, b.after(1))
    assert (refused.value.code, refused.value.field) == ("needs a reason", "reason")
    assert (Weighing.objects.count(), Movement.objects.count()) == before
    assert b.holds(bottle) == 4_000


def test_heavier_than_it_left_means_filled_elsewhere_and_its_contents_are_unknown():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 1_000, b.after(0))
    b.go_out(bottle, b.after(1))
    b.come_in(bottle, b.after(48))
    b.weigh(bottle, scale, 4_000, b.after(49))
    noted = Condition.objects.get()
    assert (noted.code, hasattr(noted, "end")) == ("contents unknown", False)
    assert (b.holds(bottle), b.balance("customer")) == (4_000, -4_000)


def test_striking_the_weighing_that_showed_it_ends_that_note():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 1_000, b.after(0))
    b.go_out(bottle, b.after(1))
    b.come_in(bottle, b.after(48))
    wrong = b.weigh(bottle, scale, 4_000, b.after(49))
    weighing.strike(key=b.key(), person=None, weighing=wrong, reason="another bottle was on the scale")
    assert Condition.objects.filter(end__isnull=True).count() == 0
    assert b.holds(bottle) == 1_000
    b.check_books()


def test_wet_widens_the_uncertainty_and_the_net_stays_as_read():
    bottle, scale = b.bottle(), b.scale()
    dry = b.weigh(bottle, scale, 4_000, b.after(0))
    wet = b.weigh(bottle, scale, 4_000, b.after(1), wet=True)
    assert wet.net_g == dry.net_g
    assert wet.error_g > dry.error_g + 100


def test_an_older_weighing_entered_late_is_a_statement_and_moves_nothing():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    b.go_out(bottle, b.after(1))
    b.come_in(bottle, b.after(10))
    b.weigh(bottle, scale, 2_000, b.after(12))
    b.weigh(bottle, scale, 3_000, b.after(6))
    assert (b.holds(bottle), Movement.objects.count()) == (2_000, 2)
    bottle.standing.refresh_from_db()
    assert bottle.standing.weighing.net_g == 2_000


def test_a_late_weighing_that_is_still_the_latest_settles_at_its_own_time():
    bottle, scale = b.bottle(), b.scale()
    b.weigh(bottle, scale, 4_000, b.after(0))
    b.go_out(bottle, b.after(1))
    b.weigh(bottle, scale, 2_500, b.after(20))
    assert b.holds(bottle) == 2_500
    assert Movement.objects.get(kind="adjust").happened_at == b.after(20)


def test_a_scale_that_failed_its_check_weighs_nothing_until_one_passes():
    bottle, scale = b.bottle(), b.scale()
    with clock.pretend(b.after(1)):
        scales.check_scale(key=b.key(), person=None, scale=scale, known=b.entry("10 kg"), read=b.entry("10.2 kg"))
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, 4_000, b.after(2))
    assert refused.value.code == "scale failed its check"
    earlier = b.weigh(bottle, scale, 4_000, b.after(0.5))
    with clock.pretend(b.after(3)):
        passed = scales.check_scale(key=b.key(), person=None, scale=scale, known=b.entry("10 kg"), read=b.entry("10.03 kg"))
    later = b.weigh(bottle, scale, 4_000, b.after(4))
    assert (earlier.check_row, later.check_row) == (None, passed)


@pytest.mark.parametrize(("read", "passes"), [("10.03 kg", True), ("9.97 kg", True), ("10.031 kg", False), ("9.969 kg", False)])
def test_a_check_passes_within_the_scales_error_and_one_step(read, passes):
    # 20 g error + 10 g step
    scales.check_scale(key=b.key(), person=None, scale=b.scale(), known=b.entry("10 kg"), read=b.entry(read))
    assert ScaleCheck.objects.get().passed is passes


@pytest.mark.parametrize(
    ("net_g", "more", "code"),
    [
        (-25, {}, "tare_above_gross"),
        (54_000, {}, "beyond the scale"),
    ],
)
def test_a_figure_that_cannot_be_right_is_refused(net_g, more, code):
    bottle, scale = b.bottle(), b.scale()
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, net_g, b.after(0), **more)
    assert (refused.value.code, refused.value.field) == (code, "gross")
    assert not Weighing.objects.exists()


def test_slightly_below_the_tare_is_empty_within_its_uncertainty():
    bottle, scale = b.bottle(), b.scale()
    kept = b.weigh(bottle, scale, -24, b.after(0))
    assert (kept.net_g, b.holds(bottle)) == (-24, 0)
    assert not Movement.objects.exists()


def test_a_time_to_come_or_before_the_tare_is_refused():
    bottle, scale = b.bottle(), b.scale()
    for at, code in ((b.after(24 * 31), "in the future"), (b.after(-24 * 60), "no tare then")):
        with pytest.raises(Refusal) as refused:
            b.weigh(bottle, scale, 4_000, at)
        assert (refused.value.code, refused.value.field) == (code, "happened_at")


def test_without_a_tare_a_scale_cannot_tell():
    bottle, scale = b.bottle(tare=False), b.scale()
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, 4_000, b.after(0))
    assert refused.value.code == "no tare"


def test_a_bottle_retired_meanwhile_is_not_weighed():
    bottle, scale = b.bottle(), b.scale()
    type(bottle).objects.filter(pk=bottle.pk).update(retired_at=b.after(1))
    with pytest.raises(Refusal) as refused:
        b.weigh(bottle, scale, 4_000, b.after(2))
    assert refused.value.code == "retired"


def test_a_form_that_arrives_twice_weighs_once():
    bottle, scale, key = b.bottle(), b.scale(), b.key()
    form = {"key": key, "person": None, "bottle": bottle, "scale": scale, "gross": b.grams(b.TARE_G + 4_000)}
    weighing.weigh(**form)
    with pytest.raises(AlreadyDone):
        weighing.weigh(**form)
    assert (Weighing.objects.count(), b.holds(bottle)) == (1, 4_000)
