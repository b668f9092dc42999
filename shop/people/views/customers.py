"""The book of customers: the list, and what is recorded of one."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from shop.base import clock
from shop.base.paging import page_of
from shop.base.permissions import DESK, EVERYONE, allow
from shop.people import selectors, services
from shop.people.acting import ActView
from shop.people.forms.customers import ConsentForm, CustomerForm
from shop.people.models import Customer, User

LONGEST_SEARCH = 120


@allow(EVERYONE)
def customers(request: HttpRequest) -> HttpResponse:
    """Customers in order of name, or those that a text finds."""
    text = request.GET.get("q", "").replace("\0", "").strip()[:LONGEST_SEARCH]
    page = page_of(request, selectors.customers(text).values_list("pk", "name", "phone", "email"))
    rows = [
        {"url": reverse("rooms:customer", args=[pk]), "name": name, "phone": phone, "email": email}
        for pk, name, phone, email in page
    ]
    context = {"page": page, "rows": rows, "query_text": text, "may_add": bool(DESK & request.user.roles)}  # type: ignore[union-attr]
    return render(request, "people/customers.html", context)


class CustomerNew(ActView):
    """Add a customer."""

    roles = DESK
    form_class = CustomerForm
    heading = "Add a customer"
    submit = "Add"
    said = "Added."

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("people:customers")}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        new = services.add_customer(
            person=person, key=key, name=typed["name"], phone=typed["phone"], email=typed["email"], note=typed["note"]
        )
        return reverse("rooms:customer", args=[new.pk])

    def first_page(self, act: Any) -> str:
        """The act holds no name, but the form that came twice does."""
        name = self.request.POST.get("name", "").strip()
        pk = Customer.objects.filter(name=name).order_by("-pk").values_list("pk", flat=True).first()
        return reverse("rooms:customer", args=[pk]) if pk else reverse("people:customers")


class OfCustomer(ActView):
    """What the pages about one customer share."""

    roles = DESK
    customer: Customer

    def find(self, **kwargs: Any) -> None:
        found = Customer.objects.filter(pk=kwargs["pk"], erased_at__isnull=True).first()
        if found is None:
            raise Http404
        self.customer = found

    def home(self) -> str:
        return reverse("rooms:customer", args=[self.customer.pk])

    def first_page(self, act: Any) -> str:
        return self.home()

    def context(self) -> dict[str, Any]:
        return {"back_url": self.home()}


class CustomerChange(OfCustomer):
    """Change what is written of a customer."""

    roles = DESK
    form_class = CustomerForm
    heading = "Change a customer"

    def initial(self) -> dict[str, Any]:
        one = self.customer
        return {"version": one.version, "name": one.name, "phone": one.phone, "email": one.email, "note": one.note}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        services.change_customer(
            person=person, key=key, customer=self.customer, version=typed["version"] or 0, name=typed["name"],
            phone=typed["phone"], email=typed["email"], note=typed["note"],
        )  # fmt: skip
        return self.home()


class ConsentNew(OfCustomer):
    """Write down what a customer said."""

    roles = DESK
    form_class = ConsentForm

    def initial(self) -> dict[str, Any]:
        return {"purpose": self.request.GET.get("purpose", ""), "on": clock.today(self.shop)}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Consent of {self.customer.name}"}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        services.record_consent(
            person=person, key=key, customer=self.customer, purpose=typed["purpose"], given=typed["given"],
            on=typed["on"], today=clock.today(self.shop), how=typed["how"],
        )  # fmt: skip
        return self.home()
