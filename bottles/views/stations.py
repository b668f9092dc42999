"""Pages of stations: the list, adding and changing one, connecting supply bottles."""

from __future__ import annotations

import uuid
from typing import Any
from urllib.parse import urlencode

from django.db.models import QuerySet
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import reverse

from bottles.forms.stations import ConnectForm, DisconnectForm, StationForm, station_as_typed
from bottles.models import Station, Supply
from bottles.rules.lying import how_it_lies
from bottles.selectors.filling_facts import takes_liquid
from bottles.services import stations as service
from bottles.views.refill_words import RefillWords, refill_words
from shop.base.errors import NotReady
from shop.base.models import Shop
from shop.base.permissions import EVERYONE, MANAGERS, allow
from shop.people.acting import ActView
from shop.people.models import User
from shop.physics.formatting import format_length, format_volume
from shop.physics.units import ambient_pressure


@allow(EVERYONE, room="counter")
def stations(request: HttpRequest) -> HttpResponse:
    """Every station with what hangs on it."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    rows = [_row(station, words) for station in _all()]
    return render(request, "bottles/stations.html", {"stations": rows, "may_change": bool(MANAGERS & request.user.roles)})  # type: ignore[union-attr]


class StationNew(ActView):
    """Set up a station."""

    roles = MANAGERS
    room = "counter"
    form_class = StationForm
    heading = "Set up a station"
    submit = "Set up"
    said = "The station is set up. Connect its supply bottles."

    def initial(self) -> dict[str, Any]:
        us = (self.request.user.units or self.shop.units) == "us"  # type: ignore[union-attr]
        return {
            "gauge_tolerance": "30 psi" if us else "2 bar", "thermometer_tolerance": "2 °F" if us else "1 °C", "active": True,
            "pulls": "down",
        }  # fmt: skip

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("bottles:stations")}

    def act(self, form: StationForm, person: User, key: uuid.UUID) -> str:
        service.add_station(key=key, person=person, values=form.values())
        return reverse("bottles:stations")

    def first_page(self, act: Any) -> str:
        return reverse("bottles:stations")


class OfStation(ActView):
    """What the pages of one station share."""

    room = "counter"
    station: Station

    def find(self, **kwargs: Any) -> None:
        found = Station.objects.filter(pk=kwargs["pk"]).first()
        if found is None:
            raise Http404
        self.station = found

    def context(self) -> dict[str, Any]:
        return {"back_url": reverse("bottles:stations")}

    def first_page(self, act: Any) -> str:
        return reverse("bottles:stations")


class StationChange(OfStation):
    """Change what a station is made of."""

    roles = MANAGERS
    form_class = StationForm

    def initial(self) -> dict[str, Any]:
        system = self.request.user.units or self.shop.units  # type: ignore[union-attr]
        return station_as_typed(self.station, system, ambient_pa=ambient_pressure(float(self.shop.height_m)))

    def context(self) -> dict[str, Any]:
        return super().context() | {"heading": f"Change {self.station.name}"}

    def act(self, form: StationForm, person: User, key: uuid.UUID) -> str:
        service.change_station(
            key=key, person=person, station=self.station, version=form.cleaned_data["version"] or 0, values=form.values()
        )
        return reverse("bottles:stations")


class Connect(OfStation):
    """Hang a supply bottle on a station."""

    roles = EVERYONE
    form_class = ConnectForm
    submit = "Connect"
    said = "Connected."

    def context(self) -> dict[str, Any]:
        return super().context() | {
            "heading": f"Connect a supply bottle to {self.station.name}",
            "cautions": [
                "Every fitting clean and free of oil and grease: nitrous is an oxidiser.",
                "The bottle held so that it can't fall before its cap comes off. Its valve is opened slowly, facing away.",
            ],
        }

    def act(self, form: ConnectForm, person: User, key: uuid.UUID) -> str:
        data = form.cleaned_data
        service.connect(key=key, person=person, station=self.station, bottle=data["bottle"], inverted=data["inverted"])
        return reverse("bottles:stations")


class Disconnect(ActView):
    """Take a supply bottle off its station."""

    roles = EVERYONE
    room = "counter"
    form_class = DisconnectForm
    submit = "Take off"
    said = "Taken off."
    supply: Supply | None

    def find(self, **kwargs: Any) -> None:
        self.supply = Supply.objects.filter(pk=kwargs["pk"]).select_related("bottle", "station").first()
        if self.supply is None and self.request.method != "POST":
            raise Http404

    def context(self) -> dict[str, Any]:
        what = f"Take {self.supply.bottle.code} off {self.supply.station.name}" if self.supply else "Take off"
        return {
            "heading": what, "back_url": reverse("bottles:stations"),
            "cautions": ["Valve shut and the line bled outdoors or into the open before a fitting is loosened; cap on at once."],
        }  # fmt: skip

    def act(self, form: DisconnectForm, person: User, key: uuid.UUID) -> str:
        if self.supply is None:
            raise NotReady("It was taken off already.", code="taken off")
        service.disconnect(key=key, person=person, supply=self.supply, place=form.cleaned_data["place"])
        return reverse("bottles:stations")

    def first_page(self, act: Any) -> str:
        return reverse("bottles:stations")


def _all() -> QuerySet[Station]:
    return (
        Station.objects.select_related("place", "scale", "supply_scale")
        .prefetch_related("supplies__bottle__account", "supplies__bottle__standing__weighing")
        .order_by("-active", "name")
    )


def _row(station: Station, words: RefillWords) -> dict[str, Any]:
    units = words.units
    litres = service.line_volume_m3(station) * 1e6
    hose = (
        f"{format_length(station.hose_length_um, units.length)} of {format_length(station.hose_bore_um, units.bore)} bore, "
        f"{format_volume(round(litres), 'mL')} inside"
    )
    pull = "none"
    if station.hose_pull_g:
        pull = f"{words.mass(abs(station.hose_pull_g))}, {'bears down' if station.hose_pull_g > 0 else 'lifts'}"
    loss = f"{words.mass(station.line_loss_g)} (entered)" if station.line_loss_g is not None else "computed at each refill"
    hung = [supply.bottle.code for supply in station.supplies.all()]
    return {
        "joined_url": f"{reverse('bottles:joined', args=[hung[0]])}?{urlencode({'other': hung[1]})}" if len(hung) > 1 else "",
        "pk": station.pk, "name": station.name, "code": station.code, "active": station.active,
        "facts": [
            ("Place", str(station.place or "not written down")),
            ("Scale", str(station.scale or "none: nothing can be filled here")),
            ("Supply on a scale", str(station.supply_scale or "no")),
            ("Hose", hose), ("Hose's pull", pull), ("Line loss", loss),
            ("Pump", station.pump_note if station.pumped else "none"),
            *_pump(station, words),
        ],
        "supplies": [_supply(supply, words) for supply in station.supplies.all()],
    }  # fmt: skip


def _pump(station: Station, words: RefillWords) -> list[tuple[str, str]]:
    """The pump's limits as a gauge shows them, and as they were typed off its plate."""
    plate = [
        ("Pump delivers at most", station.pump_most_pa, station.pump_most_typed),
        ("Pump's inlet at least", station.pump_least_pa, station.pump_least_typed),
    ]
    return [(name, f"{words.pressure(pa)} gauge, entered as “{typed}”") for name, pa, typed in plate if pa is not None]


def _supply(supply: Supply, words: RefillWords) -> dict[str, Any]:
    bottle = supply.bottle
    account, standing = getattr(bottle, "account", None), getattr(bottle, "standing", None)
    weighing = standing.weighing if standing else None
    stands = "upside down" if supply.inverted else "upright"
    gives = {
        True: f"Stands {stands} and gives liquid.", False: f"Stands {stands} and gives vapour only.",
        None: f"Stands {stands}; whether it gives liquid isn't known.",
    }[takes_liquid(bottle, inverted=supply.inverted)]  # fmt: skip
    lies = how_it_lies("supply", bottle.dip_tube).sentence if not gives.endswith("gives liquid.") else ""
    return {
        "pk": supply.pk, "code": bottle.code, "url": bottle.get_absolute_url(),
        "books": words.mass(account.balance_g) if account else "unknown",
        "weighed": words.mass(weighing.net_g, plus_minus_g=weighing.error_g) if weighing else "never weighed",
        "stands": f"{gives} {lies}".strip(),
    }  # fmt: skip
