"""Forms of stations: what one is made of, and the supply bottles that hang on it."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.models import Bottle, Scale, Station
from bottles.services.stations import StationValues
from shop.base.fields import LengthField, MassField, PressureField, QuantityField
from shop.base.models import Place
from shop.base.shown_back import pressure_shown_back
from shop.people.acting import ActForm
from shop.physics import units
from shop.physics.differences import parse_temperature_difference
from shop.physics.unit_table import UNITS

PULLS = [("down", "bears down: the scale then reads too much"), ("up", "lifts: the scale then reads too little")]


class PressureToleranceField(PressureField):
    """A difference of pressures: `30 psi`, `2 bar`; cleans to pascal."""

    def parse(self, text: str) -> units.Entry:
        return units.parse_pressure(text, default_unit=self.default_unit, ambient_pa=0.0)


class TemperatureToleranceField(QuantityField):
    """A difference of temperatures: `1 °C`, `2 °F`; cleans to millikelvin."""

    defaults = {"us": "°F", "metric": "°C"}

    def parse(self, text: str) -> units.Entry:
        return parse_temperature_difference(text, default_unit=self.default_unit)


class StationForm(ActForm):
    """What a station is made of."""

    code = forms.CharField(max_length=20, help_text="Short, as it's written on the station itself.",
                           error_messages={"required": "Give the station a short code."})  # fmt: skip
    name = forms.CharField(max_length=80, error_messages={"required": "Give the station a name."})
    place = forms.ModelChoiceField(
        Place.objects.filter(active=True).order_by("name"), required=False, empty_label="not written down",
        help_text="Bottles that are connected are then known to stand there.",
    )
    scale = forms.ModelChoiceField(
        Scale.objects.filter(active=True).order_by("name"), label="Scale of the bottle to fill", required=False,
        empty_label="none yet", help_text="Nitrous is filled by weight: without a scale nothing is filled here.",
    )
    supply_scale = forms.ModelChoiceField(
        Scale.objects.filter(active=True).order_by("name"), label="Scale of the supply bottle", required=False,
        empty_label="none", help_text="Without one the supply's books go down by what arrives and the line's loss.",
    )
    hose_length = LengthField(
        us="ft", metric="m", label="Hose, length", error_messages={"required": "Measure the hose from valve to valve."}
    )
    hose_bore = LengthField(
        us="in", metric="mm", label="Hose, bore", help_text="Inside diameter: .19 in, 4.8 mm.",
        error_messages={"required": "Give the hose's bore: it stands on the hose or its data sheet."},
    )
    hose_pull = MassField(
        label="Hose's pull on the scale", required=False,
        help_text="The reading with the line connected less the reading without it, bottle and contents the same.",
    )
    pulls = forms.ChoiceField(label="The hose", choices=PULLS, initial="down", widget=forms.RadioSelect, required=False)
    line_loss = MassField(
        label="Line loss a refill", required=False,
        help_text="From experience. Left empty it's computed: the hose full of what the supply bottle gives.",
    )
    gauge_tolerance = PressureToleranceField(label="Gauge, tolerance")
    thermometer_tolerance = TemperatureToleranceField(label="Thermometer, tolerance")
    pumped = forms.BooleanField(label="It has a pump", required=False)
    pump_note = forms.CharField(
        label="The pump's plate", max_length=200, required=False,
        help_text="Its limits. Made for nitrous oxide, oil-free; never run dry, never against a shut valve.",
    )
    pump_most = PressureField(
        label="Highest delivery pressure on its plate", required=False,
        help_text="As a gauge shows it, unless the plate says absolute: 100 bar, 1500 psi, 101 bara.",
    )
    pump_least = PressureField(
        label="Lowest inlet pressure on its plate", required=False, help_text="Below it the pump runs dry: 10 bar, 150 psi."
    )
    active = forms.BooleanField(label="In use", required=False, initial=True)

    def values(self) -> StationValues:
        """The station as the service takes it."""
        data = self.cleaned_data
        pull = self.stored("hose_pull") or 0
        return StationValues(
            code=data["code"].strip(), name=data["name"].strip(), place=data["place"], scale=data["scale"],
            supply_scale=data["supply_scale"],
            hose_length_um=data["hose_length"].stored, hose_length_typed=self.typed("hose_length"),
            hose_bore_um=data["hose_bore"].stored, hose_bore_typed=self.typed("hose_bore"),
            hose_pull_g=-pull if data["pulls"] == "up" else pull, hose_pull_typed=self.typed("hose_pull"),
            line_loss_g=self.stored("line_loss"), line_loss_typed=self.typed("line_loss"),
            gauge_tolerance_pa=data["gauge_tolerance"].stored, thermometer_tolerance_mk=data["thermometer_tolerance"].stored,
            pumped=data["pumped"], pump_note=data["pump_note"].strip(), active=data["active"],
            pump_most_pa=self.stored("pump_most"), pump_most_typed=self.typed("pump_most"),
            pump_least_pa=self.stored("pump_least"), pump_least_typed=self.typed("pump_least"),
        )  # fmt: skip


class ConnectForm(ActForm):
    """A supply bottle, and how it stands."""

    bottle = forms.ModelChoiceField(
        Bottle.objects.none(), label="Supply bottle", empty_label="choose",
        error_messages={"required": "Choose the bottle that was connected."},
    )
    inverted = forms.BooleanField(label="Upside down, in a stand made for it", required=False)

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        field: Any = self.fields["bottle"]
        field.queryset = Bottle.objects.filter(
            retired_at__isnull=True, standing__is_in=True, supply__isnull=True, use="supply"
        ).order_by("code")


class DisconnectForm(ActForm):
    """Where the bottle goes."""

    place = forms.ModelChoiceField(
        Place.objects.filter(active=True).exclude(kind="station").order_by("name"), label="Where it stands now", required=False,
        empty_label="where it was",
    )


def station_as_typed(station: Station, system: str, *, ambient_pa: float) -> dict[str, Any]:
    """A station as its form shows it, each figure so that typing it again gives the same."""
    us = system == "us"

    def mass(grams: int | None) -> str:
        return "" if grams is None else units.in_own_unit(grams, "oz" if us else "g")

    def gauge(pascal: int | None, typed: str) -> str:
        return "" if pascal is None else pressure_shown_back(pascal, typed, unit="psi" if us else "bar", ambient_pa=ambient_pa)

    return {
        "version": station.version, "code": station.code, "name": station.name, "place": station.place_id,
        "scale": station.scale_id, "supply_scale": station.supply_scale_id,
        "hose_length": units.in_own_unit(station.hose_length_um, "ft" if us else "m"),
        "hose_bore": units.in_own_unit(station.hose_bore_um, "in" if us else "mm"),
        "hose_pull": mass(abs(station.hose_pull_g)) if station.hose_pull_g else "",
        "pulls": "up" if station.hose_pull_g < 0 else "down",
        "line_loss": mass(station.line_loss_g),
        "gauge_tolerance": units.in_own_unit(station.gauge_tolerance_pa, "psi" if us else "bar", ambient_pa=0.0),
        "thermometer_tolerance": tolerance_words(station.thermometer_tolerance_mk, system),
        "pumped": station.pumped, "pump_note": station.pump_note, "active": station.active,
        "pump_most": gauge(station.pump_most_pa, station.pump_most_typed),
        "pump_least": gauge(station.pump_least_pa, station.pump_least_typed),
    }  # fmt: skip


def tolerance_words(millikelvin: int, system: str) -> str:
    """A difference of temperatures as it's typed."""
    unit = "°F" if system == "us" else "°C"
    return f"{float(millikelvin / UNITS[unit].factor):.4g} {unit}"
