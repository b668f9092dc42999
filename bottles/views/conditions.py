"""Note what is wrong, end it; condemn and retire a bottle."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404

from bottles.forms.conditions import CondemnForm, ConditionForm, EndForm, RetireForm
from bottles.models import Condition
from bottles.rules.conditions import label_of
from bottles.services import conditions
from bottles.views.of_bottle import BottleActView
from shop.base import clock
from shop.base.permissions import BENCH, MANAGERS
from shop.people.models import User


class NoteCondition(BottleActView):
    """Note something that is wrong: whoever sees it, at once."""

    form_class = ConditionForm
    template_name = "bottles/condition.html"
    submit = "Note it"

    def initial(self) -> dict[str, Any]:
        return {"seen_on": clock.today(self.shop), "code": self.request.GET.get("code", "")}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Note damage on {self.bottle.code}"}

    def act(self, form: ConditionForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        conditions.note_condition(
            key=key, person=person, bottle=self.bottle, code=data["code"], note=data["note"], seen_on=data["seen_on"]
        )
        return self.bottle.get_absolute_url()


class EndCondition(BottleActView):
    """Say what ended a condition."""

    roles = BENCH
    form_class = EndForm
    template_name = "bottles/act.html"
    submit = "End it"
    condition: Condition

    def find(self, **kwargs: Any) -> None:
        super().find(**kwargs)
        found = Condition.objects.filter(bottle=self.bottle, pk=kwargs["pk"]).select_related("bottle").first()
        if found is None:
            raise Http404
        self.condition = found

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"End what is wrong with {self.bottle.code}",
            "intro": f"{label_of(self.condition.code).capitalize()}, seen on {self.condition.seen_on:%Y-%m-%d}.",
        }

    def act(self, form: EndForm, person: User, key: uuid.UUID) -> str:
        conditions.end_condition(key=key, person=person, condition=self.condition, how=form.cleaned_data["how"])
        return self.bottle.get_absolute_url()


class Condemn(BottleActView):
    """Condemn a bottle for good."""

    roles = MANAGERS
    form_class = CondemnForm
    template_name = "bottles/act.html"
    submit = "Condemn it"

    def initial(self) -> dict[str, Any]:
        return {"seen_on": clock.today(self.shop)}

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Condemn {self.bottle.code}",
            "cautions": [
                "A condemned bottle may still be full: empty it outdoors before it's cut, drilled or handed on.",
                "Marking or destroying it is for a licensed test house, by its owner's word and your local rules.",
            ],
        }

    def act(self, form: CondemnForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        conditions.note_condition(
            key=key, person=person, bottle=self.bottle, code=conditions.CONDEMNED, note=data["note"], seen_on=data["seen_on"]
        )
        return self.bottle.get_absolute_url()


class Retire(BottleActView):
    """Take a bottle out of the register for good."""

    roles = MANAGERS
    form_class = RetireForm
    template_name = "bottles/act.html"
    submit = "Retire it"

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Retire {self.bottle.code}",
            "intro": "Scrapped, sold, lost or gone for good. Its history stays, its code isn't used again.",
        }

    def act(self, form: RetireForm, person: User, key: uuid.UUID) -> str:
        conditions.retire(key=key, person=person, bottle=self.bottle, reason=form.cleaned_data["reason"])
        return self.bottle.get_absolute_url()
