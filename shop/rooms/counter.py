"""The Counter: where a bottle comes in, is judged, filled and goes out."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from shop.base.permissions import EVERYONE, allow


@allow(EVERYONE, room="counter")
def counter(request: HttpRequest) -> HttpResponse:
    """The scan field, first of all."""
    return render(request, "rooms/counter.html")
