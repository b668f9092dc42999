"""What is on the bottle when it's weighed: one figure, or a list of things."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.forms.parts import RegisterForm, text
from bottles.models import Scale, Tare, TarePart
from bottles.services.tares import NewTare, Part
from shop.base.fields import HappenedField, MassField, mass_shown_back
from shop.physics.units import Entry

THINGS = [thing for thing, _ in TarePart.THINGS]
BASES = [("weighed", "weighed empty here"), ("stamped", "stamped on the bottle"), ("maker", "maker's data")]


class TareFields(RegisterForm):
    """The fields of a tare; a form says itself whether one has to be given."""

    tare = MassField(label="Tare, as one figure", required=False, help_text="All that is on it when it's weighed.")
    tare_bottle = MassField(label="Bottle", required=False)
    tare_valve = MassField(label="Valve", required=False)
    tare_gauge = MassField(label="Gauge", required=False)
    tare_ring = MassField(label="Bracket ring", required=False)
    tare_adapter = MassField(label="Adapter", required=False)
    tare_cap = MassField(label="Cap or plug", required=False)
    tare_other = MassField(label="Other things", required=False)
    tare_basis = forms.ChoiceField(label="How it's known", choices=BASES, required=False, initial="stamped")
    tare_scale = forms.ModelChoiceField(
        label="Weighed on",
        queryset=Scale.objects.filter(active=True).order_by("code"),
        required=False,
        empty_label="not known",
        help_text="Its error goes into the tare's ±.",
    )
    tare_error = MassField(
        label="± of the tare",
        required=False,
        help_text="Empty: one step of the last digit written of each figure, 10 g at least (common practice, no source).",
    )

    def part_fields(self) -> list[Any]:
        """The fields of the list, for the page."""
        return [self[f"tare_{thing}"] for thing in THINGS]

    @property
    def is_list(self) -> bool:
        """Whether anything was typed into the list."""
        return any(self[f"tare_{thing}"].value() for thing in THINGS)

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        listed = [thing for thing in THINGS if cleaned.get(f"tare_{thing}")]
        if cleaned.get("tare") and listed:
            self.add_error("tare", forms.ValidationError("Give one figure or the list, not both.", code="both"))
        for name in ("tare", *(f"tare_{thing}" for thing in THINGS)):
            entry = cleaned.get(name)
            if entry and entry.stored == 0:
                self.add_error(name, forms.ValidationError("That weighs nothing. Leave it empty.", code="nothing"))
        return cleaned

    def new_tare(self) -> NewTare | None:
        """The tare that was typed, or None."""
        data = self.cleaned_data
        entries: list[tuple[str, Entry]] = [
            (thing, data[f"tare_{thing}"]) for thing in THINGS if data.get(f"tare_{thing}")
        ]
        if data.get("tare"):
            entries = [("bottle", data["tare"])]  # one figure is the bottle with all that is on it
        if not entries:
            return None
        scale = data.get("tare_scale")
        return NewTare(
            parts=tuple(Part(thing, entry) for thing, entry in entries),
            basis=data.get("tare_basis") or "stamped",
            error_g=self.stored("tare_error"),
            scale_error_g=scale.error_g if scale else 0,
        )


class TareForm(TareFields):
    """A new tare of a bottle that is in the register."""

    since = HappenedField(
        label="On it since", help_text="When this list began to hold. Empty: now. Weighings before it keep their tare."
    )
    reason = text("What changed", 300, help_text="For instance: bracket ring fitted, valve exchanged.")

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        typed = any(self.data.get(name) for name in ("tare", *(f"tare_{thing}" for thing in THINGS)))
        if not typed:
            self.add_error(
                "tare", forms.ValidationError("Give the tare: one figure, or the list of what is on it.", code="required")
            )
        return cleaned


def typed_parts(tare: Tare | None, *, unit: str) -> dict[str, str]:
    """What the fields of the list hold when a new tare is begun from the one in force; bare weights in a unit."""
    if tare is None:
        return {}
    parts = {part.thing: mass_shown_back(part.grams, part.typed, meant=unit) for part in tare.parts.all()}
    if set(parts) == {"bottle"}:
        return {"tare": parts["bottle"]}
    return {f"tare_{thing}": typed for thing, typed in parts.items()}
