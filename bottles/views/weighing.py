"""Weigh a bottle; strike a weighing that was mistyped."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.http import Http404
from django.utils.functional import cached_property

from bottles.forms.weighing import StrikeWeighingForm, WeighForm
from bottles.models import Bottle, Weighing
from bottles.selectors.contents import holding_of
from bottles.selectors.counter import came_in_unweighed
from bottles.selectors.judging import rulebook
from bottles.selectors.scales import Checked, checked_scales
from bottles.services import weighing
from bottles.views.holding_words import at, expected_pressure, tell
from bottles.views.of_bottle import BottleActView
from bottles.views.refill_words import refill_words
from bottles.views.scales import check_words
from shop.base.permissions import EVERYONE
from shop.people.models import User
from shop.physics import units
from shop.physics.errors import QuantityError


class Weigh(BottleActView):
    """Weigh a bottle."""

    form_class = WeighForm
    template_name = "bottles/weigh.html"
    submit = "Record the weight"
    said = ""

    def initial(self) -> dict[str, Any]:
        last = self.standing.weighing
        step = self.request.GET.get("step", "")
        asked = self.request.GET.get("scale", "")
        scale = int(asked) if asked.isdecimal() and len(asked) < 10 else (last.scale_id if last else None)
        if step not in ("arrival", "stored", "dispatch", "stocktake"):
            step = "arrival" if came_in_unweighed(self.standing) else "stored"
        return {"scale": scale, "step": step}

    @cached_property
    def scales(self) -> list[Checked]:
        """The scales in use with their last checks, for the form and for what stands beside it."""
        return checked_scales(self.shop)

    def form_kwargs(self) -> dict[str, Any]:
        return {"scales": self.scales}

    def context(self) -> dict[str, Any]:
        words = refill_words(self.request, self.shop)
        holding = holding_of(self.bottle, self.standing)
        limit = rulebook(self.shop).judge_all([self.bottle], {self.bottle.pk: self.standing})[self.bottle.pk].limit.grams
        typed = self.request.GET.get("t", "")[:64]
        expects, trouble = "", ""
        if typed and holding.grams is not None:
            try:
                entry = units.parse_temperature(typed, default_unit=words.units.temperature)
                expects = expected_pressure(holding.grams, self.bottle, entry.stored, words) or "unknown without a water capacity"
            except QuantityError as wrong:
                trouble = wrong.sentence
        tare = self.standing.tare
        scales = [check_words(checked, self.shop) for checked in self.scales]
        return super().context() | {
            "heading": f"Weigh {self.bottle.code}",
            "holds": tell(holding, limit, words, self.shop),
            "tare": words.tare(tare),
            "has_tare": tare is not None,
            "scales": scales,
            "not_checked": ", ".join(row["scale"].name for row in scales if row["kind"] == "after"),
            "at_typed": typed,
            "expects": expects,
            "trouble": trouble,
        }

    def act(self, form: WeighForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        kept = weighing.weigh(
            key=key, person=person, bottle=self.bottle, scale=data["scale"], gross=data["gross"], wet=data["wet"],
            step=data["step"], happened_at=data["happened_at"], reason=data["reason"],
        )
        tell_result(self, self.bottle, kept)
        return self.bottle.get_absolute_url()


class Strike(BottleActView):
    """Strike a weighing."""

    roles = EVERYONE
    form_class = StrikeWeighingForm
    template_name = "bottles/act.html"
    submit = "Strike it"
    said = "Struck. It stays to be seen and counts no more; what it had moved is reversed."
    weighing: Weighing

    def find(self, **kwargs: Any) -> None:
        found = Weighing.objects.filter(pk=kwargs["pk"]).select_related("bottle", "scale").first()
        if found is None:
            raise Http404("There is no such weighing.")
        self.weighing, self.bottle = found, found.bottle

    def form_kwargs(self) -> dict[str, Any]:
        return {"scale": self.weighing.scale}

    def context(self) -> dict[str, Any]:
        row, words = self.weighing, refill_words(self.request, self.shop)
        return super().context() | {
            "heading": f"Strike a weighing of {self.bottle.code}",
            "intro": f"Typed as “{row.typed}” on {row.scale.name}, {at(row.happened_at, self.shop)}: "
            f"{words.mass(row.net_g, plus_minus_g=row.error_g)} of nitrous.",
        }

    def act(self, form: StrikeWeighingForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        weighing.strike(key=key, person=person, weighing=self.weighing, reason=data["reason"], right=data["right"])
        return self.bottle.get_absolute_url()


def tell_result(view: BottleActView, bottle: Bottle, kept: Weighing) -> None:
    """Say what a weighing found, and what it moved in the books."""
    words = refill_words(view.request, view.shop)
    said = f"{bottle.code} holds {words.mass(kept.net_g, plus_minus_g=kept.error_g)}, weighed as “{kept.typed}”."
    moved = kept.movements.filter(reversal__isnull=True).prefetch_related("lines__source", "lines__target").first()
    if moved is not None:
        line = moved.lines.exclude(origin="computed").select_related("source__customer", "target__customer").first()
        if line is not None:
            said += f" {_moved_words(moved.kind, line, words)}"
    messages.success(view.request, said)


def _moved_words(kind: str, line: Any, words: Any) -> str:
    into = line.target.kind == "bottle"
    other = line.source if into else line.target
    amount = words.mass(line.grams)
    if kind == "opening":
        return f"The books open with {amount}."
    if other.kind == "customer":
        if into:
            return f"It came back {amount} heavier: filled elsewhere, so what is in it isn't known."
        return f"{amount} used by its owner."
    if other.kind == "car":
        return f"{amount} used by {other}."
    return f"{amount} {'over' if into else 'short'}: {other.get_kind_display()}."
