"""Stamps seen on a bottle."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from django import forms

from bottles.forms.parts import RegisterForm, StampField, text
from bottles.models import Stamp
from bottles.services.stamps import SeenStamp

HINT = "As it's stamped, with star or plus: 06/2021, 2021/06, 9 [A1/32] 06, 06/2021*."


class StampForm(RegisterForm):
    """One stamp."""

    kind = forms.ChoiceField(
        label="Which stamp",
        choices=Stamp.KINDS,
        initial="test",
        widget=forms.RadioSelect,
        error_messages={"required": "Say which stamp it is."},
    )
    date = StampField(
        label="Month and year", required=True, help_text=HINT, error_messages={"required": "Type what is stamped."},
        to_come=True,  # checked by its kind: an end of life may be to come
    )
    star = forms.BooleanField(label="A star stands after it", required=False)
    plus = forms.BooleanField(label="A plus stands after it", required=False)
    facility = text("Facility", 40, help_text="The number or sign of whoever tested it.")

    def seen(self) -> SeenStamp:
        """The stamp that was typed."""
        data: dict[str, Any] = self.cleaned_data
        date = replace(data["date"], star=data["date"].star or data["star"], plus=data["date"].plus or data["plus"])
        return SeenStamp(kind=data["kind"], date=date, facility=data["facility"])


class StrikeForm(RegisterForm):
    """Why a stamp is struck."""

    reason = text(
        "What was wrong", 300, required=True, error_messages={"required": "Say why: the reason stays beside the stamp."}
    )
