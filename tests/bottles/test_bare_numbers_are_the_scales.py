"""A bare number read off a scale is in that scale's own unit, on every page, whatever the person reads."""

from __future__ import annotations

from typing import Any

import pytest
from django.urls import reverse

from bottles.models import Refill, ScaleCheck, Weighing
from tests import factories
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db(transaction=True)

# What each scale shows of 6,720 g (6.72 kg; 14.815 lb; 14 lb 13.04 oz) and of 10,720 g (23.634 lb; 23 lb 10.1 oz), and
# what is understood: 14.82 lb = 6,722 g, 23.63 lb = 10,718 g, 14-13 = 6,719 g, 23-10 = 10,716 g (1 lb = 453.59237 g,
# NIST SP 811).
SHOWN = {
    "kg": (("6.72", 6_720), ("10.72", 10_720)),
    "g": (("6720", 6_720), ("10720", 10_720)),
    "lb": (("14.82", 6_722), ("23.63", 10_718)),
    "lb oz": (("14-13", 6_719), ("23-10", 10_716)),
}
UNITS = ("us", "metric")


@pytest.fixture(params=UNITS)
def desk(request: pytest.FixtureRequest, shop: Any, front_desk: Any, client_of: Any) -> Any:
    front_desk.units = request.param
    front_desk.save()
    return client_of(front_desk)


@pytest.fixture(params=SHOWN)
def works(request: pytest.FixtureRequest, shop: Any, front_desk: Any) -> Works:
    found = Works(shop, front_desk)
    found.scale.style = request.param
    found.scale.save()
    return found


def readings(works: Works, **more: str) -> dict[str, str]:
    return {
        "form_key": str(key()), "supply": str(works.supply.pk), "gauge": "49.5 bar", "supply_temperature": "20 °C", "taken": "wall",
        "bottle_temperature": "-12 °C", "bottle_taken": "wall", "start": "weighed", "method": "chilled", "look_all": "on",
    } | more  # fmt: skip


def test_a_refill_is_opened_and_weighed_in_the_scales_own_unit(desk: Any, works: Works) -> None:
    (before, before_g), (after, after_g) = SHOWN[works.scale.style]
    fill = reverse("bottles:fill", args=[works.bottle.code])
    assert "a bare number is in" in desk.get(fill).context["form"].fields["bottle_weight"].help_text
    answer = desk.post(fill, readings(works, bottle_weight=before))
    assert answer.status_code == 302, answer.context["form"].errors
    refill = Refill.objects.get()
    assert Weighing.objects.get(step="before").gross_g == before_g
    weigh = {"form_key": str(key()), "gross": after, "line": "off"}
    assert desk.post(reverse("bottles:refill", args=[refill.pk]), weigh).status_code == 302
    assert Weighing.objects.get(step="disconnected").gross_g == after_g


def test_going_on_from_another_supply_weighs_in_the_scales_own_unit(desk: Any, works: Works) -> None:
    other, refill = works.connected("S-08"), works.open()
    after, after_g = SHOWN[works.scale.style][1]
    typed = readings(works, supply=str(other.pk), gross=after, line="off", version=str(refill.version))
    answer = desk.post(reverse("bottles:refill_supply", args=[refill.pk]), typed)
    assert answer.status_code == 302, answer.context["form"].errors
    assert Weighing.objects.filter(refill=refill).latest("id").gross_g == after_g


def test_the_supplys_own_scale_says_its_own_unit(desk: Any, works: Works) -> None:
    works.station.supply_scale = factories.ScaleFactory(style="g")
    works.station.save()
    works.check(works.station.supply_scale)
    before = SHOWN[works.scale.style][0][0]
    fill = reverse("bottles:fill", args=[works.bottle.code])
    answer = desk.post(fill, readings(works, bottle_weight=before, supply_weight="48500"))
    assert answer.status_code == 302, answer.context["form"].errors
    assert Weighing.objects.filter(bottle=works.supply.bottle).latest("id").gross_g == 48_500


def test_the_days_check_is_read_in_the_scales_own_unit(desk: Any, works: Works) -> None:
    works.station.scale = factories.ScaleFactory(name="scale C", style=works.scale.style)
    works.station.save()
    shown = SHOWN[works.scale.style][0]
    typed = readings(works, bottle_weight=shown[0], check_known=shown[0], check_read=shown[0])
    assert desk.post(reverse("bottles:fill", args=[works.bottle.code]), typed).status_code == 302
    check = ScaleCheck.objects.get(scale=works.station.scale)
    assert (check.known_g, check.read_g) == (shown[1], shown[1])


def test_a_bottle_is_weighed_and_struck_in_the_scales_own_unit(desk: Any, works: Works) -> None:
    (first, first_g), (right, right_g) = SHOWN[works.scale.style]
    typed = {"form_key": str(key()), "scale": works.scale.pk, "gross": first, "step": "stored"}
    assert desk.post(reverse("bottles:weigh", args=[works.bottle.code]), typed).status_code == 302
    row = Weighing.objects.latest("id")
    assert row.gross_g == first_g
    strike = {"form_key": str(key()), "reason": "mistyped", "right": right}
    assert desk.post(reverse("bottles:strike_weighing", args=[row.pk]), strike).status_code == 302
    assert Weighing.objects.latest("id").gross_g == right_g
