"""Managers add people, give roles, passwords, badges and codes; the last manager stays."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client

from shop.base.errors import AlreadyDone, NotAllowed, Refusal, Stale
from shop.base.models import Act
from shop.base.permissions import Role
from shop.people import services
from shop.people.models import User
from tests.conftest import PASSWORD
from tests.factories import UserFactory

pytestmark = pytest.mark.django_db


def added(manager: User, **what: Any) -> User:
    usual = {"name": "Ines Aldermoor", "sign_in": "Ines A", "roles": [Role.TECHNICIAN], "password": "valve-open-4"}
    return services.add_person(person=manager, key=uuid.uuid4(), **usual | what)


def changed(manager: User, who: User, **what: Any) -> None:
    usual = {
        "version": who.version, "name": who.name, "sign_in": who.sign_in_name, "roles": who.roles, "active": who.is_active,
    }  # fmt: skip
    services.change_person(person=manager, key=uuid.uuid4(), who=who, **usual | what)


def test_someone_added_can_sign_in_with_the_roles_given(manager: User) -> None:
    one = added(manager, roles=[Role.TECHNICIAN, Role.FRONT_DESK])
    door = Client().post("/sign-in", {"name": "Ines A", "password": "valve-open-4"})
    assert door.status_code == 302
    assert one.roles == {Role.TECHNICIAN, Role.FRONT_DESK}
    act = Act.objects.get(code="person.added")
    assert act.person == manager
    assert "Ines" not in str(act.changes)  # acts hold no names


@pytest.mark.parametrize(
    ("what", "code"),
    [
        ({"roles": []}, "no role"),
        ({"password": "12345678"}, "password"),
        ({"password": "short"}, "password"),
        ({"password": "ines.aldermoor"}, "password"),
    ],
)
def test_what_would_not_work_or_not_hold_is_refused(what: dict[str, Any], code: str, manager: User) -> None:
    if what.get("password") == "ines.aldermoor":
        what = what | {"sign_in": "ines.aldermoor"}
    with pytest.raises(Refusal) as refused:
        added(manager, **what)
    assert refused.value.code == code
    assert User.objects.count() == 1


def test_two_people_never_share_a_sign_in_name_whatever_its_case(manager: User) -> None:
    added(manager)
    with pytest.raises(Refusal) as refused:
        added(manager, sign_in="INES A")
    assert refused.value.code == "sign-in name taken"


def test_the_same_form_adds_one_person(manager: User) -> None:
    key = uuid.uuid4()
    who = {"name": "Ines", "sign_in": "ines", "roles": [Role.TECHNICIAN], "password": "valve-open-4"}
    services.add_person(person=manager, key=key, **who)
    with pytest.raises(AlreadyDone):
        services.add_person(person=manager, key=key, **who)
    assert User.objects.count() == 2


@pytest.mark.parametrize("what", [{"active": False}, {"roles": [Role.FRONT_DESK]}])
def test_the_last_manager_who_may_sign_in_stays_one(what: dict[str, Any], manager: User) -> None:
    UserFactory(is_manager=True, is_active=False)  # no help: may not sign in
    with pytest.raises(NotAllowed) as refused:
        changed(manager, manager, **what)
    assert refused.value.code == "last manager"
    manager.refresh_from_db()
    assert Role.MANAGER in manager.roles


def test_of_two_managers_one_may_go(manager: User) -> None:
    other = added(manager, roles=[Role.MANAGER])
    changed(other, manager, roles=[Role.FRONT_DESK])
    with pytest.raises(NotAllowed):
        changed(other, other, active=False)


def test_a_change_made_meanwhile_is_shown_in_the_words_of_the_form(manager: User) -> None:
    one = added(manager)
    changed(manager, one, roles=[Role.FRONT_DESK])
    with pytest.raises(Stale) as stale:
        changed(manager, one, version=1, name="Ines Alder", roles=[Role.TECHNICIAN])
    assert stale.value.theirs == {"name": "Ines Aldermoor", "roles": "front desk"}
    assert stale.value.version == 2


def test_a_page_keeps_both_texts_and_saves_the_second_when_asked_again(
    manager: User, client_of: Callable[..., Client]
) -> None:
    one = added(manager)
    client = client_of(manager)
    form = client.get(f"/people/{one.pk}").context["form"]
    changed(manager, one, name="Ines Alder")
    typed = {"form_key": str(uuid.uuid4()), "version": form["version"].value(), "name": "I. Aldermoor", "sign_in": "ines.a",
             "roles": ["technician"], "active": "on"}  # fmt: skip
    answer = client.post(f"/people/{one.pk}", typed)
    assert answer.status_code == 409
    again = answer.context["form"]
    assert again["name"].value() == "I. Aldermoor" and "Ines Alder" in str(again["name"].errors)
    second = client.post(f"/people/{one.pk}", typed | {"version": again.data["version"], "form_key": str(uuid.uuid4())})
    assert second.status_code == 302
    one.refresh_from_db()
    assert one.name == "I. Aldermoor"


def test_a_badge_or_code_is_known_by_its_digest_only(manager: User) -> None:
    one = added(manager)
    services.set_badge(person=manager, key=uuid.uuid4(), who=one, badge="TAG-000417 ")
    services.set_code(person=manager, key=uuid.uuid4(), who=one, code="4071")
    assert services.identify("tag-000417") == one and services.identify("4071") == one
    one.refresh_from_db()
    assert "4071" not in (one.code_digest or "") and len(one.code_digest or "") == 64
    assert not Act.objects.filter(changes__icontains="4071").exists()
    services.set_code(person=manager, key=uuid.uuid4(), who=one, code="")
    assert services.identify("4071") is None


@pytest.mark.parametrize("code", ["123", "123456789", "4a71", "4444", "1234", "9876", "٤٠٧١", "-407"])
def test_a_code_that_anybody_would_try_is_refused(code: str, manager: User) -> None:
    with pytest.raises(Refusal) as refused:
        services.set_code(person=manager, key=uuid.uuid4(), who=manager, code=code)
    assert refused.value.code == "code too plain"


def test_one_text_is_one_person_as_badge_and_as_code(manager: User) -> None:
    one = added(manager)
    services.set_code(person=manager, key=uuid.uuid4(), who=one, code="407139")
    with pytest.raises(Refusal) as refused:
        services.set_badge(person=manager, key=uuid.uuid4(), who=manager, badge="407139")
    assert refused.value.code == "badge taken"


def test_a_new_password_ends_what_was_open_with_the_old_one(manager: User, client_of: Callable[..., Client]) -> None:
    one = added(manager)
    client = Client()
    client.post("/sign-in", {"name": "ines.a", "password": "valve-open-4"})
    assert client.get("/bay").status_code == 200
    form = {"form_key": str(uuid.uuid4()), "new_password": "valve-shut-5"}
    assert client_of(manager).post(f"/people/{one.pk}/password", form).status_code == 302
    assert client.get("/bay").status_code == 302
    one.refresh_from_db()
    assert one.check_password("valve-shut-5")


def test_one_changes_ones_own_password_and_stays_in(front_desk: User, client_of: Callable[..., Client]) -> None:
    client = client_of(front_desk)
    typed = {"old_password": "no", "new_password": "valve-shut-5", "again": "valve-shut-5"}
    assert client.post("/me/password", typed | {"form_key": str(uuid.uuid4())}).status_code == 409
    typed["old_password"] = PASSWORD
    other = client.post("/me/password", typed | {"again": "else", "form_key": str(uuid.uuid4())})
    assert other.status_code == 422
    assert client.post("/me/password", typed | {"form_key": str(uuid.uuid4())}).status_code == 302
    assert client.get("/me").status_code == 200
    front_desk.refresh_from_db()
    assert front_desk.check_password("valve-shut-5")


def test_ones_own_units_hold_on_ones_own_pages(front_desk: User, client_of: Callable[..., Client]) -> None:
    client = client_of(front_desk)
    client.post("/me/units", {"form_key": str(uuid.uuid4()), "units": "metric"})
    front_desk.refresh_from_db()
    assert front_desk.units == "metric"


def test_at_an_open_counter_each_says_who_they_are(front_desk: User, manager: User) -> None:
    services.set_code(person=manager, key=uuid.uuid4(), who=manager, code="4071")
    client = Client()
    client.post("/sign-in", {"name": front_desk.sign_in_name, "password": PASSWORD, "shared_counter": "on"})
    typed = {"name": "Quill Garage"}
    assert client.post("/customers/new", typed | {"form_key": str(uuid.uuid4())}).status_code == 422
    wrong = client.post("/customers/new", typed | {"form_key": str(uuid.uuid4()), "who": "9999"})
    assert wrong.status_code == 409
    assert client.post("/customers/new", typed | {"form_key": str(uuid.uuid4()), "who": "4071"}).status_code == 302
    assert Act.objects.get(code="customer.added").person == manager


def test_at_an_open_counter_nobody_changes_anothers_settings(front_desk: User, manager: User) -> None:
    services.set_code(person=manager, key=uuid.uuid4(), who=manager, code="4071")
    client = Client()
    client.post("/sign-in", {"name": front_desk.sign_in_name, "password": PASSWORD, "shared_counter": "on"})
    answer = client.post("/me/units", {"form_key": str(uuid.uuid4()), "units": "metric", "who": "4071"})
    assert answer.status_code == 409
    manager.refresh_from_db()
    assert manager.units == ""
