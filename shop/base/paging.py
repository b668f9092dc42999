"""Pages of a list by number, for lists that stay short enough to count."""

from __future__ import annotations

from typing import Any

from django.core.paginator import Page, Paginator
from django.http import HttpRequest

ROWS = 50


def page_of(request: HttpRequest, found: Any, *, rows: int = ROWS) -> Page[Any]:
    """Return the page that the address asks for; a number out of range gives the nearest one."""
    return Paginator(found, rows).get_page(request.GET.get("page"))
