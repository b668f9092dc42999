"""Roles, and who may open which page. The server refuses; hiding a link is only courtesy."""

from __future__ import annotations

import functools
from collections.abc import Callable, Iterable
from enum import StrEnum
from typing import Any

from django.core.exceptions import PermissionDenied
from django.http import HttpRequest, HttpResponseBase


class Role(StrEnum):
    """What a person does in the shop; one person may hold several."""

    FRONT_DESK = "front_desk"
    TECHNICIAN = "technician"
    MANAGER = "manager"


EVERYONE = frozenset(Role)
DESK = frozenset({Role.FRONT_DESK, Role.MANAGER})
BENCH = frozenset({Role.TECHNICIAN, Role.MANAGER})
MANAGERS = frozenset({Role.MANAGER})

ROLE_WORDS = {Role.FRONT_DESK: "front desk", Role.TECHNICIAN: "technician", Role.MANAGER: "manager"}


def allow(roles: Iterable[Role], *, room: str | None = None) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Let only people who hold one of the roles open a view.

    The view says so in `.roles`, and in `.room` which room its page belongs to.
    """
    wanted = frozenset(roles)

    def wrap(view: Callable[..., Any]) -> Callable[..., Any]:
        @functools.wraps(view)
        def inner(request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponseBase:
            if not wanted & request.user.roles:  # type: ignore[union-attr]
                raise PermissionDenied
            return view(request, *args, **kwargs)

        inner.roles = wanted  # type: ignore[attr-defined]
        inner.room = room  # type: ignore[attr-defined]
        return inner

    return wrap
