"""What a day is planned with: people, minutes, hours, temperatures, the supplier's days."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.selectors.planning import Cold
from shop.base.fields import TemperatureField
from shop.people.acting import ActForm
from shop.physics.units import Entry

DEFAULTS: dict[str, Any] = {
    "people": 1, "fill_minutes": 15, "change_minutes": 5, "opens": "08:00", "closes": "18:00", "lead_days": 2,
}  # fmt: skip
TEMPERATURES = ("room", "supply", "freezer")
_COLDEST_MK, _HOTTEST_MK = 233_150, 325_150


def _whole(label: str, low: int, high: int, hint: str = "", *, required: bool = True) -> forms.IntegerField:
    sentence = f"Give a whole number, {low} to {high}."
    return forms.IntegerField(
        label=label, min_value=low, max_value=high, help_text=hint, required=required,
        widget=forms.TextInput(attrs={"inputmode": "numeric", "autocomplete": "off"}),
        error_messages=dict.fromkeys(("required", "invalid", "min_value", "max_value"), sentence),
    )  # fmt: skip


def _hour(label: str) -> forms.TimeField:
    sentence = "Give a time of day: 08:00."
    return forms.TimeField(
        label=label, widget=forms.TimeInput(attrs={"type": "time"}, format="%H:%M"),
        error_messages={"required": sentence, "invalid": sentence},
    )  # fmt: skip


class PlanForm(ActForm):
    """What the day is planned with; what a freezer takes is asked only where no place says so."""

    people = _whole("People who fill", 1, 20)
    fill_minutes = _whole(
        "Minutes a fill", 1, 240,
        "From connecting to the weighing with the line off. A second supply bottle shares them; only its change comes on top.",
    )  # fmt: skip
    change_minutes = _whole("Minutes to change the supply bottle", 0, 240)
    opens = _hour("Filling from")
    closes = _hour("Filling until")
    room = TemperatureField(
        label="Temperature of the room", error_messages={"required": "Read a thermometer: bottles that aren't chilled are as warm."}
    )
    supply = TemperatureField(
        label="Temperature of the supply bottles", help_text="On their walls, as they stand now.",
        error_messages={"required": "Read it on a supply bottle's wall."},
    )
    freezer = TemperatureField(label="How cold the freezer gets", required=False, help_text="Empty: nothing is chilled.")
    freezer_takes = _whole("Bottles that it takes at once", 1, 200, required=False)
    lead_days = _whole("Days from an order to its delivery", 0, 60)

    def __init__(self, *args: Any, places: list[Cold], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        if places:
            del self.fields["freezer"], self.fields["freezer_takes"]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        for name in TEMPERATURES:
            entry: Entry | None = cleaned.get(name)
            if entry is not None and not _COLDEST_MK <= entry.stored <= _HOTTEST_MK:
                self.add_error(name, forms.ValidationError(
                    "Give a temperature between -40 °C and 52 °C (-40 °F and 125 °F).", code="out of range"
                ))  # fmt: skip
        if cleaned.get("opens") and cleaned.get("closes") and cleaned["opens"] >= cleaned["closes"]:
            self.add_error("closes", forms.ValidationError("Filling ends after it begins. Check both times.", code="hours"))
        if cleaned.get("freezer") and not cleaned.get("freezer_takes") and "freezer_takes" in self.fields:
            self.add_error("freezer_takes", forms.ValidationError("Say how many bottles it takes at once.", code="takes"))
        return cleaned

    def inputs(self) -> dict[str, Any]:
        """What is kept and planned with: whole numbers, each temperature also as typed."""
        data = self.cleaned_data
        kept: dict[str, Any] = {name: data[name] for name in ("people", "fill_minutes", "change_minutes", "lead_days")}
        kept |= {name: f"{data[name]:%H:%M}" for name in ("opens", "closes")}
        for name in TEMPERATURES:
            kept |= {f"{name}_mk": self.stored(name), f"{name}_typed": self.typed(name)}
        return kept | {"freezer_takes": data.get("freezer_takes")}
