"""Pages for where a bottle is: check in, move, what it waits for, hand over."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages

from bottles.forms.custody import CheckInForm, HandOverForm, MoveForm, WantedForm, wanted_words
from bottles.models import Custody, Standing
from bottles.selectors.contents import holding_of
from bottles.selectors.judging import judge_bottle, rulebook
from bottles.services import custody
from bottles.views.of_bottle import BottleActView
from bottles.views.refill_words import refill_words
from shop.people.models import User


class CustodyView(BottleActView):
    """Goes back to the bottle, and says where what was entered late changed nothing of today."""

    def after(self, kept: Custody) -> str:
        """Return the bottle's page; tell where something later already says where it is."""
        if Standing.objects.get(bottle=self.bottle).custody_id != kept.pk:
            messages.info(self.request, "Kept with the time at which it happened. Something later says where the bottle is now.")
        return self.bottle.get_absolute_url()


class CheckIn(CustodyView):
    """Take a bottle in."""

    form_class = CheckInForm
    submit = "Check in"

    def initial(self) -> dict[str, Any]:
        return {"brought_by": str(owner_name(self.standing)), "place": first_counter()}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Check in {self.bottle.code}"}

    def act(self, form: CheckInForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        kept = custody.check_in(
            key=key, person=person, bottle=self.bottle, place=data["place"], brought_by=data["brought_by"],
            wanted=wanted_words(data), promised_at=data["promised_at"], happened_at=data["happened_at"],
        )
        return self.after(kept)


class Move(CustodyView):
    """Put a bottle at another place."""

    form_class = MoveForm
    submit = "Move"

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Move {self.bottle.code}"}

    def act(self, form: MoveForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        kept = custody.move(
            key=key, person=person, bottle=self.bottle, place=data["place"], happened_at=data["happened_at"]
        )
        return self.after(kept)


class Want(BottleActView):
    """Change what a bottle waits for."""

    form_class = WantedForm

    def initial(self) -> dict[str, Any]:
        last = self.standing.custody
        choice, _, note = (last.wanted if last else "").partition(": ")
        return {"wanted": choice, "wanted_note": note, "promised_at": last.promised_at if last else None}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"What {self.bottle.code} waits for"}

    def act(self, form: WantedForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        custody.want(
            key=key, person=person, bottle=self.bottle, wanted=wanted_words(data), promised_at=data["promised_at"]
        )
        return self.bottle.get_absolute_url()


class HandOver(CustodyView):
    """Give a bottle out."""

    form_class = HandOverForm
    submit = "Hand over"
    said = ""

    @property
    def holds(self) -> str:
        """What is in it, as whoever takes it is told."""
        holding = holding_of(self.bottle)
        if holding.grams is None:
            return "what it holds isn't known: nobody weighed it"
        words = refill_words(self.request, self.shop)
        return f"it holds {words.mass(holding.grams, plus_minus_g=holding.error_g or None)} of nitrous ({holding.origin})"

    def form_kwargs(self) -> dict[str, Any]:
        return {"house": rulebook(self.shop).edition.words["house"]}

    def initial(self) -> dict[str, Any]:
        last = self.standing.custody
        return {"to_whom": last.with_whom if last else ""}

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Hand over {self.bottle.code}",
            "intro": f"Tell whoever takes it what is in it: {self.holds}. A bottle for a test is let out and weighed first, "
            "if the house takes only empty ones.",
        }

    def act(self, form: HandOverForm, person: User, key: uuid.UUID) -> str:
        data, holds = form.cleaned_data, self.holds
        kept = custody.hand_over(
            key=key, person=person, bottle=self.bottle, kind=data["kind"], to_whom=data["to_whom"], car=data["car"],
            limit_g=judge_bottle(self.bottle, shop=self.shop).limit.grams, happened_at=data["happened_at"],
            reason=data["reason"],
        )
        went = dict(form.fields["kind"].choices)[data["kind"]]  # type: ignore[attr-defined]
        messages.success(self.request, f"{self.bottle.code} went {went}; {holds}.")
        return self.after(kept)


def owner_name(standing: Any) -> str:
    """Return the owner's name as the likely bringer, or nothing."""
    owner = standing.ownership
    return owner.customer.name if owner and owner.customer else ""


def first_counter() -> Any:
    """Return the place at the counter where bottles come in, or None."""
    from shop.base.models import Place

    return Place.objects.filter(active=True, kind="counter").order_by("pk").first()
