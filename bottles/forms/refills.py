"""Forms of an open refill: weigh, wait, another supply bottle, close."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from django import forms

from bottles.forms.filling import ReadingsForm, read_off
from bottles.models import Refill, Station
from bottles.services.forecasting import Readings
from bottles.services.refill_steps import Weight
from shop.base.fields import HappenedField, InstantField, MassField
from shop.people.acting import ActForm

LINE = [("on", "still connected"), ("off", "disconnected")]
AS_WEIGHED = "weighed"
ENDS = [(AS_WEIGHED, "as the scale tells"), ("", "not finished yet"), *Refill.ENDS]


class WeighForm(ActForm):
    """What the scale says, and whether that was all."""

    gross = MassField(
        label="The scale reads", error_messages={"required": "Type what the scale reads."},
        widget=forms.TextInput(attrs={"autocomplete": "off", "data-focus": True}),
    )
    line = forms.ChoiceField(label="The line is", choices=LINE, widget=forms.RadioSelect, initial="off")
    ended_by = forms.ChoiceField(
        label="What ended it", choices=ENDS, required=False, initial=AS_WEIGHED,
        help_text="Left to the scale, the refill closes where the weight proves it full, line off and dry; else it stays open.",
    )
    wet = forms.BooleanField(label="The bottle is wet or frosted", required=False)
    supply_gross = MassField(label="The supply bottle weighs", required=False)
    happened_at = HappenedField()

    def __init__(self, *args: Any, station: Station, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        read_off(self, station)
        if station.supply_scale is None:
            del self.fields["supply_gross"]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        if self.end_chosen(cleaned) and cleaned.get("line") == "on":
            self.add_error(
                "ended_by",
                forms.ValidationError("Disconnect the line and weigh again before the refill is closed.", code="not disconnected"),
            )
        return cleaned

    @staticmethod
    def end_chosen(cleaned: dict[str, Any]) -> str:
        """What ended it as chosen; nothing where that's left to the scale."""
        chosen: str = cleaned.get("ended_by") or ""
        return "" if chosen == AS_WEIGHED else chosen

    @property
    def close_when_full(self) -> bool:
        """Whether it's left to the scale to say that it's finished."""
        return bool(self.cleaned_data["ended_by"] == AS_WEIGHED)

    def weight(self) -> Weight:
        """The weighing as the service takes it."""
        data = self.cleaned_data
        return Weight(
            gross=data["gross"], line_off=data["line"] == "off", wet=data["wet"], supply_gross=data.get("supply_gross"),
            happened_at=data["happened_at"],
        )  # fmt: skip


class WaitForm(ActForm):
    """Until when it waits, and for what."""

    until = InstantField(label="Until", help_text="Empty: it goes on now.")
    note = forms.CharField(label="What for", max_length=80, required=False, initial="chill")


class AnotherSupplyForm(ReadingsForm):
    """Go on from another supply bottle: first what the scale says now."""

    gross = MassField(
        label="The bottle being filled weighs now",
        error_messages={"required": "Weigh it first, so that what arrived so far belongs to the supply bottle before."},
    )
    line = forms.ChoiceField(label="The line is", choices=LINE, widget=forms.RadioSelect, initial="on")
    wet = forms.BooleanField(label="The bottle is wet or frosted", required=False)
    old_supply_gross = MassField(label="The supply bottle before weighs now", required=False)

    field_order = ["form_key", "version", "gross", "line", "wet", "old_supply_gross", "supply"]

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.at: Station | None = kwargs.get("at")
        if "supply_weight" not in self.fields:
            del self.fields["old_supply_gross"]
        self.order_fields(self.field_order)

    def readings(self, *, bottle_weight: Any = None) -> Readings | None:
        """What was read; a hose that is on pulls at the weight."""
        found = super().readings(bottle_weight=bottle_weight)
        if found is None or self.at is None or self.cleaned_data.get("line") == "off":
            return found
        return replace(found, hose_pull_g=self.at.hose_pull_g)

    def weight(self) -> Weight:
        """The weighing as the service takes it."""
        data = self.cleaned_data
        return Weight(
            gross=data["gross"], line_off=data["line"] == "off", wet=data["wet"], supply_gross=data.get("old_supply_gross")
        )


class CloseForm(ActForm):
    """What ended the refill."""

    ended_by = forms.ChoiceField(
        label="What ended it", choices=Refill.ENDS, widget=forms.RadioSelect,
        error_messages={"required": "Say what ended it: that tells what the next forecast may learn from it."},
    )
