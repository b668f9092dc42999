"""Managers' pages about the people who sign in."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib.auth import update_session_auth_hash
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from shop.base.paging import page_of
from shop.base.permissions import MANAGERS, ROLE_WORDS, Role, allow
from shop.people import selectors, services
from shop.people.acting import ActView
from shop.people.forms.people import BadgeForm, ChangePersonForm, CodeForm, NewPersonForm, PasswordForm
from shop.people.history import history_of
from shop.people.models import User


@allow(MANAGERS, room="office")
def people(request: HttpRequest) -> HttpResponse:
    """Everyone who signs in, with their roles."""
    page = page_of(request, selectors.people())
    rows = [
        {
            "url": reverse("people:person", args=[one.pk]),
            "name": one.name,
            "sign_in": one.sign_in_name,
            "roles": role_words(one),
            "by": _known_by(one),
            "active": one.is_active,
        }
        for one in page
    ]
    return render(request, "people/people.html", {"page": page, "rows": rows})


class PersonNew(ActView):
    """Add someone."""

    roles = MANAGERS
    room = "office"
    form_class = NewPersonForm
    heading = "Add a person"
    submit = "Add"
    said = "Added. Give them a badge or a short code if they work at an open counter."

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("people:people")}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        new = services.add_person(
            person=person, key=key, name=typed["name"], sign_in=typed["sign_in"], roles=typed["roles"],
            password=typed["password"],
        )  # fmt: skip
        return reverse("people:person", args=[new.pk])

    def first_page(self, act: Any) -> str:
        return reverse("people:people")


class OfPerson(ActView):
    """What the pages about one person share."""

    roles = MANAGERS
    room = "office"
    one: User

    def find(self, **kwargs: Any) -> None:
        found = User.objects.filter(pk=kwargs["pk"]).first()
        if found is None:
            raise Http404
        self.one = found

    def home(self) -> str:
        return reverse("people:person", args=[self.one.pk])

    def first_page(self, act: Any) -> str:
        return self.home()

    def context(self) -> dict[str, Any]:
        return {"one": self.one, "back_url": self.home(), "heading": f"{self.heading} of {self.one.name}"}


class Person(OfPerson):
    """Change who someone is, their roles, whether they may sign in."""

    roles = MANAGERS
    form_class = ChangePersonForm
    template_name = "people/person.html"

    def initial(self) -> dict[str, Any]:
        return {
            "version": self.one.version,
            "name": self.one.name,
            "sign_in": self.one.sign_in_name,
            "roles": [role.value for role in Role if getattr(self.one, f"is_{role.value}")],
            "active": self.one.is_active,
        }

    def context(self) -> dict[str, Any]:
        return {
            "one": self.one,
            "heading": self.one.name,
            "back_url": reverse("people:people"),
            "known_by": _known_by(self.one),
            "acts": history_of(f"person:{self.one.pk}", shop=self.shop),
        }

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        services.change_person(
            person=person, key=key, who=self.one, version=typed["version"] or 0, name=typed["name"],
            sign_in=typed["sign_in"], roles=typed["roles"], active=typed["active"],
        )  # fmt: skip
        return self.home()


class PersonPassword(OfPerson):
    """Give someone a new password."""

    roles = MANAGERS
    form_class = PasswordForm
    heading = "New password"

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        services.set_password(person=person, key=key, who=self.one, password=form.cleaned_data["new_password"])
        if self.one == self.request.user:
            update_session_auth_hash(self.request, self.one)
        return self.home()


class PersonBadge(OfPerson):
    """Give someone a badge, or take it away."""

    roles = MANAGERS
    form_class = BadgeForm
    heading = "Badge"

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        services.set_badge(person=person, key=key, who=self.one, badge=form.cleaned_data["new_badge"])
        return self.home()


class PersonCode(OfPerson):
    """Give someone a short code, or take it away."""

    roles = MANAGERS
    form_class = CodeForm
    heading = "Short code"

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        services.set_code(person=person, key=key, who=self.one, code=form.cleaned_data["new_code"])
        return self.home()


def role_words(one: User) -> str:
    """Return the roles given to a person, in words, whether or not they may sign in now."""
    return ", ".join(ROLE_WORDS[role] for role in Role if getattr(one, f"is_{role.value}")) or "no role"


def _known_by(one: User) -> str:
    means = [word for word, digest in (("badge", one.badge_digest), ("short code", one.code_digest)) if digest]
    return " and ".join(means) or "neither badge nor code"
