"""What a manager types about the shop itself."""

from __future__ import annotations

from fractions import Fraction
from functools import cache
from typing import Any
from zoneinfo import available_timezones

from django import forms

from shop.base.fields import LengthField, MassField, TemperatureField
from shop.base.models import Place, Shop
from shop.people.acting import ActForm
from shop.physics import units

LOWEST_M, HIGHEST_M = -430, 5500
BY_THE_RULES = "rules"
MONTH_RULES = [
    (BY_THE_RULES, "as the rule set in force says"),
    ("through due month", "warn through the month in which the test is due, stop after it"),
    ("from first day", "stop from the first day of that month"),
]


@cache
def zones() -> list[tuple[str, str]]:
    """The time zones that this machine knows, read once."""
    return [(name, name) for name in sorted(available_timezones()) if "/" in name or name == "UTC"]


class HeightField(LengthField):
    """A height above sea, which may lie below it."""

    def parse(self, text: str) -> units.Entry:
        return units.parse_length(text, default_unit=self.default_unit, below_zero=True)


class ShopForm(ActForm):
    """The shop's one row."""

    name = forms.CharField(label="Shop's name", max_length=120, error_messages={"required": "Write the shop's name."})
    units = forms.ChoiceField(
        choices=Shop.UNITS, widget=forms.RadioSelect, help_text="Each person may choose their own."
    )
    time_zone = forms.ChoiceField(choices=zones, help_text="The shop's day decides what is due.")
    height = HeightField(
        us="ft", metric="m", label="Height above sea", help_text="A gauge reads against the air here: 180 m, or 590 ft."
    )
    paper = forms.ChoiceField(choices=Shop.PAPER, widget=forms.RadioSelect)
    public_address = forms.URLField(
        required=False,
        max_length=200,
        assume_scheme="https",
        help_text="What a label's code leads to, as a phone reaches it. Empty: the code alone is printed.",
        error_messages={"invalid": "This isn't an address. Write it as https://bottles.example, or leave it empty."},
    )
    local_notice = forms.CharField(
        required=False,
        max_length=4000,
        widget=forms.Textarea(attrs={"rows": 4}),
        help_text="What your local code or authority asks to be said. It's printed beside the cautions.",
    )

    def clean_height(self) -> Any:
        """Whole metres, rounded half to even."""
        metres = round(Fraction(self.cleaned_data["height"].stored, 10**6))
        if not LOWEST_M <= metres <= HIGHEST_M:
            raise forms.ValidationError(
                f"No shop stands there: give a height between {LOWEST_M} m and {HIGHEST_M} m.", code="out of range"
            )
        return metres


def _months(label: str, hint: str) -> forms.IntegerField:
    sentence = "Give whole months, 1 to 120, or leave it empty for no rule of the shop's own."
    return forms.IntegerField(
        label=label,
        required=False,
        min_value=1,
        max_value=120,
        help_text=hint,
        widget=forms.TextInput(attrs={"inputmode": "numeric", "autocomplete": "off"}),
        error_messages={"invalid": sentence, "min_value": sentence, "max_value": sentence},
    )


def _percent(label: str, hint: str, above: str) -> forms.DecimalField:
    sentence = "Give a percentage, 1 to 100."
    return forms.DecimalField(
        label=label,
        required=False,
        min_value=1,
        max_value=100,
        decimal_places=1,
        help_text=hint,
        widget=forms.TextInput(attrs={"inputmode": "decimal", "autocomplete": "off"}),
        error_messages={
            "invalid": sentence,
            "min_value": sentence,
            "max_decimal_places": "One digit after the point is enough.",
            "max_value": above,
        },
    )


class PolicyForm(ActForm):
    """What the shop decides from a day on; never looser than the country's rules."""

    effective_from = forms.DateField(
        label="Holds from",
        widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d"),
        error_messages={
            "required": "Give the day from which it holds.",
            "invalid": "This isn't a day. Write it as 2026-03-31.",
        },
    )
    month_rule = forms.ChoiceField(
        label="When a test falls due",
        choices=MONTH_RULES,
        widget=forms.RadioSelect,
        error_messages={"required": "Choose what holds in the month in which a test falls due."},
    )
    visual_interval_months = _months("Months between visual inspections", "Empty: only what the rules ask for.")
    disc_interval_months = _months("Months after which a safety disc is replaced", "Empty: no rule of the shop's own.")
    own_percent = _percent(
        "Fill at most to this percent of the limit", "Empty: to the limit.", "No shop may fill above the limit: give 1 to 100."
    )
    good_percent = _percent(
        "A fill is good enough from this percent of its target", "For the day's plan. Empty: 95 (common practice, no source).",
        "Give a percentage, 1 to 100.",
    )
    reason = forms.CharField(required=False, max_length=400, label="Why", widget=forms.Textarea(attrs={"rows": 2}))


class PlaceForm(ActForm):
    """A place where a bottle can stand."""

    name = forms.CharField(max_length=80, error_messages={"required": "Write what the place is called."})
    kind = forms.ChoiceField(choices=Place.KINDS)
    outdoors = forms.BooleanField(required=False)
    limit = MassField(
        label="Nitrous stored here at most",
        required=False,
        help_text="As your local code or fire authority allows. Empty: none set.",
    )
    coldest = TemperatureField(
        label="How cold it gets", required=False, help_text="Of a freezer or bath: -18 °C, 0 °F; iced water 0 °C."
    )
    takes_at_once = forms.IntegerField(
        label="Bottles at once", required=False, min_value=1, max_value=200,
        help_text="Of a freezer or bath: how many it chills together.",
        widget=forms.TextInput(attrs={"inputmode": "numeric", "autocomplete": "off"}),
        error_messages=dict.fromkeys(("invalid", "min_value", "max_value"), "Give a whole number, 1 to 200, or nothing."),
    )


class NewPlaceForm(PlaceForm):
    """A place that is added."""

    code = forms.CharField(
        max_length=20,
        help_text="Short, as written on the shelf. It stays.",
        widget=forms.TextInput(attrs={"autocomplete": "off", "data-short": True}),
        error_messages={"required": "Give the place a short code."},
    )
    field_order = ("code", "name", "kind", "outdoors", "limit", "coldest", "takes_at_once")


class ChangePlaceForm(PlaceForm):
    """A place that is there already."""

    active = forms.BooleanField(label="In use", required=False)
