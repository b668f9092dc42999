"""The form that forecasts and opens a refill: readings, weight, the filler's look."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from django import forms

from bottles.models import Bottle, Refill, Station, Supply
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED
from bottles.rules.edition import LookItem
from bottles.selectors.filling_offers import Offered, supplies_offered
from bottles.services.forecasting import TAKEN, Readings
from shop.base.fields import HappenedField, MassField, PressureField, TemperatureField
from shop.people.acting import ActForm

STARTS = [
    (WEIGHED, "as it weighs now"),
    (VENTED, "vented to the room"),
    (OWN_VAPOUR, "still full of its own vapour, no liquid"),
    (AIR, "open before, air not purged"),
]
PRESSURE = [
    ("kept", "there was pressure in it, or it was vented here just now"),
    ("purged", "it had none or its valve was open, and it was dried and purged as the shop does it"),
    ("none", "it had none or its valve was open, and it wasn't dried and purged"),
]
TEMPERATURES = [(code, words) for code, words, _ in TAKEN]


class SupplyField(forms.ModelChoiceField):
    """A supply bottle on a station, with what its books say."""

    def __init__(self, **kwargs: Any) -> None:
        super().__init__(
            Supply.objects.none(), empty_label=None,
            error_messages={
                "required": "Choose the supply bottle.",
                "invalid_choice": "That supply bottle isn't connected any more. Choose again.",
            },
            **kwargs,
        )  # fmt: skip
        self.mass: Any = str

    def label_from_instance(self, obj: Any) -> str:
        account = getattr(obj.bottle, "account", None)
        holds = f"{self.mass(account.balance_g)} by the books" if account else "contents unknown"
        return f"{obj.bottle.code}, {obj.station.name}: {holds}"


# What is read off which scale of a station: a bare number is in that scale's own unit.
OFF_SCALE = ("bottle_weight", "gross", "check_known", "check_read")
OFF_SUPPLY_SCALE = ("supply_weight", "supply_gross", "old_supply_gross")


def read_off(form: ActForm, station: Station | None) -> None:
    """Let a form take a bare weight as the station's scales write it, and say so."""
    for names, scale in ((OFF_SCALE, station and station.scale), (OFF_SUPPLY_SCALE, station and station.supply_scale)):
        for name in names:
            field: Any = form.fields.get(name)
            if field is not None and scale:
                field.read_off(scale.style)
                bare = "lb" if scale.style == "lb oz" else scale.style
                said = f"As {scale} writes it, such as {scale.get_style_display()}; a bare number is in {bare}."
                field.help_text = f"{field.help_text} {said}".strip()


# What a forecast waits for, as its page says it; without the first three there is none.
NEEDED = {
    "supply": "the supply bottle",
    "supply_temperature": "the supply bottle's temperature",
    "bottle_temperature": "the temperature of the bottle to fill",
    "bottle_weight": "what the bottle to fill weighs",
}
READ = frozenset({
    "supply", "gauge", "supply_temperature", "supply_weight", "bottle_temperature", "bottle_weight", "gross", "target", "method",
})  # fmt: skip


class ReadingsForm(ActForm):
    """What is read before a valve is opened: both bottles, and how the one to fill starts."""

    supply = SupplyField(label="From")
    gauge = PressureField(label="Gauge of the supply bottle", required=False)
    supply_temperature = TemperatureField(
        label="Its temperature", error_messages={"required": "Read the supply bottle's temperature."}
    )
    taken = forms.ChoiceField(label="Taken on the supply bottle", choices=TEMPERATURES, initial="wall")
    supply_weight = MassField(
        label="The supply bottle weighs", required=False, help_text="Where it stands on the station's own scale."
    )
    bottle_temperature = TemperatureField(
        label="Temperature of the bottle to fill",
        error_messages={"required": "Read the temperature of the bottle to fill."},
    )
    bottle_taken = forms.ChoiceField(label="Taken on the bottle to fill", choices=TEMPERATURES, initial="wall")

    def __init__(
        self, *args: Any, bottle: Bottle, offered: Offered, mass: Any, at: Station | None, station: Any = None,
        but: Bottle | None = None, **kwargs: Any,
    ) -> None:  # fmt: skip
        super().__init__(*args, **kwargs)
        read_off(self, at)
        self.at = at
        self.bottle = bottle
        self.offered = offered
        supply: Any = self.fields["supply"]
        supply.mass = self.mass = mass
        supply.queryset = supplies_offered(bottle, station, but)
        for name, words in offered.ages.items():
            self.fields[name].help_text = words
        if not offered.supply_scales:
            del self.fields["supply_weight"]

    def readings(self, *, bottle_weight: Any = None) -> Readings | None:
        """What was read, or None where too little was: then `missing` says what."""
        data = getattr(self, "cleaned_data", {})
        if (
            data.get("supply_temperature") is None
            or data.get("bottle_temperature") is None
            or data.get("supply") is None
        ):
            return None
        return Readings(
            supply_temperature=data["supply_temperature"], bottle_temperature=data["bottle_temperature"],
            gauge=data.get("gauge"), supply_weight=data.get("supply_weight"),
            bottle_weight=bottle_weight or data.get("bottle_weight") or data.get("gross"), taken=data.get("taken") or "wall",
            bottle_taken=data.get("bottle_taken") or "wall", start=data.get("start") or WEIGHED, target=data.get("target"),
        )  # fmt: skip

    def look_only(self) -> None:
        """Read the form for a forecast alone: what isn't a reading may still be missing."""
        self.is_valid()
        for name in [name for name in self.errors if name not in READ or not self.data.get(name)]:
            del self.errors[name]

    @property
    def missing(self) -> list[str]:
        """The readings without which nothing can be worked out."""
        data = getattr(self, "cleaned_data", {})
        return [NEEDED[name] for name in list(NEEDED)[:3] if data.get(name) is None]


class FillForm(ReadingsForm):
    """Everything that opens a refill."""

    bottle_weight = MassField(
        label="The bottle to fill weighs",
        error_messages={"required": "Weigh the bottle with everything of its tare list on it."},
        widget=forms.TextInput(attrs={"autocomplete": "off", "data-focus": True}),
    )
    wet = forms.BooleanField(label="It's wet or frosted", required=False)
    start = forms.ChoiceField(label="How it starts", choices=STARTS, initial=WEIGHED)
    target = MassField(
        label="Target, if less than the limit", required=False, help_text="Nitrous in the bottle when it's done."
    )
    method = forms.ChoiceField(label="Method", choices=Refill.METHODS, initial="pressure")
    heater_listed = forms.BooleanField(
        label="The warmer is listed for bottles and can't take one above 52\N{NO-BREAK SPACE}°C (125\N{NO-BREAK SPACE}°F)",
        required=False,
    )
    pressure = forms.ChoiceField(
        label="When its valve was opened", choices=PRESSURE, widget=forms.RadioSelect, required=False
    )
    check_known = MassField(label="Known weight put on the scale", required=False)
    check_read = MassField(label="The scale reads", required=False)
    look_all = forms.BooleanField(label="I looked at each of these, and each is in order", required=False)
    look_ok = forms.MultipleChoiceField(label="In order", required=False, widget=forms.CheckboxSelectMultiple)
    look_failed = forms.MultipleChoiceField(label="Not in order", required=False, widget=forms.CheckboxSelectMultiple)
    happened_at = HappenedField()
    reason = forms.CharField(
        label="Reason",
        max_length=200,
        required=False,
        help_text="Only where scale and books differ and a reason is asked for.",
    )

    FIRST = ("supply", "bottle_weight", "wet", "gauge", "supply_temperature", "taken", "supply_weight", "bottle_temperature",
             "bottle_taken", "start", "target", "method", "heater_listed")  # fmt: skip
    LOOK = ("look_all", "look_ok", "look_failed")
    MORE = ("happened_at", "reason")

    def __init__(
        self, *args: Any, items: Sequence[LookItem], ask_pressure: bool, check_due: str, limit_g: int | None = None, **kwargs: Any
    ) -> None:
        super().__init__(*args, **kwargs)
        self.items = items
        self.limit_g = limit_g
        if self.at is not None and self.at.pumped:
            self.fields["method"].initial = "pumped"
        choices = [(item.code, item.words) for item in items]
        for name in ("look_ok", "look_failed"):
            field: Any = self.fields[name]
            field.choices = choices
        if ask_pressure:
            self.fields["pressure"].required = True
            self.fields["pressure"].error_messages["required"] = (
                "Say whether there was pressure in it when its valve was opened."
            )
        else:
            del self.fields["pressure"]
        self.check_due = check_due
        if check_due:
            self.fields["check_known"].help_text = f"The day's first fill on {check_due}: check it before you weigh."
            for name in ("check_known", "check_read"):
                self.fields[name].required = True
                self.fields[name].error_messages["required"] = (
                    f"{check_due} wasn't checked today: put a known weight on it."
                )
        else:
            del self.fields["check_known"], self.fields["check_read"]

    def groups(self) -> dict[str, list[Any]]:
        """The fields as the page lays them out."""
        check = ("check_known", "check_read")
        placed = {*self.FIRST, *self.LOOK, *self.MORE, *check, "pressure"}
        rest = [name for name in self.fields if name not in placed and not self[name].is_hidden]
        named = {
            "check": check, "first": (*self.FIRST, "pressure"), "look": self.LOOK, "more": self.MORE, "rest": rest,
        }  # fmt: skip
        return {group: [self[name] for name in names if name in self.fields] for group, names in named.items()}

    def look(self) -> dict[str, bool | None]:
        """The look, item by item: in order, not in order, not looked at."""
        data = self.cleaned_data
        ok, failed = set(data.get("look_ok") or ()), set(data.get("look_failed") or ())
        everything = data.get("look_all")
        answers: dict[str, bool | None] = {}
        for item in self.items:
            answers[item.code] = False if item.code in failed else True if everything or item.code in ok else None
        return answers

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        both = set(cleaned.get("look_ok") or ()) & set(cleaned.get("look_failed") or ())
        if both:
            words = "; ".join(item.words for item in self.items if item.code in both)
            self.add_error("look_failed", forms.ValidationError(f"Ticked both ways: {words}.", code="both"))
        if self.items and not (cleaned.get("look_all") or cleaned.get("look_ok") or cleaned.get("look_failed")):
            sentence = "Look the bottle over, each point above; then tick this, or answer item by item below."
            self.add_error("look_all", forms.ValidationError(sentence, code="look"))
        target = cleaned.get("target")
        if target is not None and self.limit_g and target.stored > self.limit_g:
            sentence = f"It may hold no more than {self.mass(self.limit_g)}. Write less, or leave it empty for the limit."
            self.add_error("target", forms.ValidationError(sentence, code="above the limit"))
        if cleaned.get("method") == "warmed" and not cleaned.get("heater_listed"):
            self.add_error(
                "heater_listed",
                forms.ValidationError(
                    "Only a device listed for it may warm a supply bottle, never above 52 °C.", code="not listed"
                ),
            )
        supply = cleaned.get("supply")
        if cleaned.get("method") == "pumped" and supply is not None and not supply.station.pumped:
            self.add_error(
                "method", forms.ValidationError(f"{supply.station} has no pump written down.", code="no pump")
            )
        return cleaned
