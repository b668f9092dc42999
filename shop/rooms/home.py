"""The way from the front door to one's own room."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect

from shop.base.permissions import EVERYONE, allow
from shop.people.views.signing_in import home as room_of


@allow(EVERYONE)
def home(request: HttpRequest) -> HttpResponse:
    """Go to the room of one's first role."""
    return redirect(room_of(request.user))
