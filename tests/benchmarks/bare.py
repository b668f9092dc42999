"""Bare pages: the same layout behind the same sign-in and middleware, with constants in place of the work.

Laid beside the shop's own addresses, so that a bare page comes the whole way of a request. The bare
page of a page is its own template, filled with what stands ready: nothing is asked for, judged or
computed. Barer still is its main part as one text (`lay`), which leaves out the drawing as well.
"""

from __future__ import annotations

from typing import Any

from django.core.handlers.base import BaseHandler
from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.template import engines
from django.test import Client, RequestFactory
from django.urls import path
from django.utils.safestring import mark_safe

from shop.base.permissions import EVERYONE, allow
from shop.urls import urlpatterns as of_the_shop

WHOLE = '{% extends "base.html" %}{% block title %}Bare{% endblock %}{% block main %}{{ ready }}{% endblock %}'
PART = "{{ ready }}"
MAIN_BEGINS = 'id="live-trouble" role="status"></p>'  # the last of base.html's own in the main part

_laid: dict[str, tuple[str | None, Any, dict[str, Any]]] = {}


@allow(EVERYONE, room="counter")
def bare(request: HttpRequest, name: str) -> HttpResponse:
    """A page whose every word is ready."""
    name_of_template, template, context = _laid[name]
    if name_of_template:
        return render(request, name_of_template, context)
    return HttpResponse(template.render(context, request))


urlpatterns = [*of_the_shop, path("bare/<str:name>", bare, name="bare")]


class Visitor:
    """Somebody signed in, who asks for pages without the test client's bookkeeping."""

    def __init__(self, client: Client) -> None:
        self._requests = RequestFactory()
        self._requests.cookies = client.cookies
        self._way = BaseHandler()
        self._way.load_middleware()

    def ask(self, address: str, data: dict[str, str] | None = None) -> HttpResponse:
        request = self._requests.get(address) if data is None else self._requests.post(address, data)
        request._dont_enforce_csrf_checks = True  # type: ignore[attr-defined]
        answer = self._way.get_response(request)
        assert answer.status_code == 200, (address, answer.status_code)
        return answer


def lay(name: str, answer: HttpResponse, *, part: bool = False) -> str:
    """Keep what a page said as one text; return the address of the page that says it."""
    html = answer.content.decode()
    if not part:
        html = html.split(MAIN_BEGINS, 1)[1].rsplit("</main>", 1)[0]
    _laid[name] = (None, engines["django"].from_string(PART if part else WHOLE), {"ready": mark_safe(html)})
    return f"/bare/{name}"


def lay_filled(name: str, answer: Any) -> str:
    """Keep a page's own template with what the test client saw it filled with; return the address."""
    template = answer.templates[0].name
    context = answer.context[0] if isinstance(answer.context, list) else answer.context
    frames = [layer for layer in context.dicts if "csrf_token" not in layer and "True" not in layer]
    _laid[name] = (template, None, {name: value for layer in frames for name, value in layer.items()})
    return f"/bare/{name}"


def lay_list(name: str, template: str, context: dict[str, Any]) -> str:
    """Keep a list's own template with its words; return the address of that."""
    _laid[name] = (template, None, constants(context))
    return f"/bare/{name}"


def constants(value: Any) -> Any:
    """The same with nothing left to work out; refuses what isn't a plain text, number, list or dict."""
    if isinstance(value, dict):
        return {name: constants(one) for name, one in value.items()}
    if isinstance(value, list | tuple):
        return [constants(one) for one in value]
    if value is None or isinstance(value, str | int | float):
        return value
    raise TypeError(f"{value!r} isn't a constant")
