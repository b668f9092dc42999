"""A new shop's Office says what to do before the first fill."""

from __future__ import annotations

from typing import Any

import pytest
from django.urls import reverse

from tests import factories

pytestmark = pytest.mark.django_db


def steps_of(client: Any) -> dict[str, bool]:
    found = client.get(reverse("rooms:office")).context["first_steps"]
    return {step["url"]: bool(step["done"]) for step in found}


def test_a_new_shop_is_led_through_what_it_needs(shop: Any, manager: Any, client_of: Any) -> None:
    client = client_of(manager)
    assert steps_of(client)[reverse("rooms:places")] is False
    factories.PlaceFactory()
    told = steps_of(client)
    assert told[reverse("rooms:places")] is True and told[reverse("bottles:scales")] is False
    assert all(client.get(url).status_code == 200 for url in told)


def test_a_shop_that_has_filled_isnt_led_any_more(shop: Any, manager: Any, client_of: Any) -> None:
    factories.RefillFactory()
    assert steps_of(client_of(manager)) == {}
