"""How large a leak shall show."""

from __future__ import annotations

from typing import Any

from django import forms

from shop.base.fields import MassField

USUAL_G = 10  # a slow leak at a valve (common practice, no source)
LEAST_G, MOST_G = 1, 2_000


class SmallMassField(MassField):
    """A weight that is a few grams: a bare number is in grams or ounces."""

    defaults = {"us": "oz", "metric": "g"}


class LeakForm(forms.Form):
    """A leak, as weight a week."""

    leak = SmallMassField(
        label="A leak of so much a week", required=False, help_text="10 g, 1/2 oz: how soon each scale would show it."
    )

    def __init__(self, *args: Any, system: str, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["leak"].suit(system=system, ambient_pa=0.0)  # type: ignore[attr-defined]
        self.use_required_attribute = False

    def clean_leak(self) -> Any:
        entry = self.cleaned_data["leak"]
        if entry is not None and not LEAST_G <= entry.stored <= MOST_G:
            raise forms.ValidationError("Give a leak between 1 g and 2 kg a week.", code="out of range")
        return entry

    def grams(self) -> int:
        """The leak that was asked for, else the usual one."""
        entry = self.cleaned_data.get("leak") if self.is_valid() else None
        return entry.stored if entry else USUAL_G
