"""Form fields that take quantities as people write them, and keep them as typed.

A field cleans to an `Entry` (stored whole number, typed text, unit understood) or None. The
unit meant where none is written follows the person's choice of units.
"""

from __future__ import annotations

from datetime import datetime
from typing import Any

from django import forms
from django.core.exceptions import ValidationError
from django.utils import timezone

from shop.physics import units
from shop.physics.errors import QuantityError

LONGEST = 64  # longer than anyone writes a quantity; a paste of megabytes is refused unread


class QuantityField(forms.CharField):
    """A quantity with its unit; cleans to an Entry."""

    defaults = {"us": "", "metric": ""}

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("widget", forms.TextInput(attrs={"autocomplete": "off", "inputmode": "text"}))
        super().__init__(**kwargs)
        self.system = "metric"
        self.ambient_pa = 101_325.0

    def suit(self, *, system: str, ambient_pa: float) -> None:
        """Take the person's units and the shop's air pressure before the form is used."""
        self.system = system
        self.ambient_pa = ambient_pa

    @property
    def default_unit(self) -> str:
        """The unit that is meant where none is written."""
        return self.defaults[self.system]

    def parse(self, text: str) -> units.Entry:
        """Understand the text; raise QuantityError with a sentence."""
        raise NotImplementedError

    def clean(self, value: Any) -> Any:
        text = "" if value is None else str(value)
        if len(text) > LONGEST * 4:  # before any other work on it
            raise ValidationError("That is far too long for a quantity: write a number and its unit.", code="too long")
        text = super().clean(text)
        if not text:
            return None
        try:
            return self.parse(text)
        except QuantityError as error:
            raise ValidationError(error.sentence, code=error.code) from None


class MassField(QuantityField):
    """A weight: `24-6`, `24 lb 6 oz`, `11.06 kg`; cleans to grams."""

    defaults = {"us": "lb", "metric": "kg"}

    def __init__(self, **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.scales_own = ""

    def read_off(self, style: str) -> None:
        """Take a bare number as a scale writes it, whatever the person reads."""
        self.scales_own = style

    @property
    def default_unit(self) -> str:
        """The unit that is meant where none is written."""
        return self.scales_own or super().default_unit

    def parse(self, text: str) -> units.Entry:
        return units.parse_mass(text, default_unit=self.default_unit)


def mass_shown_back(stored: int | None, typed: str, *, meant: str = "") -> str:
    """Return a weight as it was typed, for a form in which someone else may save it again.

    A bare number was meant in the unit of whoever typed it: where it means something else in the
    unit that is meant in this form, its unit is added, so that it stays the same grams.
    """
    if stored is None:
        return ""
    known = {unit: _grams(typed, unit) for unit in dict.fromkeys((meant or "lb", "lb", "kg", "oz", "g"))}
    if known["lb"] == known["g"] == stored or (meant and known[meant] == stored):
        return typed
    return next((f"{typed} {unit}" for unit, grams in known.items() if grams == stored), units.in_own_unit(stored, "g"))


def _grams(typed: str, unit: str) -> int | None:
    try:
        return units.parse_mass(typed, default_unit=unit).stored
    except QuantityError:
        return None


class PressureField(QuantityField):
    """A gauge reading: `950 psi`, `65.5 bar`; cleans to pascal absolute."""

    defaults = {"us": "psi", "metric": "bar"}

    def parse(self, text: str) -> units.Entry:
        return units.parse_pressure(text, default_unit=self.default_unit, ambient_pa=self.ambient_pa)


class TemperatureField(QuantityField):
    """A temperature: `68F`, `20 °C`; cleans to millikelvin."""

    defaults = {"us": "°F", "metric": "°C"}

    def parse(self, text: str) -> units.Entry:
        return units.parse_temperature(text, default_unit=self.default_unit)


class VolumeField(QuantityField):
    """A capacity: `6.8 L`, `415 in3`; cleans to millilitres."""

    defaults = {"us": "L", "metric": "L"}

    def parse(self, text: str) -> units.Entry:
        return units.parse_volume(text, default_unit=self.default_unit)


class LengthField(QuantityField):
    """A length or bore: `1.5 m`, `0.19 in`; cleans to micrometres."""

    def __init__(self, *, us: str = "in", metric: str = "mm", **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.defaults = {"us": us, "metric": metric}

    def parse(self, text: str) -> units.Entry:
        return units.parse_length(text, default_unit=self.default_unit)


class InstantField(forms.CharField):
    """A day and time as the shop's clock shows it; cleans to an aware instant or None."""

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("required", False)
        kwargs.setdefault("widget", forms.DateTimeInput(attrs={"type": "datetime-local"}))
        super().__init__(max_length=40, **kwargs)
        self.zone: Any = None

    def clean(self, value: Any) -> Any:
        text = super().clean(value)
        if not text:
            return None
        try:
            naive = datetime.fromisoformat(text.strip().replace("/", "-"))
        except ValueError:
            raise ValidationError(
                "This isn't a date and time. Write it as 2026-03-31 14:05, in the shop's time.", code="not a time"
            ) from None
        return naive if naive.tzinfo else naive.replace(tzinfo=self.zone)


class PromisedField(InstantField):
    """When something is promised for; more than a day past is refused as a slip."""

    def clean(self, value: Any) -> Any:
        instant = super().clean(value)
        if instant is not None and not -2 < (instant - timezone.now()).days < 730:
            raise ValidationError("This isn't a time to promise. Check the day and the year.", code="not a promise")
        return instant


class HappenedField(InstantField):
    """When it happened, for what is entered late; empty means now. A time to come is refused."""

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("label", "Happened at (if not now)")
        super().__init__(**kwargs)

    def clean(self, value: Any) -> Any:
        instant = super().clean(value)
        if instant is None:
            return None
        if instant > timezone.now():
            raise ValidationError(
                "This is still to come. Give the time at which it happened, or leave it empty for now.", code="in the future"
            )
        if instant.year < 1990:
            raise ValidationError("This is too long ago for a record here. Check the year.", code="too long ago")
        return instant
