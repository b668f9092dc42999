"""Forms for what comes and goes outside a refill: delivered, returned, used, vented, reversed."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.forms.parts import text
from bottles.forms.weighing import OnScaleForm
from bottles.services.delivering import Ticket
from shop.base.fields import HappenedField, MassField
from shop.base.models import Place
from shop.cars.models import Car
from shop.people.acting import ActForm

EITHER = "Either how much, or what the scale says now: then what went is worked out from the books."


class OutForm(OnScaleForm):
    """How much went: told, or by the scale."""

    optional = True

    amount = MassField(label="How much went", required=False, help_text=EITHER)
    happened_at = HappenedField()

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if self.errors.keys() & {"amount", "gross", "scale"}:
            return cleaned
        if (cleaned.get("amount") is None) == (cleaned.get("gross") is None):
            either = forms.ValidationError("Say either how much went, or what the scale says now.", code="one of two")
            self.add_error("amount", either)
        return cleaned


class UseForm(OutForm):
    """Used by a car."""

    car = forms.ModelChoiceField(
        label="Car", queryset=Car.objects.filter(active=True).order_by("number"), empty_label="choose a car",
        error_messages={"required": "Say which car used it."},
    )  # fmt: skip
    note = text("Note", 200, help_text="The run, the class, the day.")
    field_order = ("car", "amount", "scale", "gross", "wet", "note", "happened_at")


class VentForm(OutForm):
    """Let out into the open air."""

    reason = text(
        "Where and why", 200, required=True, help_text="In the yard, overfull; before a repair of the valve.",
        error_messages={"required": "Say where it was let out and why."},
    )  # fmt: skip
    field_order = ("reason", "amount", "scale", "gross", "wet", "happened_at")


class DeliverForm(OnScaleForm):
    """A supply bottle that came full."""

    optional = True

    supplier = text("Supplier", 120, required=True, error_messages={"required": "Say who brought it."})
    ticket = text("Ticket number", 60, required=True, error_messages={"required": "Type the number of the delivery's ticket."})
    ticket_net = MassField(
        label="Net weight on the ticket", required=False,
        help_text="Kept beside our weighing. The books take the scale's figure; without one, the ticket's.",
    )  # fmt: skip
    lot = text("Lot", 60)
    race_grade = forms.TypedChoiceField(
        label="Grade", required=False, choices=[("", "not stated"), ("yes", "race grade (with SO2)"), ("no", "without SO2")],
        coerce=lambda value: {"yes": True, "no": False}.get(value), empty_value=None,
    )  # fmt: skip
    place = forms.ModelChoiceField(
        label="Where it stands", queryset=Place.objects.filter(active=True).order_by("name"),
        error_messages={"required": "Say where it stands, so that the next person finds it."},
    )  # fmt: skip
    happened_at = HappenedField()
    field_order = ("supplier", "ticket", "ticket_net", "lot", "race_grade", "scale", "gross", "wet", "place", "happened_at")

    def paper(self) -> Ticket:
        """What the ticket says."""
        data = self.cleaned_data
        return Ticket(
            supplier=data["supplier"], number=data["ticket"], net=data["ticket_net"], lot=data["lot"],
            race_grade=data["race_grade"],
        )


class GiveBackForm(OnScaleForm):
    """A supply bottle that goes back."""

    optional = True

    supplier = text("Given back to", 120, required=True, error_messages={"required": "Say to whom it goes back."})
    reason = text("Reason, if the books say otherwise", 200, help_text="Only asked where scale and books differ beyond their ±.")
    happened_at = HappenedField()
    field_order = ("supplier", "scale", "gross", "wet", "reason", "happened_at")


class ReverseForm(ActForm):
    """Why a movement is reversed."""

    reason = text(
        "What was wrong", 200, required=True, error_messages={"required": "Say why: the reason stays beside the movement."}
    )
