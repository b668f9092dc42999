"""What a dip tube doesn't reach is written down once, kept as typed, shown on the bottle's page."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client

from bottles.models import Bottle
from shop.base.models import Shop
from shop.people.models import User
from tests import factories

pytestmark = pytest.mark.django_db


@pytest.fixture
def bottle(shop: Shop) -> Bottle:
    made = factories.BottleFactory(code="S-07", capacity_ml=29_000, capacity_typed="29 L", dip_tube="dip", use="supply")
    factories.owned(made)
    factories.placed(made)
    return made


@pytest.fixture
def save(front_desk: User, client_of: Callable[[User], Client], bottle: Bottle) -> Callable[..., Any]:
    client = client_of(front_desk)

    def post(**typed: str) -> Any:
        shown = client.get(f"/b/{bottle.code}/edit").context["form"]
        held = {name: shown[name].value() for name in shown.fields if shown[name].value() not in (None, False, [])}
        return client.post(f"/b/{bottle.code}/edit", held | {"form_key": str(uuid.uuid4())} | typed)

    return post


@pytest.mark.parametrize(("typed", "stored"), [("60 mL", 60), ("0.06", 60), ("0 mL", 0), ("3.66 in3", 60)])
def test_it_is_kept_as_typed_and_shown_with_its_origin(
    save: Callable[..., Any], bottle: Bottle, typed: str, stored: int, front_desk: User, client_of: Callable[[User], Client]
) -> None:
    # 3.66 in3 × 16.387064 mL = 59.98 mL (NIST SP 811, appendix B.8)
    assert save(below_tube=typed).status_code == 302
    bottle.refresh_from_db()
    assert (bottle.below_tube_ml, bottle.below_tube_typed) == (stored, typed)
    page = client_of(front_desk).get(f"/b/{bottle.code}").content.decode()
    assert f"{stored} mL, entered as “{typed}”" in page
    assert save().status_code == 302  # what the form shows saves the same again
    bottle.refresh_from_db()
    assert (bottle.below_tube_ml, bottle.below_tube_typed) == (stored, typed)


def test_left_empty_it_is_not_known(save: Callable[..., Any], bottle: Bottle) -> None:
    save(below_tube="60 mL")
    assert save(below_tube="").status_code == 302
    bottle.refresh_from_db()
    assert (bottle.below_tube_ml, bottle.below_tube_typed) == (None, "")


@pytest.mark.parametrize(
    ("typed", "code"),
    [
        ({"below_tube": "60 mL", "dip_tube": "none"}, "no dip tube"),
        ({"below_tube": "60 mL", "dip_tube": "unknown"}, "no dip tube"),
        ({"below_tube": "14.5 L"}, "below tube too much"),
        ({"below_tube": "some"}, "not_a_number"),
        ({"below_tube": "60 g"}, "other_kind"),
        ({"below_tube": "-60 mL"}, "negative"),
    ],
)
def test_what_cant_be_has_its_sentence(save: Callable[..., Any], bottle: Bottle, typed: dict[str, str], code: str) -> None:
    answer = save(**typed)
    assert answer.status_code in (409, 422)
    assert [error.code for error in answer.context["form"].errors.as_data()["below_tube"]] == [code]
    bottle.refresh_from_db()
    assert bottle.below_tube_ml is None


def test_a_new_bottle_takes_it_too(shop: Shop, front_desk: User, client_of: Callable[[User], Client]) -> None:
    answer = client_of(front_desk).post(
        "/bottles/register",
        {
            "form_key": str(uuid.uuid4()), "serial": "77001", "mark": "DOT-3AA2015", "test_stamp": "06/2025", "capacity": "29 L",
            "capacity_basis": "stamped", "tare": "33.5 kg", "tare_basis": "stamped", "owner": "shop", "use": "supply",
            "dip_tube": "dip", "below_tube": "80 mL",
        },
    )  # fmt: skip
    assert answer.status_code == 302, answer.context["form"].errors
    assert Bottle.objects.get().below_tube_ml == 80
