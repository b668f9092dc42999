"""The day's fill plan: the page, and the form that asks for it."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.forms.planning import DEFAULTS, TEMPERATURES, PlanForm
from bottles.models import DayPlan
from bottles.selectors import planning as selected
from bottles.services.planning import AT_ONCE, ask_for_plan
from bottles.views.plan_words import PlanWords
from bottles.views.refill_words import refill_words
from shop.base import clock
from shop.base.models import Job, Shop
from shop.base.permissions import DESK, MANAGERS, allow
from shop.people.acting import ActView
from shop.people.models import User
from shop.physics.units import in_own_unit

RUNNING = ("queued", "running")


@allow(DESK, room="counter")
def plan(request: HttpRequest) -> HttpResponse:
    """The latest plan of today; while a new one is made, the last one stays and the page asks again."""
    shop = Shop.objects.get()
    request.shop = shop  # type: ignore[attr-defined]
    asked = selected.plan_of_today(shop)
    context: dict[str, Any] = {"day": f"{clock.today(shop):%a %d %b}", "asked": asked}
    if asked is not None:
        job, result = selected.making(asked), selected.latest_result(asked)
        context |= {
            "made": PlanWords(result, refill_words(request, shop), shop).page() if result else None,
            "work": _work(request, job) if job else None,
            "asks_again": job is not None and job.state in RUNNING,
        }
    return render(request, "bottles/plan.html", context)


class PlanNew(ActView):
    """Say what today is planned with, and have it planned."""

    roles = DESK
    room = "counter"
    form_class = PlanForm
    template_name = "bottles/plan_new.html"
    heading = "Plan the day"
    submit = "Plan the day"
    said = ""

    def find(self, **kwargs: Any) -> None:
        self.places = selected.places_written_down()

    def form_kwargs(self) -> dict[str, Any]:
        return {"places": self.places}

    def context(self) -> dict[str, Any]:
        words = refill_words(self.request, self.shop)
        return {
            "back_url": reverse("bottles:plan"), "at_once": AT_ONCE,
            "places": [
                f"{cold.name}: down to {words.temperature(cold.coldest_k * 1000)}, {cold.takes} at once" for cold in self.places
            ],
        }  # fmt: skip

    def initial(self) -> dict[str, Any]:
        us = (self.request.user.units or self.shop.units) == "us"  # type: ignore[union-attr]
        warm = "68 °F" if us else "20 °C"
        values = DEFAULTS | {"room": warm, "supply": warm}
        last: DayPlan | None = selected.latest_question()
        if last is not None:
            kept = last.inputs
            values |= {name: kept[name] for name in (*DEFAULTS, "freezer_takes") if kept.get(name) is not None}
            unit = "°F" if us else "°C"
            values |= {name: in_own_unit(kept[f"{name}_mk"], unit) for name in TEMPERATURES if kept.get(f"{name}_mk")}
        return values

    def act(self, form: PlanForm, person: User, key: uuid.UUID) -> str:
        ask_for_plan(key=key, person=person, shop=self.shop, inputs=form.inputs())
        return reverse("bottles:plan")

    def first_page(self, act: Any) -> str:
        return reverse("bottles:plan")


def _work(request: HttpRequest, job: Job) -> dict[str, Any]:
    """What `_progress.html` takes; the page itself asks again, so the part doesn't."""
    person: User = request.user  # type: ignore[assignment]
    may_stop = bool(MANAGERS & person.roles) or job.asked_by_id == person.pk
    return {
        "job": job, "what": "Making the day's fill plan", "running": job.state in RUNNING,
        "cancel_url": reverse("rooms:job_cancel", args=[job.pk]) if may_stop else "",
        "result": "The last plan stays as it was." if job.state == "cancelled" else job.note,
    }  # fmt: skip
