"""Forms of scales: what one can tell, and its check with a known weight."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.forms.parts import day, text
from bottles.models import Scale
from bottles.services.scales import ScaleData
from shop.base.fields import HappenedField, MassField, mass_shown_back
from shop.people.acting import ActForm


class ScaleForm(ActForm):
    """What is known of a scale."""

    code = text("Code", 20, required=True, error_messages={"required": "Give it a short code, as it's written on the scale."})
    name = text("Name", 80, required=True, error_messages={"required": "Give it a name."})
    style = forms.ChoiceField(
        label="How it writes", choices=Scale.STYLES, initial="kg", help_text="Bare numbers below are taken in this unit."
    )
    resolution = MassField(
        label="Smallest step", help_text="What it can tell apart: 0.02 lb, 10 g, 1 oz.",
        error_messages={"required": "Type its smallest step."},
    )  # fmt: skip
    error = MassField(
        label="Error", help_text="How wrong it may be, from its plate, its book or its last calibration.",
        error_messages={"required": "Type how wrong it may be."},
    )  # fmt: skip
    capacity = MassField(label="Capacity", error_messages={"required": "Type what it can weigh at most."})
    calibrated_on = day("Calibrated on", required=False)
    calibration_due = day("Calibration due", required=False)
    active = forms.BooleanField(label="In use", required=False, initial=True)

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        style = self.data.get("style")
        if style in dict(Scale.STYLES):  # bare numbers are in the unit that the scale writes
            for name in ("resolution", "error", "capacity"):
                self.fields[name].read_off(style)  # type: ignore[attr-defined]

    def clean_code(self) -> str:
        return str(self.cleaned_data["code"]).strip().upper()

    def data_of(self) -> ScaleData:
        """The scale that was typed."""
        data = self.cleaned_data
        return ScaleData(
            code=data["code"], name=data["name"], resolution=data["resolution"], error=data["error"],
            capacity=data["capacity"], style=data["style"], calibrated_on=data["calibrated_on"],
            calibration_due=data["calibration_due"], active=data["active"],
        )


def scale_as_typed(scale: Scale) -> dict[str, Any]:
    """What the form of a scale holds when it's first drawn.

    Its figures as they were typed, each with its unit: the way in which it writes may be changed beside them.
    """
    return {
        "code": scale.code, "name": scale.name, "style": scale.style,
        "resolution": mass_shown_back(scale.resolution_g, scale.resolution_typed),
        "error": mass_shown_back(scale.error_g, scale.error_typed),
        "capacity": mass_shown_back(scale.capacity_g, scale.capacity_typed), "calibrated_on": scale.calibrated_on,
        "calibration_due": scale.calibration_due, "active": scale.active, "version": scale.version,
    }  # fmt: skip


class CheckForm(ActForm):
    """A known weight on the scale; bare numbers are read in the scale's own unit."""

    known = MassField(
        label="The known weight", help_text="What is stamped on it, or its certificate says.",
        error_messages={"required": "Type the known weight."},
    )  # fmt: skip
    read = MassField(label="The scale says", error_messages={"required": "Type what the scale says of it."})
    happened_at = HappenedField()

    def __init__(self, *args: Any, scale: Scale, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        for name in ("known", "read"):
            self.fields[name].read_off(scale.style)  # type: ignore[attr-defined]
