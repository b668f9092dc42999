"""Everybody's pages about themselves."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib.auth import update_session_auth_hash
from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from shop.base.errors import NotAllowed
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, allow
from shop.people import services
from shop.people.acting import ActView
from shop.people.forms.people import OwnCodeForm, OwnPasswordForm, UnitsForm
from shop.people.models import User
from shop.people.views.people import role_words


@allow(EVERYONE)
def me(request: HttpRequest) -> HttpResponse:
    """What one may change about oneself."""
    user: User = request.user  # type: ignore[assignment]
    shop = Shop.objects.get()
    words = dict(Shop.UNITS)
    return render(
        request,
        "people/me.html",
        {
            "roles": role_words(user),
            "units": words[user.units] if user.units else f"the shop's ({words[shop.units]})",
            "code": "set" if user.code_digest else "none",
            "badge": "known" if user.badge_digest else "none: a manager can give you one",
        },
    )


class Own(ActView):
    """What the pages about oneself share: at an open counter, only for who is signed in."""

    roles = EVERYONE

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("people:me")}

    def first_page(self, act: Any) -> str:
        return reverse("people:me")

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        if person != self.request.user:
            raise NotAllowed(
                "Someone else is signed in on this machine. Sign in as yourself to change your own settings.",
                field="who",
            )
        if "old_password" in form.fields and not person.check_password(form.cleaned_data["old_password"]):
            raise NotAllowed(
                "This isn't your password now. Type it again.", code="wrong password", field="old_password"
            )
        self.save(form.cleaned_data, person, key)
        return reverse("people:me")

    def save(self, typed: dict[str, Any], person: User, key: uuid.UUID) -> None:
        """Call the service."""
        raise NotImplementedError


class OwnUnits(Own):
    """Choose the units of one's own pages."""

    roles = EVERYONE
    form_class = UnitsForm
    heading = "My units"

    def initial(self) -> dict[str, Any]:
        return {"units": self.request.user.units or UnitsForm.SHOPS}  # type: ignore[union-attr]

    def save(self, typed: dict[str, Any], person: User, key: uuid.UUID) -> None:
        services.set_units(person=person, key=key, units="" if typed["units"] == UnitsForm.SHOPS else typed["units"])


class OwnPassword(Own):
    """Change one's own password and stay signed in here."""

    roles = EVERYONE
    form_class = OwnPasswordForm
    heading = "My password"
    said = "Saved. Other machines on which you were signed in are signed out."

    def save(self, typed: dict[str, Any], person: User, key: uuid.UUID) -> None:
        services.set_password(person=person, key=key, who=person, password=typed["new_password"])
        update_session_auth_hash(self.request, person)


class OwnCode(Own):
    """Change one's own short code."""

    roles = EVERYONE
    form_class = OwnCodeForm
    heading = "My short code"

    def save(self, typed: dict[str, Any], person: User, key: uuid.UUID) -> None:
        services.set_code(person=person, key=key, who=person, code=typed["new_code"])
