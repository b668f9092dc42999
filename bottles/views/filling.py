"""The page that forecasts a refill and opens it, and the part of it that answers while one types."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse, HttpResponseRedirect
from django.shortcuts import render
from django.urls import reverse
from django.utils.functional import cached_property

from bottles.forms.filling import FillForm, ReadingsForm
from bottles.models import Bottle, Refill, Station, Supply
from bottles.rules.conditions import label_of
from bottles.rules.fitness import Judgement
from bottles.selectors.filling_offers import Offered, readings_offered
from bottles.selectors.register import standing_of
from bottles.selectors.scales import scale_checked
from bottles.services.forecast_details import forecast_by
from bottles.services.forecasting import Asked
from bottles.services.refilling import Opening, look_items, open_refill
from bottles.services.scales import check_scale
from bottles.views.forecast_details_words import details_part
from bottles.views.forecast_part import Judged, asked_for, chosen_supply, forecast_part, worked
from bottles.views.judgement import verdict
from bottles.views.of_bottle import BottleActView, bottle_or_404
from bottles.views.reason_rows import reason_rows
from bottles.views.refill_words import refill_words
from bottles.views.wording import words_for
from shop.base.errors import AlreadyDone, Refusal
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, allow
from shop.people.models import User

CAUTIONS = (
    "Nitrous is an oxidiser and is heavier than air: doors open, no oil or grease on any fitting, no flame, no inhaling.",
    "Liquid freezes skin at once: gloves and eye protection on. The bottle stands free on its scale and can't fall.",
    "By weight, never by pressure; never above the limit. "
    "Nothing is warmed above 52\N{NO-BREAK SPACE}°C (125\N{NO-BREAK SPACE}°F).",
)


class Fill(BottleActView):
    """Forecast, and open the refill."""

    form_class = FillForm
    template_name = "bottles/fill.html"
    submit = "Open the refill"
    said = ""
    supply: Supply | None
    judged: Judged

    def find(self, **kwargs: Any) -> None:
        super().find(**kwargs)
        self.supply = chosen_supply(self.request, self.bottle)
        self.judged = Judged.of(self.shop, self.bottle, self.supply)

    def get(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        opened = Refill.objects.filter(bottle=self.bottle, closed_at__isnull=True).first()
        if opened is not None:
            return HttpResponseRedirect(reverse("bottles:refill", args=[opened.pk]))
        return super().get(request, *args, **kwargs)

    def post(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        if {"forecast", "course"} & request.POST.keys():
            form = self.form(request.POST)
            form.look_only()
            return self.show(form)
        return super().post(request, *args, **kwargs)

    @cached_property
    def offered(self) -> Offered:
        """The readings last taken at the supply bottle's station."""
        return readings_offered(self.supply.station if self.supply else None)

    def initial(self) -> dict[str, Any]:
        values: dict[str, Any] = dict(self.offered.values)
        return values | {"supply": self.supply.pk if self.supply else None}

    def form_kwargs(self) -> dict[str, Any]:
        return fill_form_kwargs(self.request, self.bottle, self.judged, self.offered)

    def act(self, form: FillForm, person: User, key: uuid.UUID) -> str:
        self._same_scale(form.cleaned_data["supply"])
        self._check(form, person, key)
        asked = self.asked(form)
        readings = form.readings()
        if readings is None:
            raise Refusal("Read both temperatures first.", code="reading missing")
        data = form.cleaned_data
        answer = forecast_by(asked, readings, data["method"])
        pressure = data.get("pressure")
        found = open_refill(
            key=key, person=person,
            opening=Opening(
                asked=asked, answer=answer, method=data["method"], look=form.look(), wet=data["wet"],
                pressure_kept=None if not pressure else pressure == "kept", dried_and_purged=pressure == "purged",
                happened_at=data["happened_at"], reason=data["reason"],
            ),
        )  # fmt: skip
        if found.refill is None:
            what = ", ".join(label_of(code) for code in found.noted)
            messages.error(self.request, f"Not filled. Noted on the bottle: {what}. Keep it apart and tell its owner.")
            return self.bottle.get_absolute_url()
        return reverse("bottles:refill", args=[found.refill.pk])

    def _same_scale(self, supply: Supply) -> None:
        """Refuse readings that were asked for on another station's scale: its check and weights would be taken for this one's."""
        station = drawn_at(self.request)
        if station in (None, supply.station_id):
            return
        drawn = Station.objects.filter(pk=station).first()
        if drawn is not None and drawn.scale_id != supply.station.scale_id:
            raise Refusal(
                f"{supply.bottle.code} hangs on {supply.station}: weigh on {supply.station.scale or 'its scale'}, "
                "and read again what is asked for now.",
                code="another scale", field="supply",
            )  # fmt: skip

    def _check(self, form: FillForm, person: User, key: uuid.UUID) -> None:
        """Record the scale's check that came with the form: an act of its own, whatever follows."""
        data = form.cleaned_data
        supply: Supply = data["supply"]
        if not form.check_due or supply.station.scale is None:
            return
        try:
            check = check_scale(
                key=uuid.uuid5(key, "scale check"), person=person, scale=supply.station.scale, known=data["check_known"],
                read=data["check_read"], happened_at=data["happened_at"],
            )  # fmt: skip
        except AlreadyDone:
            return
        if not check.passed:
            raise Refusal(
                f"{supply.station.scale} is out by more than it may be. The check is kept; use another scale until it's put right.",
                code="scale failed its check", field="check_read",
            )  # fmt: skip

    def asked(self, form: ReadingsForm) -> Asked:
        """What the forecast is asked for."""
        return asked_for(self.bottle, form.cleaned_data["supply"], self.judged)

    def first_page(self, act: Any) -> str:
        refill = Refill.objects.filter(act=act).first()
        return reverse("bottles:refill", args=[refill.pk]) if refill else self.bottle.get_absolute_url()

    def context(self) -> dict[str, Any]:
        judgement = self.judged[self.bottle]
        answer = verdict(judgement)
        about = [one for one in judgement.reasons if "filling" in one.about and one.severity not in ("explains", "warns")]
        reasons = [one for one in about if one.code not in ("look-owed", "star-check-owed")]
        return {
            "bottle": self.bottle, "cautions": CAUTIONS, "kind": answer.kind, "word": answer.word,
            "reasons": (
                reason_rows(reasons, self.bottle, standing_of(self.bottle), words_for(self.request, self.shop)) if reasons else []
            ),
            "refused": judgement.may_be_filled in ("no", "unknown"), "has_supplies": self.supply is not None,
            "drawn_at": self.supply.station_id if self.supply else "",
        }  # fmt: skip

    def show(self, form: Any, *, status: int = 200) -> HttpResponse:
        words = refill_words(self.request, self.shop)
        found = worked(form, self.bottle, self.judged)
        context = {"form": form, "submit": self.submit} | self.context()
        context |= forecast_part(found, form, self.bottle, self.judged, words)
        if "course" in self.request.POST:
            context |= details_part(found, words)
        return render(self.request, self.template_name, context, status=status)


@allow(EVERYONE, room="counter")
def forecast_live(request: HttpRequest, code: str) -> HttpResponse:
    """The forecast's part alone, from what is typed so far; nothing is saved."""
    form, bottle, judged = _typed(request, code)
    words = refill_words(request, judged.shop)
    part = forecast_part(worked(form, bottle, judged), form, bottle, judged, words)
    station = judged.supply.station_id if judged.supply else None
    if drawn_at(request) not in (None, station):
        # The check of one scale says nothing of another's: it isn't carried over.
        form.data = request.POST.copy()
        for name in ("check_known", "check_read"):
            form.data.pop(name, None)
        part |= {"groups": form.groups(), "drawn_at": station}
    return render(request, "bottles/_forecast_live.html", {"bottle": bottle} | part)


@allow(EVERYONE, room="counter")
def course_live(request: HttpRequest, code: str) -> HttpResponse:
    """What is dear to work out, asked for when it's opened: the course, other starts, the fills left."""
    form, bottle, judged = _typed(request, code)
    part = details_part(worked(form, bottle, judged), refill_words(request, judged.shop))
    return render(request, "bottles/_forecast_details.html", {"bottle": bottle} | part)


def drawn_at(request: HttpRequest) -> int | None:
    """The station that the page's fields were drawn for, where the page says so."""
    said = request.POST.get("drawn_at", "")
    return int(said) if said.isascii() and said.isdigit() and len(said) < 18 else None


def _typed(request: HttpRequest, code: str) -> tuple[FillForm, Bottle, Judged]:
    """The form as typed so far, read for a forecast alone."""
    bottle = bottle_or_404(code)
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    supply = chosen_supply(request, bottle)
    judged, offered = Judged.of(shop, bottle, supply), readings_offered(supply.station if supply else None)
    form = FillForm(
        request.POST, person=request.user, shop=shop, **fill_form_kwargs(request, bottle, judged, offered)  # type: ignore[arg-type]
    )
    form.look_only()
    return form, bottle, judged


def fill_form_kwargs(
    request: HttpRequest, bottle: Bottle, judged: Judged, offered: Offered
) -> dict[str, Any]:  # fmt: skip
    """What the form needs to know of bottle, station and day."""
    shop, station = judged.shop, judged.supply.station if judged.supply else None
    scale = station.scale if station else None
    due = str(scale) if scale is not None and not scale_checked(scale, shop).passed_today else ""
    return {
        "bottle": bottle, "offered": offered, "at": station,
        "mass": refill_words(request, shop).mass, "items": look_items(bottle, shop),
        "ask_pressure": asks_pressure(judged[bottle]), "check_due": due, "limit_g": judged[bottle].limit.grams,
    }  # fmt: skip


def asks_pressure(judgement: Judgement) -> bool:
    """Whether it isn't known that the bottle kept its pressure: an empty or open one."""
    return "pressure kept" in judgement.not_judged or any(reason.code == "dry-and-purge" for reason in judgement.reasons)
