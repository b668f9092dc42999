"""Register a bottle; complete or correct what is written of it."""

from __future__ import annotations

import uuid
from typing import Any

from django.urls import reverse

from bottles.forms.particulars import ChangeForm, particulars_typed
from bottles.forms.registering import NewBottleForm
from bottles.models import Bottle
from bottles.services import registering
from bottles.services.refusals import BottleKnown, Contradicted, Unconfirmed
from bottles.views.of_bottle import BottleActView
from shop.base.errors import Stale
from shop.base.permissions import EVERYONE
from shop.people.acting import ActView
from shop.people.models import User

# What a rule's code is about, so that its sentence stands beside that field.
FIELD_OF_CODE = {
    "charge-above-capacity": "size",
    "tare-implausible": "tare",
    "wall-contradicts-mark": "wall",
    "permit-missing": "permit",
    "mark-unknown": "mark",
    "not-refillable": "mark",
    "not-on-the-row": "mark",
    "foreign-mark": "mark",
    "aircraft-only": "mark",
    "service-pressure-too-low": "mark",
    "test-pressure-too-low": "mark",
    "test-before-manufacture": "test_stamp",
    "life-before-manufacture": "end_stamp",
    "star-on-aluminium": "test_stamp",
    "star-too-large": "test_stamp",
    "star-too-old": "test_stamp",
}
# Which field of the form holds a column of the table; what only follows from another isn't told twice.
FIELD_OF_COLUMN = {
    "capacity_typed": "capacity", "below_tube_typed": "below_tube", "charge_typed": "size",
    "permit_charge_g": "permit_charge", "own_limit_g": "own_limit",
    "permit_lists_nitrous": "permit_lists",
}  # fmt: skip
FOLLOWS = {"capacity_ml", "charge_g", "below_tube_ml"}


def asking(form: Any, refusal: Exception) -> None:
    """Let the form show what a refusal asks for: ticks, or the bottle that is known already."""
    if isinstance(refusal, Unconfirmed):
        form.ask(refusal.reasons)
        codes = [dict(reason.values).get("code") for reason in refusal.reasons if reason.code == "serial-known"]
        form.known = Bottle.objects.filter(code__in=codes).first()
    elif isinstance(refusal, Contradicted):
        refusal.field = FIELD_OF_CODE.get(refusal.code)
    elif isinstance(refusal, BottleKnown):
        form.known = refusal.bottle


class NewBottle(ActView):
    """Register a bottle."""

    roles = EVERYONE
    room = "counter"
    form_class = NewBottleForm
    template_name = "bottles/register.html"
    heading = "Register a bottle"
    submit = "Register"
    said = ""

    def initial(self) -> dict[str, Any]:
        serial = self.request.GET.get("serial", "").replace("\0", "")[:60]
        return {"owner": "customer", "serial": serial}

    def act(self, form: NewBottleForm, person: User, key: uuid.UUID) -> str:
        try:
            bottle = registering.register_bottle(
                key=key, person=person, particulars=form.particulars(), first=form.first_facts(),
                code=form.cleaned_data["code"], confirmed=form.cleaned_data["confirmed"],
            )
        except (Unconfirmed, Contradicted, BottleKnown) as refusal:
            asking(form, refusal)
            raise
        self.said = f"Registered as {bottle.code}."
        return bottle.get_absolute_url()

    def first_page(self, act: Any) -> str:
        return reverse("bottles:bottle", args=[act.subject.partition(":")[2]])


class ChangeBottle(BottleActView):
    """Complete or correct what is written of a bottle."""

    form_class = ChangeForm
    template_name = "bottles/edit.html"

    def initial(self) -> dict[str, Any]:
        return particulars_typed(self.bottle, unit=self.bare_mass)

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Complete or correct {self.bottle.code}"}

    def act(self, form: ChangeForm, person: User, key: uuid.UUID) -> str:
        try:
            registering.change_bottle(
                key=key, person=person, bottle=self.bottle, version=form.cleaned_data["version"] or 0,
                particulars=form.particulars(), confirmed=form.cleaned_data["confirmed"],
            )
        except (Unconfirmed, Contradicted, BottleKnown) as refusal:
            asking(form, refusal)
            raise
        except Stale as stale:
            theirs = {FIELD_OF_COLUMN.get(name, name): value for name, value in stale.theirs.items() if name not in FOLLOWS}
            raise Stale(theirs=theirs, version=stale.version) from None
        return self.bottle.get_absolute_url()
