"""Forms and pages that save something: the key, the person, the version, the refusal.

Every page that records goes through `ActView` and `ActForm`, so that each one answers a second
arrival with the first, a refusal with its sentence beside what was typed, someone else's
change with both texts, and an open counter by asking who acts.
"""

from __future__ import annotations

import time
import uuid
from typing import Any

from django import forms
from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import HttpRequest, HttpResponse, HttpResponseRedirect
from django.shortcuts import render
from django.views import View

from shop.base import clock
from shop.base.errors import AlreadyDone, NotAllowed, Refusal, Stale
from shop.base.fields import InstantField, QuantityField
from shop.base.models import Act, Shop
from shop.base.permissions import MANAGERS, Role
from shop.people import kept
from shop.people.models import User
from shop.people.services import identify
from shop.physics.errors import PhysicsError
from shop.physics.units import ambient_pressure

WRONG_CODES = 5  # in a row, then a pause
PAUSE_S = 60
WHY_KEPT = {"signed out": "You had been signed out.", "stale": "This page had become too old to be trusted."}


class ActForm(forms.Form):
    """A form that is saved once: it carries its own key, and asks who where the counter is open."""

    form_key = forms.UUIDField(widget=forms.HiddenInput)
    version = forms.IntegerField(required=False, widget=forms.HiddenInput)

    def __init__(self, *args: Any, person: User, shop: Shop, shared: bool = False, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.person = person
        self.shop = shop
        self.system = person.units or shop.units
        self.ambient_pa = ambient_pressure(float(shop.height_m))
        self.fields["form_key"].initial = uuid.uuid4
        self.use_required_attribute = False  # the server's sentences say more than the browser's
        for field in self.fields.values():
            if isinstance(field, QuantityField):
                field.suit(system=self.system, ambient_pa=self.ambient_pa)
            if isinstance(field, InstantField):
                field.zone = clock.zone(shop)
        if shared:
            self.fields["who"] = forms.CharField(
                label="Your badge or short code",
                max_length=200,
                widget=forms.PasswordInput(attrs={"autocomplete": "off"}),
                error_messages={
                    "required": "Scan your badge or type your short code, so that it's known who did this."
                },
            )

    def typed(self, name: str) -> str:
        """What was typed into a field of a quantity, or nothing."""
        entry = self.cleaned_data.get(name)
        return entry.typed if entry else ""

    def stored(self, name: str) -> int | None:
        """The stored whole number of a field of a quantity, or None."""
        entry = self.cleaned_data.get(name)
        return entry.stored if entry else None


class ActView(View):
    """A page with one form that saves one act.

    Give `roles`, `room`, `form_class`, `template_name`, and `act(form, person, key) -> address`.
    """

    roles: frozenset[Role] = MANAGERS
    room: str | None = None
    form_class: type[ActForm]
    template_name = "parts/act.html"
    heading = ""
    submit = "Save"
    said = "Saved."

    request: HttpRequest
    shop: Shop

    def dispatch(self, request: HttpRequest, *args: Any, **kwargs: Any) -> Any:
        if not self.roles & request.user.roles:  # type: ignore[union-attr]
            raise PermissionDenied
        self.shop = Shop.objects.get()
        request.shop = self.shop  # type: ignore[attr-defined]
        self.find(**kwargs)
        return super().dispatch(request, *args, **kwargs)

    # --- what a page fills in ---------------------------------------------------------------------

    def find(self, **kwargs: Any) -> None:
        """Look up what the address names; raise Http404 where it isn't there."""

    def initial(self) -> dict[str, Any]:
        """What the fields hold when the form is first drawn."""
        return {}

    def form_kwargs(self) -> dict[str, Any]:
        """Further arguments of the form."""
        return {}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        """Call the service; return the address to go to."""
        raise NotImplementedError

    def first_page(self, act: Any) -> str:
        """The address that answers a second arrival: the page of what the first one saved."""
        return self.request.path

    def context(self) -> dict[str, Any]:
        """Further variables of the template."""
        return {}

    # --- the way of a request ---------------------------------------------------------------------

    @property
    def shared(self) -> bool:
        """Whether this machine stays open for several people."""
        return bool(self.request.session.get("shared_counter"))

    def form(self, data: Any = None) -> Any:
        """Build the form, bound to what was typed where there is something."""
        person: User = self.request.user  # type: ignore[assignment]
        return self.form_class(
            data,
            person=person,
            shop=self.shop,
            shared=self.shared,
            initial=self.initial(),
            **self.form_kwargs(),
        )

    def get(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        typed = kept.take(request)
        if typed is None:
            return self.show(self.form())
        form = self.form(typed)
        form.is_valid()
        messages.warning(
            request, f"{WHY_KEPT[typed.why]} What you typed is here and isn't saved yet: check it and save."
        )
        return self.show(form)

    def post(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        form = self.form(request.POST)
        if not form.is_valid():
            return self.answer_of_first() or self.show(form, status=422)
        try:
            person = self.who(form)
            address = self.act(form, person, form.cleaned_data["form_key"])
        except AlreadyDone as again:
            messages.info(request, again.sentence)
            return HttpResponseRedirect(self.first_page(again.act))
        except Stale as stale:
            self.keep_both(form, stale)
            return self.show(form, status=409)
        except (Refusal, PhysicsError) as refusal:
            if first := self.answer_of_first():
                return first
            field = getattr(refusal, "field", None)
            form.add_error(
                field if field in form.fields else None, forms.ValidationError(refusal.sentence, code=refusal.code)
            )
            return self.show(form, status=409)
        if self.said:
            messages.success(request, self.said)
        return HttpResponseRedirect(address)

    def answer_of_first(self) -> HttpResponse | None:
        """The answer to a second arrival whose words no longer fit, as the first one changed what they name."""
        try:
            key = uuid.UUID(self.request.POST.get("form_key", ""))
        except ValueError:
            return None
        act = Act.objects.filter(key=key).first()
        if act is None:
            return None
        messages.info(self.request, AlreadyDone(act).sentence)
        return HttpResponseRedirect(self.first_page(act))

    def show(self, form: Any, *, status: int = 200) -> HttpResponse:
        """Draw the page."""
        context = {"form": form, "heading": self.heading, "submit": self.submit} | self.context()
        return render(self.request, self.template_name, context, status=status)

    def who(self, form: ActForm) -> User:
        """Return who acts: whoever signed in, or at an open counter whose badge or code it is."""
        signed_in: User = self.request.user  # type: ignore[assignment]
        if "who" not in form.fields:
            return signed_in
        session = self.request.session
        wrong, since = session.get("wrong_codes", (0, 0.0))
        if wrong >= WRONG_CODES and time.time() - since < PAUSE_S:
            raise NotAllowed(
                "Too many wrong codes. Wait a minute, then scan your badge.", code="too many codes", field="who"
            )
        person = identify(form.cleaned_data["who"])
        if person is None:
            session["wrong_codes"] = (wrong + 1 if wrong < WRONG_CODES else 1, time.time())
            raise NotAllowed(
                "No one has that badge or code. Scan it again, or ask a manager.", code="unknown code", field="who"
            )
        session.pop("wrong_codes", None)
        if not self.roles & person.roles:
            raise NotAllowed(f"{person.name} may not do this: another role is needed. Ask a manager.", field="who")
        return person

    def keep_both(self, form: ActForm, stale: Stale) -> None:
        """Show what someone else saved beside what was typed; saving again replaces it."""
        form.add_error(None, forms.ValidationError(stale.sentence, code=stale.code))
        for field, raw in stale.theirs.items():
            value = _shown(form.fields.get(field), raw)
            note = f"Saved meanwhile by someone else: “{value}”. Yours is kept here; save again to put it in its place."
            form.add_error(field if field in form.fields else None, forms.ValidationError(note, code=stale.code))
        data: Any = form.data.copy()  # type: ignore[attr-defined]
        data["version"] = stale.version
        form.data = data


def _shown(field: forms.Field | None, value: str) -> str:
    """Return a saved value as its field would show it."""
    if isinstance(field, forms.BooleanField):
        return "ticked" if value == "True" else "not ticked"
    if isinstance(field, forms.ChoiceField):
        return str(dict(field.choices).get(value, value))  # type: ignore[arg-type]
    return value or "nothing"
