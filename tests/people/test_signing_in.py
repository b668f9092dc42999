"""Nobody gets in without a password, and what was typed survives a sign-in that ran out."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from shop.base.models import Act
from shop.people import kept
from shop.people.models import Customer
from tests.conftest import PASSWORD

pytestmark = pytest.mark.django_db
HERE = {"HTTP_ORIGIN": "http://testserver"}


def sign_in(client: Client, name: str, password: str = PASSWORD, **more: Any) -> Any:
    return client.post(reverse("people:sign_in"), {"name": name, "password": password} | more)


@pytest.mark.parametrize(
    ("roles", "room"),
    [
        (("front_desk",), "/counter"),
        (("technician",), "/bay"),
        (("manager",), "/office"),
        (("manager", "technician"), "/bay"),
        (("front_desk", "manager"), "/counter"),
    ],
)
def test_each_lands_in_their_own_room(roles: tuple[str, ...], room: str, make_user: Callable[..., Any]) -> None:
    make_user(*roles, name="mara.k")
    client = Client()
    assert sign_in(client, "mara.k")["Location"] == room
    assert client.get("/")["Location"] == room


def test_the_name_may_be_written_as_people_write_it(make_user: Callable[..., Any]) -> None:
    make_user("front_desk", name="mara.k")
    assert sign_in(Client(), "  Mara K ")["Location"] == "/counter"


def test_a_wrong_password_stays_at_the_door_and_keeps_the_name(make_user: Callable[..., Any]) -> None:
    make_user("front_desk", name="mara.k")
    answer = sign_in(Client(), "mara.k", "wrong")
    assert answer.status_code == 422
    assert answer.context["form"]["name"].value() == "mara.k"
    assert b"wrong" not in answer.content.split(b"<main")[1]


def test_whoever_may_not_sign_in_any_more_is_out_at_once(front_desk: Any, client_of: Callable[..., Client]) -> None:
    client = client_of(front_desk)
    assert client.get("/counter").status_code == 200
    front_desk.is_active = False
    front_desk.save()
    assert client.get("/counter").status_code == 302
    assert sign_in(Client(), front_desk.sign_in_name).status_code == 422


def test_ten_wrong_passwords_make_one_wait_however_the_name_is_written(make_user: Callable[..., Any]) -> None:
    make_user("front_desk", name="mara.k")
    client = Client()
    for turn in range(10):
        answer = sign_in(client, "mara.k" if turn % 2 else "Mara K", "wrong")
    assert answer.status_code == 429
    assert sign_in(client, "mara.k").status_code == 429  # the right one doesn't help now
    assert "_auth_user_id" not in client.session


@pytest.mark.parametrize(
    "onward", ["https://elsewhere.example/", "//elsewhere.example", "javascript:alert(1)", "/\\elsewhere"]
)
def test_nobody_is_sent_elsewhere(onward: str, front_desk: Any) -> None:
    assert sign_in(Client(), front_desk.sign_in_name, next=onward)["Location"] == "/counter"


def test_one_goes_on_to_the_page_that_was_asked_for(front_desk: Any) -> None:
    client = Client()
    door = client.get("/customers?page=2")["Location"]
    form = client.get(door).context["form"]
    assert form.initial["next"] == "/customers?page=2"
    assert sign_in(client, front_desk.sign_in_name, next=form.initial["next"])["Location"] == "/customers?page=2"


def test_signing_out_takes_a_post_and_ends_the_session(front_desk: Any, client_of: Callable[..., Client]) -> None:
    client = client_of(front_desk)
    assert client.get(reverse("people:sign_out")).status_code == 405
    assert client.post(reverse("people:sign_out"))["Location"] == reverse("people:sign_in")
    assert client.get("/counter").status_code == 302


def test_what_was_typed_comes_back_after_signing_in(front_desk: Any) -> None:
    client = Client()
    typed = {"name": "Quill Garage", "phone": "555 0101", "form_key": "5f0c1c4e-58f4-4e0e-9d3e-0b8d1a1d8a11"}
    answer = client.post("/customers/new?from=counter", typed)
    assert answer.status_code == 401
    assert not Customer.objects.exists()
    packed = answer.context["form"].initial["kept"]
    back = sign_in(client, front_desk.sign_in_name, kept=packed)["Location"]
    assert back == "/customers/new?from=counter"
    page = client.get(back)
    assert page.context["form"]["name"].value() == "Quill Garage"
    assert page.context["form"]["phone"].value() == "555 0101"
    assert not Customer.objects.exists()  # coming back saves nothing
    key = page.context["form"]["form_key"].value()
    assert key != typed["form_key"]
    client.post(back, {"name": "Quill Garage", "form_key": key})
    assert Customer.objects.get().name == "Quill Garage"
    assert client.get(back).context["form"]["name"].value() is None  # given back once


def test_a_packet_that_someone_else_made_is_not_taken(front_desk: Any) -> None:
    client = Client()
    assert sign_in(client, front_desk.sign_in_name, kept="made:up:packet")["Location"] == "/counter"
    assert "kept" not in client.session


def test_passwords_and_codes_do_not_travel(rf: Any) -> None:
    request = rf.post("/x", dict.fromkeys(sorted(kept.NOT_KEPT), "secret") | {"name": "kept"})
    request.session = {}
    kept.put(request, kept.pack(request), why="signed out")
    assert request.session["kept"]["data"] == "name=kept"


def test_a_part_of_a_page_is_not_answered_with_a_whole_door() -> None:
    answer = Client().get("/find/matches?q=T", headers={"HX-Request": "true"})
    assert answer.status_code == 401
    assert b"<h1" not in answer.content


def stale(front_desk: Any) -> Client:
    client = Client(enforce_csrf_checks=True)
    client.force_login(front_desk, backend="django.contrib.auth.backends.ModelBackend")
    client.get("/customers/new")
    return client


def test_a_stale_token_saves_nothing_and_gives_back_what_was_typed(front_desk: Any) -> None:
    client = stale(front_desk)
    key = "5f0c1c4e-58f4-4e0e-9d3e-0b8d1a1d8a12"
    answer = client.post(
        "/customers/new", {"name": "Verhoeven", "form_key": key, "csrfmiddlewaretoken": "x" * 64}, **HERE
    )
    assert (answer.status_code, answer["Location"]) == (302, "/customers/new")
    assert not Customer.objects.exists() and not Act.objects.filter(key=key).exists()
    page = client.get("/customers/new")
    assert page.context["form"]["name"].value() == "Verhoeven"
    token = re.search(rb'name="csrfmiddlewaretoken" value="(\w+)"', page.content.split(b"<main")[1])
    assert token
    again = {"name": "Verhoeven", "form_key": page.context["form"]["form_key"].value()}
    assert client.post("/customers/new", again | {"csrfmiddlewaretoken": token[1].decode()}, **HERE).status_code == 302
    assert Customer.objects.count() == 1


@pytest.mark.parametrize("headers", [{}, {"HTTP_ORIGIN": "https://elsewhere.example"}, {"HTTP_ORIGIN": "null"}])
def test_a_form_from_elsewhere_is_neither_taken_nor_shown(headers: dict[str, str], front_desk: Any) -> None:
    client = stale(front_desk)
    answer = client.post("/customers/new", {"name": "planted"}, **headers)
    assert answer.status_code == 403
    assert client.get("/customers/new").context["form"]["name"].value() is None


def test_a_stale_door_asks_for_the_password_again(front_desk: Any) -> None:
    client = Client(enforce_csrf_checks=True)
    answer = client.post("/sign-in", {"name": front_desk.sign_in_name, "password": PASSWORD, "next": "/bay"}, **HERE)
    assert answer.status_code == 403
    assert answer.context["form"].initial["next"] == "/bay"
    assert PASSWORD.encode() not in answer.content
