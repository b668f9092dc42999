"""Two bottles that are joined: which other one, how warm each, how each stands."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.models import Bottle
from bottles.services.joining import End
from shop.base.fields import TemperatureField

NEEDED = "Read the temperature on the bottle's wall, below its liquid level."


class JoinedForm(forms.Form):
    """Read from the address: nothing is saved."""

    other = forms.CharField(
        label="Joined with", max_length=20, help_text="The other bottle's code, as on its label.",
        widget=forms.TextInput(attrs={"autocomplete": "off", "autocapitalize": "characters", "data-short": True}),
        error_messages={"required": "Give the other bottle's code.", "max_length": "No code is that long."},
    )
    own_temperature = TemperatureField(error_messages={"required": NEEDED})
    own_inverted = forms.BooleanField(label="It stands or lies with its valve low", required=False)
    other_temperature = TemperatureField(label="The other one's temperature", error_messages={"required": NEEDED})
    other_inverted = forms.BooleanField(label="The other one stands or lies with its valve low", required=False)

    def __init__(self, *args: Any, bottle: Bottle, system: str, ambient_pa: float, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.bottle = bottle
        self.fields["own_temperature"].label = f"Temperature of {bottle.code}"
        self.fields["own_inverted"].label = f"{bottle.code} stands or lies with its valve low"
        for name in ("own_temperature", "other_temperature"):
            self.fields[name].suit(system=system, ambient_pa=ambient_pa)  # type: ignore[attr-defined]
        self.use_required_attribute = False

    def clean_other(self) -> Bottle:
        code = self.cleaned_data["other"].strip()
        found = Bottle.objects.filter(code__iexact=code).first()
        if found is None:
            raise forms.ValidationError(f"There is no bottle {code} in the register. Check its label.", code="unknown bottle")
        return found

    def ends(self) -> tuple[End, End]:
        """Both bottles as they stand."""
        data = self.cleaned_data
        return (
            End(self.bottle, data["own_temperature"].stored, data["own_inverted"]),
            End(data["other"], data["other_temperature"].stored, data["other_inverted"]),
        )
