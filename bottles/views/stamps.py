"""Record a stamp; strike one that was read wrongly."""

from __future__ import annotations

import uuid
from typing import Any

from django.http import Http404

from bottles.forms.stamps import StampForm, StrikeForm
from bottles.models import Stamp
from bottles.selectors.register import stamps_of
from bottles.services.refusals import Contradicted, Unconfirmed
from bottles.services.stamps import record_stamp, strike_stamp
from bottles.views.of_bottle import BottleActView
from bottles.views.register_section import stamp_row
from shop.people.models import User


class NewStamp(BottleActView):
    """Record one stamp; all that were read stand above the form."""

    form_class = StampForm
    template_name = "bottles/stamps.html"
    submit = "Record this stamp"
    said = "Recorded."

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Stamps of {self.bottle.code}",
            "stamps": [stamp_row(self.bottle, stamp) for stamp in stamps_of(self.bottle)],
        }

    def act(self, form: StampForm, person: User, key: uuid.UUID) -> str:
        try:
            record_stamp(key=key, person=person, bottle=self.bottle, stamp=form.seen(), confirmed=form.cleaned_data["confirmed"])
        except Unconfirmed as asked:
            form.ask(asked.reasons)
            raise
        except Contradicted as refusal:
            refusal.field = "date"
            raise
        return self.request.path  # several stamps are read in a row

    def first_page(self, act: Any) -> str:
        return self.request.path


class StrikeStamp(BottleActView):
    """Strike a stamp that was read wrongly."""

    form_class = StrikeForm
    template_name = "bottles/act.html"
    submit = "Strike it"
    said = "Struck. It stays to be seen and counts no more."
    stamp: Stamp

    def find(self, **kwargs: Any) -> None:
        super().find(**kwargs)
        found = Stamp.objects.filter(bottle=self.bottle, pk=kwargs["pk"]).select_related("bottle").first()
        if found is None:
            raise Http404
        self.stamp = found

    def context(self) -> dict[str, Any]:
        row = stamp_row(self.bottle, self.stamp)
        return super().context() | {
            "heading": f"Strike a stamp of {self.bottle.code}",
            "intro": f"{row['kind'].capitalize()} {row['date']}, typed as “{row['typed']}”. Record the right one afterwards.",
        }

    def act(self, form: StrikeForm, person: User, key: uuid.UUID) -> str:
        strike_stamp(key=key, person=person, stamp=self.stamp, reason=form.cleaned_data["reason"])
        return self.bottle.get_absolute_url()
