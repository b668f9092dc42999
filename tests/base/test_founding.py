"""The first opening: a shop of one's own from flags, or the invented one."""

import pytest

from shop.base import jobs
from shop.base.datafolder import CannotOpen
from shop.base.founding import QUESTIONS, new_password
from shop.base.management.commands.open import _found
from shop.base.models import Job, Shop
from shop.people.models import User

pytestmark = pytest.mark.django_db

OWN = {
    "demo": False, "shop_name": " Ardenbeck Race Works ", "country": "adr", "units": "metric",
    "time_zone": "Europe/Warsaw", "height_m": "-12", "manager": "Pat Manager",
}  # fmt: skip
DEMO = {"demo": True} | {question.option: None for question in QUESTIONS}


@pytest.fixture(autouse=True)
def _filler(monkeypatch):
    jobs._kinds()
    monkeypatch.setitem(jobs._handlers, "demo.fill", lambda running: None)


def test_flags_found_the_shop_and_its_first_manager_signs_in_by_what_was_printed(monkeypatch, capsys):
    monkeypatch.delenv("TAREBOOK_MANAGER_PASSWORD", raising=False)
    ((role, name, password),) = _found(OWN, print)
    shop, manager = Shop.objects.get(), User.objects.get()
    assert (shop.name, shop.country, shop.units) == ("Ardenbeck Race Works", "ADR", "metric")
    assert (shop.time_zone, shop.height_m) == ("Europe/Warsaw", -12)
    assert (role, name) == ("manager", manager.sign_in_name)
    assert manager.is_manager
    assert manager.check_password(password)
    assert not Job.objects.exists()
    assert _found(OWN, print) == []  # there is a shop now: nothing is asked, changed or printed
    assert capsys.readouterr().out == ""


def test_the_managers_password_can_come_from_the_environment(monkeypatch):
    monkeypatch.setenv("TAREBOOK_MANAGER_PASSWORD", "short")
    with pytest.raises(CannotOpen):
        _found(OWN, print)
    monkeypatch.setenv("TAREBOOK_MANAGER_PASSWORD", "long enough to keep")
    _found(OWN, print)
    assert User.objects.get().check_password("long enough to keep")


def test_the_demo_asks_for_its_filling_once_and_prints_its_people_once(capsys):
    printed = _found(DEMO, print)
    assert Job.objects.get().kind == "demo.fill"
    assert len(printed) >= 3
    for _, name, password in printed:
        assert User.objects.get(sign_in_name=name).check_password(password)
    assert _found(DEMO, print) == []
    assert Job.objects.count() == 1
    assert capsys.readouterr().out == ""


def test_a_shop_of_ones_own_is_not_filled_with_the_demo(capsys):
    _found(OWN, print)
    assert _found(DEMO, print) == []
    assert not Job.objects.exists()
    assert "demo stays out" in capsys.readouterr().out


def test_the_demo_takes_country_and_units_but_no_name():
    with pytest.raises(CannotOpen):
        _found(DEMO | {"manager": "Pat"}, print)
    assert not Shop.objects.exists()
    _found(DEMO | {"country": "ca", "units": "metric", "height_m": "10"}, print)
    shop = Shop.objects.get()
    assert (shop.country, shop.units, shop.height_m) == ("CA", "metric", 10)


def test_passwords_that_are_made_differ_and_hold_no_letters_that_look_alike():
    made = {new_password() for _ in range(200)}
    assert len(made) == 200
    assert not set("".join(made)) & set("ilo01")
