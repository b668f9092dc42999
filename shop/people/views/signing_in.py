"""In and out at the door."""

from __future__ import annotations

from typing import Any

from axes.helpers import get_cool_off
from django.contrib import messages
from django.contrib.auth import authenticate, login, logout
from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse, HttpResponseRedirect
from django.shortcuts import redirect, render
from django.urls import reverse
from django.utils.http import url_has_allowed_host_and_scheme
from django.views.decorators.cache import never_cache
from django.views.decorators.debug import sensitive_post_parameters
from django.views.decorators.http import require_POST

from shop.base.context import home_room
from shop.people import kept
from shop.people.acting import ActView
from shop.people.forms.signing_in import SignInForm
from shop.people.models import User
from shop.people.services.founding import sign_in_name

WRONG = "That name and password don't belong together. Check both; capitals count in the password."


@login_not_required
@never_cache
@sensitive_post_parameters("password")
def sign_in(request: HttpRequest) -> HttpResponse:
    """Sign in by name and password, and go on where one was."""
    if request.method == "POST":
        form = SignInForm(request.POST)
        if not form.is_valid():
            return page(request, form, status=422)
        user = authenticate(
            request, username=known_name(form.cleaned_data["name"]), password=form.cleaned_data["password"]
        )
        if isinstance(user, User):
            login(request, user)
            request.session["shared_counter"] = form.cleaned_data["shared_counter"]
            return HttpResponseRedirect(_onward(request, user, form.cleaned_data))
        form.add_error(None, WRONG)
        return page(request, form, status=422)
    if request.user.is_authenticated:
        return redirect(home(request.user))
    return page(request, SignInForm(initial={"next": request.GET.get("next", "")}))


@login_not_required
@require_POST
def sign_out(request: HttpRequest) -> HttpResponse:
    """Sign out; who isn't signed in any more is out as well."""
    logout(request)
    messages.info(request, "You are signed out.")
    return redirect("people:sign_in")


def locked_out(request: HttpRequest, response: HttpResponse, credentials: Any) -> HttpResponse:
    """Answer whoever mistyped a password too often."""
    form = SignInForm(request.POST)
    form.is_valid()
    wait = get_cool_off(request)
    minutes = round(wait.total_seconds() / 60) if wait else 0
    until = f"Wait {minutes} minutes, then try again" if minutes else "Try again later"
    form.add_error(None, f"Too many wrong passwords for this name. {until}, or ask a manager for a new password.")
    return page(request, form, status=429)


def csrf_failure(request: HttpRequest, reason: str = "") -> HttpResponse:
    """Answer a form whose token no longer holds: nothing is done, what was typed comes back.

    Only what this shop's own page sent is kept; a form from elsewhere isn't even shown.
    """
    if not _from_here(request):
        return render(request, "people/not_from_here.html", status=403)
    if request.resolver_match and request.resolver_match.view_name == "people:sign_in":
        return _door_too_old(request)
    packed = packed_form(request)
    if not request.user.is_authenticated:
        return signed_out(request, packed)
    back = kept.put(request, packed, why="stale") if packed else None
    if back is None:
        messages.warning(request, "That page had become too old and nothing was saved. Open it again.")
    return HttpResponseRedirect(back or reverse("rooms:home"))


def packed_form(request: HttpRequest) -> str:
    """Return what was typed, if its page is one that can show it again."""
    match = request.resolver_match
    view = getattr(match.func, "view_class", object) if match else object
    return kept.pack(request) if issubclass(view, ActView) else ""


def signed_out(request: HttpRequest, packed: str) -> HttpResponse:
    """Answer a form that came after its sign-in ran out with the door, and what was typed in hand."""
    sentence = (
        "You had been signed out, so this isn't saved yet. Sign in: what you typed comes back."
        if packed
        else "You had been signed out and nothing was saved. Sign in and do it again."
    )
    messages.warning(request, sentence)
    return page(request, SignInForm(initial={"kept": packed}), status=401)


def known_name(typed: str) -> str:
    """Return the sign-in name that is meant: one for each person, so that the throttle counts right.

    `Mara K` signs in as mara.k, unless someone's name is written with the space.
    """
    name = " ".join(typed.split()).casefold()
    return name if User.objects.filter(sign_in_name__iexact=name).exists() else sign_in_name(name)


def home(user: Any) -> str:
    """Return the address of the room in which a person lands."""
    return reverse(f"rooms:{home_room(user.roles)}")


def page(request: HttpRequest, form: SignInForm, *, status: int = 200) -> HttpResponse:
    """Draw the door."""
    return render(request, "people/sign_in.html", {"form": form}, status=status)


def _onward(request: HttpRequest, user: User, typed: dict[str, Any]) -> str:
    if typed["kept"]:
        back = kept.put(request, typed["kept"], why="signed out")
        if back is not None:
            return back
    onward = str(typed["next"])
    if onward and url_has_allowed_host_and_scheme(onward, {request.get_host()}, require_https=request.is_secure()):
        return onward
    return home(user)


def _door_too_old(request: HttpRequest) -> HttpResponse:
    if request.user.is_authenticated:  # signed in meanwhile, in another window
        return redirect(home(request.user))
    carried = {name: request.POST.get(name, "") for name in ("name", "next", "kept")}
    messages.warning(request, "This page had become too old. Type your password again.")
    return page(request, SignInForm(initial=carried), status=403)


def _from_here(request: HttpRequest) -> bool:
    """Whether the browser says that the form came from a page of this shop."""
    here = f"{request.scheme}://{request.get_host()}"
    origin = request.headers.get("Origin")
    if origin:
        return origin == here
    return request.headers.get("Referer", "").startswith(here + "/")
