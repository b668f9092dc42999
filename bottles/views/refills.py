"""Pages of refills: what is going on, the steps of one, its receipt, and a bottle's own section."""

from __future__ import annotations

import uuid
from dataclasses import replace
from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse
from django.utils.functional import cached_property

from bottles.forms.refills import AnotherSupplyForm, CloseForm, WaitForm, WeighForm
from bottles.models import Bottle, Refill, Supply
from bottles.selectors.filling_offers import Offered, readings_offered
from bottles.selectors.refill_lists import LISTED, closed_refills, latest_refills_of, open_refills
from bottles.selectors.refills import draws_of, in_force
from bottles.services import refill_steps as steps
from bottles.services.forecast_details import forecast_by
from bottles.services.forecasting import Asked
from bottles.views.filling import CAUTIONS
from bottles.views.forecast_details_words import details_part
from bottles.views.forecast_part import Judged, Worked, asked_for, chosen_supply, forecast_part, worked
from bottles.views.refill_rows import page_context, refill_rows, section_rows
from bottles.views.refill_words import refill_words
from bottles.views.sections import Seen
from shop.base.errors import Refusal
from shop.base.models import Shop
from shop.base.paging import page_of
from shop.base.permissions import EVERYONE, allow
from shop.people.acting import ActView
from shop.people.models import User


@allow(EVERYONE, room="counter")
def refills(request: HttpRequest) -> HttpResponse:
    """What is being filled now, and what was."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    page = page_of(request, closed_refills())
    now = refill_rows(open_refills(), words, shop)
    context = {"open": now, "closed": refill_rows(list(page), words, shop), "page": page}
    return render(request, "bottles/refills.html", context)


def refill_or_404(pk: int) -> Refill:
    """Return a refill with all that its pages name."""
    named = ("bottle", "station__scale", "station__supply_scale", "decision", "person")
    found = Refill.objects.select_related(*named).filter(pk=pk).first()
    if found is None:
        raise Http404
    return found


class OfRefill(ActView):
    """What the pages of one refill share: everyone at the desk and the bench fills."""

    roles = EVERYONE
    room = "counter"
    refill: Refill

    def find(self, **kwargs: Any) -> None:
        self.refill = refill_or_404(kwargs["pk"])

    @property
    def home(self) -> str:
        """The refill's own page."""
        return reverse("bottles:refill", args=[self.refill.pk])

    def first_page(self, act: Any) -> str:
        return self.home

    def initial(self) -> dict[str, Any]:
        return {"version": self.refill.version}

    def context(self) -> dict[str, Any]:
        return {"refill": self.refill, "bottle": self.refill.bottle, "back_url": self.home}


class RefillPage(OfRefill):
    """The open refill: where to stop, what the scale said, weigh."""

    form_class = WeighForm
    template_name = "bottles/refill.html"
    submit = "Save the weight"
    said = ""

    def form_kwargs(self) -> dict[str, Any]:
        return {"station": self.refill.station}

    def act(self, form: WeighForm, person: User, key: uuid.UUID) -> str:
        found = steps.weigh_refill(
            key=key, person=person, refill=self.refill, weight=form.weight(), ended_by=form.end_chosen(form.cleaned_data),
            close_when_full=form.close_when_full,
        )  # fmt: skip
        if found.closed:
            messages.success(self.request, "Weighed and closed.")
            return reverse("bottles:receipt", args=[self.refill.pk]) if "receipt" in self.request.POST else self.home
        if found.why_not:
            messages.error(self.request, f"The weight is kept, the refill stays open. {found.why_not}")
        else:
            messages.success(self.request, "Weighed.")
        return self.home

    def context(self) -> dict[str, Any]:
        words = refill_words(self.request, self.shop)
        return super().context() | {"cautions": CAUTIONS} | page_context(self.refill, words, self.shop)


class Wait(OfRefill):
    """Let it wait, or go on."""

    form_class = WaitForm
    said = ""

    def initial(self) -> dict[str, Any]:
        return super().initial() | {"note": self.refill.wait_note or "chill"}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Let {self.refill.bottle.code} wait"}

    def act(self, form: WaitForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        steps.wait(
            key=key, person=person, refill=self.refill, version=data["version"] or 0, until=data["until"], note=data["note"]
        )
        return self.home


class AnotherSupply(OfRefill):
    """Go on from another supply bottle."""

    form_class = AnotherSupplyForm
    template_name = "bottles/another_supply.html"
    submit = "Go on from it"
    said = ""

    def initial(self) -> dict[str, Any]:
        return super().initial() | self.offered.values | {"supply": self.chosen.pk if self.chosen else None}

    def form_kwargs(self) -> dict[str, Any]:
        return {
            "bottle": self.refill.bottle, "offered": self.offered, "at": self.refill.station,
            "mass": refill_words(self.request, self.shop).mass, "station": self.refill.station, "but": self.in_force,
        }  # fmt: skip

    @cached_property
    def in_force(self) -> Bottle:
        """The supply bottle that it's filled from now."""
        return in_force(draws_of(self.refill)).source

    @cached_property
    def chosen(self) -> Supply | None:
        """The supply bottle to go on from."""
        return chosen_supply(self.request, self.refill.bottle, self.refill.station, self.in_force)

    @cached_property
    def judged(self) -> Judged:
        """The bottle and the supply bottle to go on from."""
        return Judged.of(self.shop, self.refill.bottle, self.chosen)

    @cached_property
    def offered(self) -> Offered:
        """The readings last taken at the station."""
        return readings_offered(self.refill.station)

    def post(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        if not {"forecast", "course"} & request.POST.keys():
            return super().post(request, *args, **kwargs)
        form = self.form(request.POST)
        form.look_only()
        if not request.headers.get("HX-Request"):
            return self.show(form)
        found, bottle = self.worked(form), {"bottle": self.refill.bottle}  # asked while typing: one part alone
        if "course" in request.POST:
            part = details_part(found, refill_words(request, self.shop), begun=True)
            return render(request, "bottles/_forecast_details.html", bottle | part)
        return render(request, "bottles/_forecast.html", bottle | self.part(found, form))

    def worked(self, form: AnotherSupplyForm) -> Worked:
        """The forecast to what the refill was opened with."""
        return worked(form, self.refill.bottle, self.judged, limit_g=self.refill.target_g, method=self.refill.method)

    def part(self, found: Worked, form: AnotherSupplyForm) -> dict[str, Any]:
        """The variables of the forecast's part."""
        return forecast_part(found, form, self.refill.bottle, self.judged, refill_words(self.request, self.shop))

    def asked(self, form: AnotherSupplyForm) -> Asked:
        """What the forecast is asked for: the limit that the refill was opened with."""
        found = asked_for(self.refill.bottle, form.cleaned_data["supply"], self.judged)
        return replace(found, limit_g=self.refill.target_g)

    def act(self, form: AnotherSupplyForm, person: User, key: uuid.UUID) -> str:
        readings = form.readings(bottle_weight=form.cleaned_data["gross"])
        if readings is None:
            raise Refusal("Read both temperatures first.", code="reading missing")
        asked = self.asked(form)
        answer = forecast_by(asked, readings, self.refill.method)
        steps.add_draw(
            key=key, person=person, refill=self.refill, version=form.cleaned_data["version"] or 0, asked=asked, answer=answer,
            weight=form.weight(),
        )  # fmt: skip
        return self.home

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Fill {self.refill.bottle.code} on from another supply bottle"}

    def show(self, form: Any, *, status: int = 200) -> HttpResponse:
        found = self.worked(form)
        context = {"form": form, "submit": self.submit} | self.context() | self.part(found, form)
        if "course" in self.request.POST:
            context |= details_part(found, refill_words(self.request, self.shop), begun=True)
        return render(self.request, self.template_name, context, status=status)


class Close(OfRefill):
    """Close it on the weighing that was made with the line disconnected."""

    form_class = CloseForm
    submit = "Close"
    said = "Closed."

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Close the refill of {self.refill.bottle.code}"}

    def act(self, form: CloseForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        steps.close_refill(
            key=key, person=person, refill=self.refill, version=data["version"] or 0, ended_by=data["ended_by"]
        )
        return self.home


@allow(EVERYONE, room="counter")
def receipt(request: HttpRequest, pk: int) -> HttpResponse:
    """A plain sheet of one refill, to print."""
    refill = refill_or_404(pk)
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    context = {"refill": refill, "bottle": refill.bottle, "shop": shop, "back_url": reverse("bottles:refill", args=[pk])}
    said = page_context(refill, words, shop)
    placed = {"placed": [draw for draw in said["draws"] if draw["compared"]]}
    return render(request, "bottles/receipt.html", context | said | placed)


def section(request: HttpRequest, seen: Seen) -> dict[str, Any]:
    """The bottle's last refills, forecast against what came."""
    words = refill_words(request, seen.shop)
    found = latest_refills_of(seen.bottle)
    return {"refills": section_rows(found[:LISTED], words, seen.shop), "more_refills": len(found) > LISTED}
