"""Forms for where a bottle is: check in, move, what it waits for, hand over."""

from __future__ import annotations

from typing import Any

from django import forms

from shop.base.fields import HappenedField, PromisedField
from shop.base.models import Place
from shop.cars.models import Car
from shop.people.acting import ActForm

WANTED = [
    ("", "nothing, it's only kept here"),
    ("refill", "refill"),
    ("hydrostatic test", "hydrostatic test"),
    ("visual inspection", "visual inspection"),
    ("repair", "repair by a licensed person"),
    ("other", "other (see the note)"),
]


def wanted_words(cleaned: dict[str, Any]) -> str:
    """Return what is wanted as one line: the choice, then the note."""
    parts = [cleaned.get("wanted") or "", (cleaned.get("wanted_note") or "").strip()]
    return ": ".join(part for part in parts if part)[:200]


class CheckInForm(ActForm):
    """Who brought it, what is wanted, by when, and where it stands now."""

    brought_by = forms.CharField(
        label="Brought by", max_length=120, error_messages={"required": "Say who brought it, in the words you use for them."}
    )
    wanted = forms.ChoiceField(label="What is wanted", choices=WANTED, required=False, initial="refill")
    wanted_note = forms.CharField(label="Note", max_length=150, required=False)
    promised_at = PromisedField(label="Promised for")
    place = forms.ModelChoiceField(
        label="Where it stands",
        queryset=Place.objects.filter(active=True).order_by("name"),
        error_messages={"required": "Say where it stands, so that the next person finds it."},
    )
    happened_at = HappenedField()


class MoveForm(ActForm):
    """Another place."""

    place = forms.ModelChoiceField(
        label="Where it stands now",
        queryset=Place.objects.filter(active=True).order_by("name"),
        error_messages={"required": "Say where it stands now."},
    )
    happened_at = HappenedField()


class WantedForm(ActForm):
    """What the bottle waits for, and until when."""

    wanted = forms.ChoiceField(label="What is wanted", choices=WANTED, required=False)
    wanted_note = forms.CharField(label="Note", max_length=150, required=False)
    promised_at = PromisedField(label="Promised for")


class HandOverForm(ActForm):
    """To whom it goes."""

    kind = forms.ChoiceField(
        label="How it goes out",
        choices=[("out", "to its owner"), ("car", "onto a car"), ("loan", "on loan"), ("test", "to the test house")],
        widget=forms.RadioSelect,
        initial="out",
    )
    to_whom = forms.CharField(
        label="Handed to", max_length=120, error_messages={"required": "Say to whom it is handed."}
    )
    car = forms.ModelChoiceField(
        label="Car", queryset=Car.objects.filter(active=True).order_by("number"), required=False, empty_label="no car"
    )
    told = forms.BooleanField(
        label="They were told: valve shut, outlet plugged, strapped upright, the boot aired; "
        "never inhaled, never heated above 52\N{NO-BREAK SPACE}°C (125\N{NO-BREAK SPACE}°F)",
        error_messages={"required": "Tell them before the bottle leaves, then tick this."},
    )
    reason = forms.CharField(
        label="Reason", max_length=300, required=False,
        help_text="Out of quarantine; or to the test house with contents that nobody weighed.",
    )
    happened_at = HappenedField()

    def __init__(self, *args: Any, house: str, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        choices = dict(self.fields["kind"].choices) | {"test": f"to the {house}, for its test or inspection"}  # type: ignore[attr-defined]
        self.fields["kind"].choices = list(choices.items())  # type: ignore[attr-defined]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        if cleaned.get("kind") == "car" and not cleaned.get("car"):
            self.add_error("car", forms.ValidationError("Say which car it goes on.", code="no car"))
        return cleaned
