"""Managers' pages about the shop itself: settings, policy, places."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.selectors.edition import edition_in_force
from bottles.services.plan_day import GOOD_PER_MILLE
from shop.base import clock
from shop.base.models import Place, Policy, Shop
from shop.base.paging import page_of
from shop.base.permissions import MANAGERS, allow
from shop.base.shown_back import temperature_shown_back
from shop.people.acting import ActView
from shop.people.history import history_of
from shop.people.models import User
from shop.physics.formatting import format_mass, format_temperature, unit_system
from shop.physics.units import in_own_unit
from shop.rooms import services
from shop.rooms.bay import system_of
from shop.rooms.forms import BY_THE_RULES, MONTH_RULES, ChangePlaceForm, NewPlaceForm, PolicyForm, ShopForm

POLICY_KEYS = ("month_rule", "visual_interval_months", "disc_interval_months")


@allow(MANAGERS, room="office")
def settings(request: HttpRequest) -> HttpResponse:
    """What the shop is."""
    shop = Shop.objects.get()
    facts = [
        ("Name", shop.name),
        ("Rule set", edition_in_force(shop, clock.today(shop)).title),
        ("Units", shop.get_units_display()),
        ("Time zone", shop.time_zone),
        ("Height above sea", f"{shop.height_m} m"),
        ("Paper", shop.get_paper_display()),
        ("Public address", shop.public_address or "none: labels carry the code alone"),
        ("Local notice", shop.local_notice or "none"),
    ]
    return render(request, "rooms/settings.html", {"facts": facts, "acts": history_of("shop", shop=shop)})


class SettingsChange(ActView):
    """Change what the shop is."""

    roles = MANAGERS
    room = "office"
    form_class = ShopForm
    heading = "Change the shop's settings"

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("rooms:settings")}

    def first_page(self, act: Any) -> str:
        return reverse("rooms:settings")

    def initial(self) -> dict[str, Any]:
        names = ("version", "name", "units", "time_zone", "paper", "public_address", "local_notice")
        return {name: getattr(self.shop, name) for name in names} | {"height": f"{self.shop.height_m} m"}

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        values = {
            name: typed[name] for name in ("name", "units", "time_zone", "paper", "public_address", "local_notice")
        }
        services.change_shop(
            person=person,
            key=key,
            shop=self.shop,
            version=typed["version"] or 0,
            values=values | {"height_m": typed["height"]},
        )
        return reverse("rooms:settings")


@allow(MANAGERS, room="office")
def policies(request: HttpRequest) -> HttpResponse:
    """What the shop decided, the latest first."""
    today = clock.today()
    page = page_of(request, Policy.objects.select_related("act__person").order_by("-effective_from", "-id"))
    in_force = (
        Policy.objects.filter(effective_from__lte=today)
        .order_by("-effective_from", "-id")
        .values_list("pk", flat=True)
        .first()
    )
    rows = [
        {
            "since": one.effective_from.isoformat(),
            "state": "in force" if one.pk == in_force else "to come" if one.effective_from > today else "replaced",
            "kind": "yes" if one.pk == in_force else "open",
            "month_rule": dict(MONTH_RULES).get(
                one.values.get("month_rule") or BY_THE_RULES, str(one.values.get("month_rule"))
            ),
            "visual": _months(one.values.get("visual_interval_months")),
            "disc": _months(one.values.get("disc_interval_months")),
            "own": _own(one.values.get("own_limit_per_mille")),
            "good": f"{_percent(one.values.get('good_enough_per_mille') or GOOD_PER_MILLE)} % of the target",
            "who": str(one.act.person) if one.act.person else "Tarebook",
            "reason": one.act.reason,
        }
        for one in page
    ]
    return render(request, "rooms/policies.html", {"page": page, "rows": rows})


class PolicyNew(ActView):
    """Decide what holds from a day on."""

    roles = MANAGERS
    room = "office"
    form_class = PolicyForm
    heading = "Decide a policy"
    submit = "Decide"

    def context(self) -> dict[str, Any]:
        return {
            "back_url": reverse("rooms:policies"),
            "intro": "The shop may be stricter than the rules, never looser. What was judged before keeps the policy of its day.",
        }

    def first_page(self, act: Any) -> str:
        return reverse("rooms:policies")

    def initial(self) -> dict[str, Any]:
        latest = Policy.objects.order_by("-effective_from", "-id").first()
        values = {name: latest.values.get(name) for name in POLICY_KEYS} if latest else {}
        values["month_rule"] = values.get("month_rule") or BY_THE_RULES
        own = latest.values.get("own_limit_per_mille") if latest else None
        good = latest.values.get("good_enough_per_mille") if latest else None
        return values | {
            "effective_from": clock.today(self.shop), "own_percent": _percent(own) if own else None,
            "good_percent": _percent(good) if good else None,
        }  # fmt: skip

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        typed = form.cleaned_data
        latest = Policy.objects.order_by("-effective_from", "-id").first()
        values = {name: typed[name] or None for name in POLICY_KEYS}
        if values["month_rule"] == BY_THE_RULES:
            values["month_rule"] = None
        values["own_limit_per_mille"] = int(typed["own_percent"] * 10) if typed["own_percent"] else None
        values["good_enough_per_mille"] = int(typed["good_percent"] * 10) if typed["good_percent"] else None
        values["overlays"] = latest.values.get("overlays", []) if latest else []  # no page changes them yet
        services.decide_policy(
            person=person, key=key, effective_from=typed["effective_from"], today=clock.today(self.shop),
            values=values, reason=typed["reason"],
        )  # fmt: skip
        return reverse("rooms:policies")


@allow(MANAGERS, room="office")
def places(request: HttpRequest) -> HttpResponse:
    """Where bottles stand."""
    system = system_of(request)
    page = page_of(request, Place.objects.order_by("-active", "code"))
    rows = [
        {
            "url": reverse("rooms:place", args=[one.pk]),
            "code": one.code,
            "name": one.name,
            "kind": one.get_kind_display(),
            "outdoors": "outdoors" if one.outdoors else "indoors",
            "limit": format_mass(one.limit_g, unit_system(system).mass) if one.limit_g is not None else "none set",
            "active": one.active,
            "chills": _chills(one, system),
        }
        for one in page
    ]
    return render(request, "rooms/places.html", {"page": page, "rows": rows})


class PlaceNew(ActView):
    """Add a place."""

    roles = MANAGERS
    room = "office"
    form_class = NewPlaceForm
    heading = "Add a place"
    submit = "Add"
    said = "Added."

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("rooms:places")}

    def first_page(self, act: Any) -> str:
        return reverse("rooms:places")

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        services.add_place(person=person, key=key, values=_place_values(form) | {"code": form.cleaned_data["code"]})
        return reverse("rooms:places")


class PlaceChange(ActView):
    """Change a place."""

    roles = MANAGERS
    room = "office"
    form_class = ChangePlaceForm
    template_name = "rooms/place.html"
    place: Place

    def find(self, **kwargs: Any) -> None:
        found = Place.objects.filter(pk=kwargs["pk"]).first()
        if found is None:
            raise Http404
        self.place = found

    def context(self) -> dict[str, Any]:
        return {
            "back_url": reverse("rooms:places"),
            "heading": f"Place {self.place.code}",
            "acts": history_of(f"place:{self.place.code}", shop=self.shop),
        }

    def first_page(self, act: Any) -> str:
        return reverse("rooms:places")

    def initial(self) -> dict[str, Any]:
        one = self.place
        unit = unit_system(system_of(self.request)).mass
        limit = in_own_unit(one.limit_g, unit) if one.limit_g is not None else ""
        return {
            "version": one.version,
            "name": one.name,
            "kind": one.kind,
            "outdoors": one.outdoors,
            "limit": limit,
            "active": one.active,
            "coldest": _coldest_shown_back(one, system_of(self.request)),
            "takes_at_once": one.takes_at_once,
        }

    def act(self, form: Any, person: User, key: uuid.UUID) -> str:
        values = _place_values(form) | {"active": form.cleaned_data["active"]}
        services.change_place(
            person=person, key=key, place=self.place, version=form.cleaned_data["version"] or 0, values=values
        )
        return reverse("rooms:places")


def _place_values(form: Any) -> dict[str, Any]:
    typed = form.cleaned_data
    return {name: typed[name] for name in ("name", "kind", "outdoors", "takes_at_once")} | {
        "limit_g": form.stored("limit"), "coldest_mk": form.stored("coldest"), "coldest_typed": form.typed("coldest"),
    }  # fmt: skip


def _coldest_shown_back(place: Place, system: str) -> str:
    if place.coldest_mk is None:
        return ""
    return temperature_shown_back(place.coldest_mk, place.coldest_typed, unit=unit_system(system).temperature)


def _chills(place: Place, system: str) -> str:
    """How cold it gets, as entered, and how many bottles it takes."""
    told = []
    if place.coldest_mk is not None:
        told.append(f"to {format_temperature(place.coldest_mk, unit_system(system).temperature)}")
    if place.takes_at_once is not None:
        told.append(f"{place.takes_at_once} at once")
    return f"{', '.join(told)} (entered)" if told else ""


def _own(per_mille: int | None) -> str:
    return f"{_percent(per_mille)} % of the limit" if per_mille else "to the limit"


def _percent(per_mille: int) -> str:
    return f"{per_mille / 10:g}"


def _months(value: int | None) -> str:
    return f"every {value} months" if value else "no rule of the shop's own"
