"""What every page's frame shows: the shop, the rooms, the room one is in."""

from __future__ import annotations

from typing import Any

from django.http import HttpRequest
from django.urls import NoReverseMatch, reverse

from shop.base.models import Shop
from shop.base.permissions import BENCH, EVERYONE, MANAGERS, Role

ROOMS: tuple[tuple[str, str, frozenset[Role]], ...] = (
    ("counter", "Counter", EVERYONE),
    ("bay", "Bay", BENCH),
    ("office", "Office", MANAGERS),
)
ROOM_OF_ROLE = ((Role.FRONT_DESK, "counter"), (Role.TECHNICIAN, "bay"), (Role.MANAGER, "office"))


def frame(request: HttpRequest) -> dict[str, Any]:
    """Return the frame's variables (a context processor)."""
    user = getattr(request, "user", None)
    if user is None or not user.is_authenticated:
        return {"shop": Shop.objects.first(), "rooms": [], "room": None}
    room = current_room(request)
    try:
        rooms = [
            {"name": word, "url": reverse(f"rooms:{name}"), "current": name == room}
            for name, word, roles in ROOMS
            if roles & user.roles
        ]
        find_url = reverse("rooms:find")
    except NoReverseMatch:
        rooms, find_url = [], ""
    return {
        "shop": getattr(request, "shop", None) or Shop.objects.first(),
        "rooms": rooms,
        "room": room,
        "find_url": find_url,
        "shared_counter": request.session.get("shared_counter", False),
    }


def current_room(request: HttpRequest) -> str | None:
    """Return the room that the page belongs to, as its view says."""
    match = request.resolver_match
    if match is None:
        return None
    view = getattr(match.func, "view_class", match.func)
    return getattr(view, "room", None)


def home_room(roles: frozenset[Role]) -> str:
    """Return the room in which a person with these roles lands."""
    for role, room in ROOM_OF_ROLE:
        if role in roles:
            return room
    return "counter"
