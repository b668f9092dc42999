"""Start a new tare."""

from __future__ import annotations

import uuid
from typing import Any

from bottles.forms.tares import TareForm, typed_parts
from bottles.selectors.register import tares_of
from bottles.services.refusals import Unconfirmed
from bottles.services.tares import start_tare
from bottles.views.of_bottle import BottleActView
from bottles.views.wording import words_for
from shop.people.models import User


class NewTare(BottleActView):
    """A new list of what is on the bottle starts a new tare."""

    form_class = TareForm
    template_name = "bottles/tare.html"
    submit = "Start this tare"

    def initial(self) -> dict[str, Any]:
        tare = tares_of(self.bottle).first()
        return {"tare_basis": tare.basis if tare else "weighed"} | typed_parts(tare, unit=self.bare_mass)

    def context(self) -> dict[str, Any]:
        tare = tares_of(self.bottle).first()
        return super().context() | {
            "heading": f"Tare of {self.bottle.code}",
            "in_force": words_for(self.request, self.shop).tare(tare) if tare else "",
        }

    def act(self, form: TareForm, person: User, key: uuid.UUID) -> str:
        tare = form.new_tare()
        assert tare is not None  # the form asks for it
        try:
            start_tare(
                key=key, person=person, bottle=self.bottle, tare=tare, since=form.cleaned_data["since"],
                confirmed=form.cleaned_data["confirmed"], reason=form.cleaned_data["reason"],
            )
        except Unconfirmed as asked:
            form.ask(asked.reasons)
            raise
        return self.bottle.get_absolute_url()
