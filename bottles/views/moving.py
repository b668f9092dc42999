"""What comes and goes outside a refill: delivered, given back, used by a car, vented."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.utils.functional import cached_property

from bottles.forms.moving import DeliverForm, GiveBackForm, UseForm, VentForm
from bottles.models import Delivery
from bottles.selectors.contents import holding_of
from bottles.selectors.judging import judge_bottle
from bottles.services import delivering, moving
from bottles.services.venting_worth import venting_worth
from bottles.views.custody import first_counter
from bottles.views.holding_words import tell
from bottles.views.of_bottle import BottleActView
from bottles.views.refill_words import refill_words
from shop.base.permissions import EVERYONE
from shop.people.models import User
from shop.physics.units import parse_mass

VENTING = [
    "Outdoors only, away from doors, drains, pits and flames; nitrous is heavier than air and takes the oxygen's place.",
    "Gloves and eye protection: liquid nitrous burns skin by cold. Never breathe it.",
    "A bottle with a dip tube vents liquid when it stands upright; strap it down and open the valve slowly.",
]
ROOM_MK = 293_150  # as warm as a bottle is taken to be where nobody read it: 20 °C


class MovingView(BottleActView):
    """A page that moves contents; what the bottle holds stands above the form."""

    template_name = "bottles/moving.html"
    room = "counter"

    def initial(self) -> dict[str, Any]:
        last = self.standing.weighing
        return {"scale": last.scale_id if last else None}

    @cached_property
    def limit_g(self) -> int | None:
        """Its fill limit."""
        return judge_bottle(self.bottle, shop=self.shop).limit.grams

    def context(self) -> dict[str, Any]:
        words = refill_words(self.request, self.shop)
        return super().context() | {"holds": tell(holding_of(self.bottle), self.limit_g, words, self.shop)}


class Use(MovingView):
    """Used by a car."""

    form_class = UseForm
    submit = "Record what was used"
    said = "Recorded."

    def initial(self) -> dict[str, Any]:
        last = self.standing.custody
        return super().initial() | {"car": last.car_id if last else None}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Used from {self.bottle.code}"}

    def act(self, form: UseForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        moving.use(
            key=key, person=person, bottle=self.bottle, car=data["car"], amount=data["amount"], weighed=form.weighed(),
            happened_at=data["happened_at"], note=data["note"],
        )
        return self.bottle.get_absolute_url()


class Vent(MovingView):
    """Let out into the open air."""

    form_class = VentForm
    submit = "Record what was vented"
    said = "Recorded."

    def context(self) -> dict[str, Any]:
        said = super().context() | {"heading": f"Vented from {self.bottle.code}", "cautions": VENTING}
        return said | {"worth": self.worth()}

    def worth(self) -> dict[str, Any] | None:
        """What letting out would do, as a table."""
        words = refill_words(self.request, self.shop)
        amount = parse_mass("1 lb" if words.units.name == "us" else "500 g", default_unit="g").stored
        rows = venting_worth(self.bottle, amount_g=amount, limit_g=self.limit_g, temperature_mk=ROOM_MK)
        if not rows:
            return None
        return {
            "head": ["It stands", "What comes", "Let out", "Cools to", "Gauge then"],
            "rows": [
                [
                    "upside down" if row.inverted else "upright", row.phase, words.mass(row.lost_g),
                    words.temperature(row.temperature_mk), words.pressure(row.pressure_pa),
                ]
                for row in rows
            ],
            "from": words.temperature(ROOM_MK),
        }  # fmt: skip

    def act(self, form: VentForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        moving.vent(
            key=key, person=person, bottle=self.bottle, reason=data["reason"], amount=data["amount"], weighed=form.weighed(),
            happened_at=data["happened_at"],
        )
        return self.bottle.get_absolute_url()


class Deliver(MovingView):
    """A supply bottle came full."""

    form_class = DeliverForm
    submit = "Record the delivery"
    said = ""

    def initial(self) -> dict[str, Any]:
        owner = self.standing.ownership
        last = Delivery.objects.order_by("-id").first()
        supplier = owner.supplier if owner and owner.supplier else (last.supplier if last else "")
        return super().initial() | {"supplier": supplier, "place": first_counter()}

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Delivery of {self.bottle.code}"}

    def act(self, form: DeliverForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        delivery = delivering.deliver(
            key=key, person=person, bottle=self.bottle, ticket=form.paper(), place=data["place"], weighed=form.weighed(),
            happened_at=data["happened_at"],
        )
        messages.success(self.request, delivery_words(delivery, refill_words(self.request, self.shop)))
        return self.bottle.get_absolute_url()


class GiveBack(MovingView):
    """A supply bottle goes back."""

    roles = EVERYONE
    form_class = GiveBackForm
    submit = "Record the return"
    said = ""

    def initial(self) -> dict[str, Any]:
        owner = self.standing.ownership
        return super().initial() | {"supplier": owner.supplier if owner else ""}

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Return {self.bottle.code} to the supplier",
            "intro": "An “empty” supply bottle still holds a sixth to a third of a charge as vapour (common practice, no source): "
            "weigh it, so that what goes back is on the books.",
        }

    def act(self, form: GiveBackForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        movement = delivering.give_back(
            key=key, person=person, bottle=self.bottle, supplier=data["supplier"], weighed=form.weighed(),
            happened_at=data["happened_at"], reason=data["reason"],
        )
        line = movement.lines.filter(target__kind="returned").first() if movement else None
        words = refill_words(self.request, self.shop)
        held = words.mass(line.grams, plus_minus_g=line.error_g or None) if line else "nothing by the books"
        messages.success(self.request, f"{self.bottle.code} went back with {held}.")
        return self.bottle.get_absolute_url()


def delivery_words(delivery: Delivery, words: Any) -> str:
    """A delivery in a sentence: the ticket beside our scale, and what they differ by."""
    ticket, ours = delivery.ticket_net_g, delivery.weighing
    said = f"Ticket {delivery.ticket}"
    said += f" says {words.mass(ticket)}" if ticket else " gives no weight"
    if ours is None:
        return f"{said} (entered); not weighed here yet."
    said += f", our scale {words.mass(ours.net_g, plus_minus_g=ours.error_g)}"
    if ticket and (gap := ours.net_g - ticket):
        within = ", within the ±" if abs(gap) <= ours.error_g else ""
        said += f": {words.mass(abs(gap))} {'over' if gap > 0 else 'short'}{within}"
    return f"{said}."
