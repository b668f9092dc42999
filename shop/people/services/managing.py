"""Let people in: add them, give them roles, a password, a badge, a short code."""

from __future__ import annotations

import uuid
from collections.abc import Iterable
from itertools import pairwise
from typing import Any

from django.contrib.auth.password_validation import validate_password
from django.core.exceptions import ValidationError
from django.db.models import Q

from shop.base import acts
from shop.base.errors import NotAllowed, Refusal, Stale
from shop.base.permissions import ROLE_WORDS, Role
from shop.people.models import User
from shop.people.services.founding import sign_in_name
from shop.people.services.identifying import digest

SECRET = frozenset({"name", "sign_in_name"})
SHORTEST_CODE, LONGEST_CODE = 4, 8
SHORTEST_BADGE = 6  # a badge shorter than a scan could be a code that someone guesses


def add_person(
    *, person: User, key: uuid.UUID, name: str, sign_in: str, roles: Iterable[Role], password: str, units: str = ""
) -> User:
    """Add someone who may sign in; the manager tells them the password.

    Raises Refusal where the sign-in name is taken, a role is missing or the password is too plain.
    """
    held = frozenset(roles)
    if not held:
        raise Refusal("Give at least one role: without one, no page opens.", code="no role", field="roles")
    new = User(sign_in_name=sign_in_name(sign_in), name=name, units=units, **_flags(held))
    _check_password(password, new, field="password")
    new.set_password(password)
    new.clean_fields()
    with acts.begin(key=key, person=person, code="person.added", subject="person", changes={"roles": sorted(held)}):
        if User.objects.filter(sign_in_name__iexact=new.sign_in_name).exists():
            raise _name_taken(new.sign_in_name)
        new.save(force_insert=True)
    return new


def change_person(
    *,
    person: User,
    key: uuid.UUID,
    who: User,
    version: int,
    name: str,
    sign_in: str,
    roles: Iterable[Role],
    active: bool,
) -> None:
    """Change who someone is and what they may do; the last active manager stays one.

    Raises Refusal, or Stale where someone else changed them meanwhile.
    """
    held = frozenset(roles)
    if active and not held:
        raise Refusal(
            "Give at least one role; to keep someone out, untick “may sign in” instead.", code="no role", field="roles"
        )
    values: dict[str, Any] = {
        "name": name, "sign_in_name": sign_in_name(sign_in), "is_active": active, **_flags(held),
    }  # fmt: skip
    with acts.begin(
        key=key,
        person=person,
        code="person.changed",
        subject=f"person:{who.pk}",
        changes=acts.changed(who, values, secret=SECRET),
    ):
        # All who are managers now are locked, in order: of two managers who demote each other
        # one has to wait and then finds itself the last.
        managers = list(
            User.objects.select_for_update()
            .filter(is_manager=True, is_active=True)
            .order_by("pk")
            .values_list("pk", flat=True)
        )
        if managers == [who.pk] and not (active and Role.MANAGER in held):
            raise NotAllowed(
                "This is the last manager who may sign in. Make someone else a manager first.",
                code="last manager",
                field="roles",
            )
        if User.objects.filter(sign_in_name__iexact=values["sign_in_name"]).exclude(pk=who.pk).exists():
            raise _name_taken(values["sign_in_name"])
        try:
            acts.update_master(who, version=version, values=values)
        except Stale as stale:
            raise _stale_roles(stale, who) from None


def set_password(*, person: User, key: uuid.UUID, who: User, password: str) -> None:
    """Set someone's password; wherever they were signed in with the old one they are out."""
    _check_password(password, who, field="new_password")
    with acts.begin(key=key, person=person, code="person.password set", subject=f"person:{who.pk}"):
        who.set_password(password)
        who.save(update_fields=["password"])


def set_badge(*, person: User, key: uuid.UUID, who: User, badge: str) -> None:
    """Give someone a badge, or take it away (empty); only its digest is kept."""
    if badge and len(badge.strip()) < SHORTEST_BADGE:
        raise Refusal(
            f"A badge holds at least {SHORTEST_BADGE} characters. Scan it again, or give a short code instead.",
            code="badge too short", field="new_badge",
        )  # fmt: skip
    _set_secret(person=person, key=key, who=who, text=badge, kind="badge", field="new_badge")


def set_code(*, person: User, key: uuid.UUID, who: User, code: str) -> None:
    """Give someone a short code, or take it away (empty); only its digest is kept."""
    if code and not plain_enough(code):
        raise Refusal(
            f"A short code is {SHORTEST_CODE} to {LONGEST_CODE} digits, not all alike and not in a row like 1234.",
            code="code too plain", field="new_code",
        )  # fmt: skip
    _set_secret(person=person, key=key, who=who, text=code, kind="code", field="new_code")


def plain_enough(code: str) -> bool:
    """Return whether a code is digits of the right number that nobody tries first."""
    if not (code.isascii() and code.isdigit() and SHORTEST_CODE <= len(code) <= LONGEST_CODE):
        return False
    steps = {int(b) - int(a) for a, b in pairwise(code)}
    return steps not in ({0}, {1}, {-1})


def set_units(*, person: User, key: uuid.UUID, units: str) -> None:
    """Choose in which units one's own pages speak; empty: the shop's."""
    with acts.begin(
        key=key,
        person=person,
        code="person.units",
        subject=f"person:{person.pk}",
        changes=acts.changed(person, {"units": units}),
    ):
        person.units = units
        person.save(update_fields=["units"])


def _set_secret(*, person: User, key: uuid.UUID, who: User, text: str, kind: str, field: str) -> None:
    column = f"{kind}_digest"
    mine = digest(text) if text.strip() else None
    with acts.begin(
        key=key, person=person, code=f"person.{kind} {'set' if mine else 'taken'}", subject=f"person:{who.pk}"
    ):
        # One text means one person, whether it came as a badge or as a code.
        taken = mine and User.objects.filter(Q(badge_digest=mine) | Q(code_digest=mine)).exclude(pk=who.pk).exists()
        if taken:
            raise Refusal(f"That {kind} can't be used here. Take another one.", code=f"{kind} taken", field=field)
        setattr(who, column, mine)
        who.save(update_fields=[column])


def _flags(roles: frozenset[Role]) -> dict[str, bool]:
    return {f"is_{role.value}": role in roles for role in Role}


def _check_password(password: str, who: User, *, field: str) -> None:
    try:
        validate_password(password, who)
    except ValidationError as error:
        raise Refusal(" ".join(error.messages), code="password", field=field) from None


def _name_taken(name: str) -> Refusal:
    return Refusal(
        f"Someone signs in as “{name}” already. Take another name.", code="sign-in name taken", field="sign_in"
    )


def _stale_roles(stale: Stale, who: User) -> Stale:
    """Say the stored columns of someone else's change in the words of the form's fields."""
    now = User.objects.get(pk=who.pk)
    theirs: dict[str, str] = {}
    for column, value in stale.theirs.items():
        if column == "sign_in_name":
            theirs["sign_in"] = value
        elif column == "name":
            theirs["name"] = value
        elif column == "is_active":
            theirs["active"] = "may sign in" if now.is_active else "may not sign in"
        else:
            held = {role for role in Role if getattr(now, f"is_{role.value}")}
            theirs["roles"] = ", ".join(ROLE_WORDS[r] for r in Role if r in held) or "none"
    return Stale(theirs=theirs, version=stale.version)
