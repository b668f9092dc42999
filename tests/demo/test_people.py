"""Who signs in to the invented shop."""

from datetime import date

import pytest

from shop.base.founding import new_password
from shop.base.models import Policy, Shop
from shop.demo import people
from shop.demo.people import WORKERS, demo_people
from shop.people.models import User
from shop.people.services import identify

pytestmark = pytest.mark.django_db
DAY = date(2026, 12, 1)


def numbered():
    passwords = iter(f"password-no-{number}" for number in range(100))
    return lambda: next(passwords)


def test_each_role_signs_in_with_what_is_told():
    told = demo_people(today=DAY, password=numbered())
    assert [roles for roles, _, _ in told][:3] == ["front desk", "technician", "manager"]
    assert sum(" and " in roles for roles, _, _ in told) == 2
    for _, name, password in told:
        assert User.objects.get(sign_in_name=name).check_password(password)


def test_each_short_code_says_who():
    demo_people(today=DAY, password=numbered())
    for worker in WORKERS:
        assert identify(worker.code) == User.objects.get(sign_in_name=worker.sign_in)


def test_passwords_are_made_anew_where_none_are_given():
    told = demo_people(today=DAY)
    passwords = {password for _, _, password in told}
    assert len(passwords) == len(told)
    assert all(len(password) >= len(new_password()) for password in passwords)


def test_cut_off_before_the_shop_it_is_gone_through_again(monkeypatch):
    class Killed(BaseException):
        pass

    def killed(**values):
        raise Killed

    with monkeypatch.context() as patch:
        patch.setattr(people, "found_shop", killed)
        with pytest.raises(Killed):
            demo_people(today=DAY, password=numbered())
    assert not Shop.objects.exists()
    told = demo_people(today=DAY, password=numbered())
    assert User.objects.count() == len(told) == len(WORKERS)
    assert User.objects.get(sign_in_name=told[0][1]).check_password(told[0][2])


@pytest.mark.parametrize(("country", "units"), [("US", "us"), ("CA", "metric"), ("ADR", "metric")])
def test_the_shop_stands_in_the_country_asked_for(country, units):
    demo_people(country=country, today=DAY, password=numbered())
    shop = Shop.objects.get()
    assert (shop.country, shop.units) == (country, units)
    assert Policy.objects.get().effective_from < DAY


def test_what_flags_say_goes_before_the_countrys_usual():
    demo_people(country="US", units="metric", time_zone="America/Denver", height_m=1600, today=DAY, password=numbered())
    shop = Shop.objects.get()
    assert (shop.units, shop.time_zone, shop.height_m) == ("metric", "America/Denver", 1600)
