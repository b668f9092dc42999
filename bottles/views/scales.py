"""Pages of scales: the list, adding and changing one, its check with a known weight."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.forms.scales import CheckForm, ScaleForm, scale_as_typed
from bottles.models import Scale
from bottles.selectors.scales import Checked, checked_scales, scale_checked
from bottles.services import scales as service
from bottles.views.holding_words import at
from shop.base import clock
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, MANAGERS, allow
from shop.people.acting import ActView
from shop.people.models import User


@allow(EVERYONE, room="counter")
def scales(request: HttpRequest) -> HttpResponse:
    """Every scale with its last check."""
    shop = Shop.objects.get()
    rows = [check_words(checked, shop) for checked in checked_scales(shop, Scale.objects.order_by("-active", "name"))]
    may_change = bool(MANAGERS & request.user.roles)  # type: ignore[union-attr]
    return render(request, "bottles/scales.html", {"rows": rows, "may_change": may_change})


def check_words(checked: Checked, shop: Shop) -> dict[str, Any]:
    """A scale as pages list it: its state in a word, its last check, when its calibration is due."""
    scale, check = checked.scale, checked.check
    today = clock.today(shop)
    late = scale.calibration_due is not None and scale.calibration_due < today
    if not scale.active:
        kind, word = "open", "Out of use"
    elif checked.failed:
        kind, word = "no", "Failed its check: don't weigh on it"
    elif checked.passed_today:
        kind, word = "yes", "Checked today"
    else:
        kind, word = "after", "Not checked today"
    told = f"{scale.get_style_display()}, steps of {scale.resolution_typed}, error {scale.error_typed}, "
    checks = "never checked"
    if check is not None:
        checks = f"last check {at(check.happened_at, shop)}: {check.known_typed} read as {check.read_typed}, {check}"
    return {
        "scale": scale,
        "kind": kind,
        "word": word,
        "warn": kind in ("no", "after"),
        "told": f"{told}up to {scale.capacity_typed}",
        "check": checks,
        "calibration": f"calibration due {scale.calibration_due}{', overdue' if late else ''}" if scale.calibration_due else "",
        "check_url": reverse("bottles:scale_check", args=[scale.pk]),
        "change_url": reverse("bottles:scale_change", args=[scale.pk]),
    }


class ScaleNew(ActView):
    """Enter a scale."""

    roles = MANAGERS
    room = "counter"
    form_class = ScaleForm
    heading = "Add a scale"
    submit = "Add"
    said = "Added. Check it with a known weight before the day's first fill."

    def initial(self) -> dict[str, Any]:
        us = (self.request.user.units or self.shop.units) == "us"  # type: ignore[union-attr]
        return {"style": "lb" if us else "kg", "active": True}

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("bottles:scales")}

    def act(self, form: ScaleForm, person: User, key: uuid.UUID) -> str:
        service.add_scale(key=key, person=person, data=form.data_of())
        return reverse("bottles:scales")

    def first_page(self, act: Any) -> str:
        return reverse("bottles:scales")


class OfScale(ActView):
    """A page about one scale."""

    room = "counter"
    scale: Scale

    def find(self, **kwargs: Any) -> None:
        found = Scale.objects.filter(pk=kwargs["pk"]).first()
        if found is None:
            raise Http404("There is no such scale.")
        self.scale = found

    def first_page(self, act: Any) -> str:
        return reverse("bottles:scales")

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("bottles:scales")}


class ScaleChange(OfScale):
    """Change what is known of a scale."""

    roles = MANAGERS
    form_class = ScaleForm
    said = "Saved. Weighings made before keep the ± that they were made with."

    def initial(self) -> dict[str, Any]:
        return scale_as_typed(self.scale)

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Change {self.scale.name}"}

    def act(self, form: ScaleForm, person: User, key: uuid.UUID) -> str:
        service.change_scale(
            key=key, person=person, scale=self.scale, version=form.cleaned_data["version"] or 0, data=form.data_of()
        )
        return reverse("bottles:scales")


class ScaleCheck(OfScale):
    """Check a scale with a known weight."""

    roles = EVERYONE
    form_class = CheckForm
    submit = "Record the check"
    said = ""

    def form_kwargs(self) -> dict[str, Any]:
        return {"scale": self.scale}

    def context(self) -> dict[str, Any]:
        row = check_words(scale_checked(self.scale, self.shop), self.shop)
        return super().context() | {
            "heading": f"Check {self.scale.name}",
            "intro": "Put a known weight on it before the day's first fill. It passes within its error of "
            f"{self.scale.error_typed} and one step of {self.scale.resolution_typed}. So far: {row['check']}.",
        }

    def act(self, form: CheckForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        kept = service.check_scale(
            key=key, person=person, scale=self.scale, known=data["known"], read=data["read"], happened_at=data["happened_at"]
        )
        if kept.passed:
            messages.success(self.request, f"{self.scale.name} passed.")
        else:
            messages.error(self.request, f"{self.scale.name} failed: nothing is weighed on it until a check passes. Use another.")
        return reverse("bottles:scales")
