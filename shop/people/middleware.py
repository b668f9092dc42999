"""Nobody gets past the door unsigned, and what they had typed isn't lost there."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from django.contrib.auth.middleware import LoginRequiredMiddleware
from django.http import HttpRequest, HttpResponse, HttpResponseBase

from shop.people.views.signing_in import packed_form, signed_out


class SignInFirst(LoginRequiredMiddleware):
    """Every page asks for a sign-in unless its view says otherwise.

    A form that arrives after its sign-in ran out is answered with the sign-in page, which
    carries what was typed; signed in, one is back at the form. Nothing is saved on the way.
    """

    def handle_no_permission(  # type: ignore[override]
        self, request: HttpRequest, view_func: Callable[..., Any]
    ) -> HttpResponseBase:
        if request.headers.get("HX-Request"):
            return HttpResponse("Sign in first.", status=401, content_type="text/plain")
        if request.method != "POST":
            return super().handle_no_permission(request, view_func)
        return signed_out(request, packed_form(request))
