"""The book of customers: added, changed, found by name, and what each said."""

from __future__ import annotations

import uuid
from collections.abc import Callable
from datetime import date
from typing import Any

import pytest
from django import forms
from django.test import Client
from django.utils import timezone

from shop.base.errors import NotReady, Refusal, Stale
from shop.base.models import Act
from shop.people import selectors, services
from shop.people.fields import CustomerField
from shop.people.models import Consent, Customer, User
from tests.factories import ConsentFactory, CustomerFactory

pytestmark = pytest.mark.django_db


def test_an_act_about_a_customer_holds_no_name_or_address(front_desk: User) -> None:
    one = services.add_customer(person=front_desk, key=uuid.uuid4(), name="Ostrander", phone="555 0100")
    services.change_customer(
        person=front_desk,
        key=uuid.uuid4(),
        customer=one,
        version=1,
        name="Ostrander Racing",
        phone="555 0111",
        email="",
        note="",
    )
    one.refresh_from_db()
    assert (one.name, one.version) == ("Ostrander Racing", 2)
    held = "".join(str(act.changes) + act.subject for act in Act.objects.all())
    assert "Ostrander" not in held and "555" not in held


def test_two_who_change_one_customer_lose_nothing_unseen(front_desk: User) -> None:
    one = CustomerFactory(name="Ostrander")
    change = {"person": front_desk, "customer": one, "version": 1, "email": "", "note": ""}
    services.change_customer(key=uuid.uuid4(), name="Ostrander", phone="555 0111", **change)
    with pytest.raises(Stale) as stale:
        services.change_customer(key=uuid.uuid4(), name="Ostrander", phone="555 0122", **change)
    assert stale.value.theirs == {"phone": "555 0111"}


def test_the_latest_word_for_a_purpose_holds_by_the_day_it_was_said(shop: Any) -> None:
    one = CustomerFactory()
    assert selectors.has_consent(one.pk, "fill") is None
    ConsentFactory(customer=one, given=False, on=date(2026, 3, 9))
    ConsentFactory(customer=one, given=True, on=date(2026, 3, 2))  # written down later, said earlier
    assert selectors.has_consent(one.pk, "fill") is False
    ConsentFactory(customer=one, given=True, on=date(2026, 3, 9))  # on the same day: the later row
    assert selectors.has_consent(one.pk, "fill") is True
    assert [word.given for word in selectors.consents(one.pk)] == [True, None]


def test_a_word_is_not_said_in_the_future_nor_by_someone_erased(front_desk: User) -> None:
    one = CustomerFactory()
    word = {"person": front_desk, "customer": one, "purpose": "fill", "given": True, "today": date(2026, 3, 2)}
    with pytest.raises(Refusal) as refused:
        services.record_consent(key=uuid.uuid4(), on=date(2026, 3, 3), **word)
    assert refused.value.code == "in the future"
    Customer.objects.filter(pk=one.pk).update(erased_at=timezone.now(), name="")
    with pytest.raises(NotReady):
        services.record_consent(key=uuid.uuid4(), on=date(2026, 3, 2), **word)
    assert not Consent.objects.exists()


def test_a_consent_is_written_down_from_the_customers_page(front_desk: User, client_of: Callable[..., Client]) -> None:
    one = CustomerFactory(name="Ostrander")
    client = client_of(front_desk)
    page = client.get(f"/customers/{one.pk}/consent?purpose=remind")
    form = page.context["form"]
    assert form["purpose"].value() == "remind"
    typed = {
        "form_key": str(uuid.uuid4()),
        "purpose": "remind",
        "given": "no",
        "on": str(form["on"].value()),
        "how": "by phone",
    }
    assert client.post(f"/customers/{one.pk}/consent", typed)["Location"] == f"/customers/{one.pk}"
    assert selectors.has_consent(one.pk, "remind") is False
    assert b"withdrawn" in client.get(f"/customers/{one.pk}").content


def test_a_reload_of_the_form_leads_to_the_customer_it_added(
    front_desk: User, client_of: Callable[..., Client]
) -> None:
    client = client_of(front_desk)
    typed = {"form_key": str(uuid.uuid4()), "name": "Quill Garage"}
    first = client.post("/customers/new", typed)["Location"]
    assert client.post("/customers/new", typed)["Location"] == first
    assert Customer.objects.count() == 1


def test_bad_input_is_refused_beside_its_field(front_desk: User, client_of: Callable[..., Client]) -> None:
    client = client_of(front_desk)
    answer = client.post(
        "/customers/new", {"form_key": str(uuid.uuid4()), "name": "Q", "email": "not one", "phone": "5" * 41}
    )
    assert answer.status_code == 422
    assert {"email", "phone"} == set(answer.context["form"].errors)
    assert answer.context["form"]["email"].value() == "not one"
    assert client.post("/customers/new", {"form_key": "no key", "name": "Q"}).status_code == 422
    assert client.post("/customers/new", {"form_key": str(uuid.uuid4()), "name": "Q\0"}).status_code == 422
    assert not Customer.objects.exists()


def test_the_list_looks_into_name_phone_and_mail_and_turns_pages(
    front_desk: User, client_of: Callable[..., Client]
) -> None:
    CustomerFactory.create_batch(60)
    CustomerFactory(name="Verhoeven", phone="555 0199", email="v@example.org")
    client = client_of(front_desk)
    assert len(client.get("/customers").context["rows"]) == 50
    assert len(client.get("/customers?page=2").context["rows"]) == 11
    for text in ("erhoe", "0199", "V@EXAMPLE"):
        assert [row["name"] for row in client.get("/customers", {"q": text}).context["rows"]] == ["Verhoeven"]
    assert client.get("/customers", {"q": "%"}).context["rows"] == []
    assert client.get("/customers", {"q": "x" * 5000}).status_code == 200


def test_the_list_asks_as_little_of_the_database_for_many_as_for_few(
    front_desk: User, client_of: Callable[..., Client], django_assert_num_queries: Any
) -> None:
    client = client_of(front_desk)
    client.get("/customers")
    for batch in (3, 40):
        CustomerFactory.create_batch(batch)
        with django_assert_num_queries(5):
            client.get("/customers")


def test_a_customer_is_named_in_a_field_as_one_writes_it(shop: Any) -> None:
    quill, first, second = (CustomerFactory(name=name) for name in ("Quill Garage", "Ostrander", "Ostrander"))
    erased = CustomerFactory(name="Gone", erased_at=timezone.now())
    field = CustomerField(required=False)
    assert field.clean("") is None
    assert field.clean("quill garage") == quill
    assert field.clean(" Quill ") == quill  # the only one that begins so
    assert field.clean(f"Ostrander #{second.pk}") == second
    for text, code in (
        ("Ostrander", "several"),
        (f"Ostrander #{quill.pk}", "several"),
        ("Nobody", "unknown"),
        (f"Gone #{erased.pk}", "unknown"),
    ):
        with pytest.raises(forms.ValidationError) as refused:
            field.clean(text)
        assert refused.value.code == code, text
    assert field.prepare_value(first) == f"Ostrander #{first.pk}"
