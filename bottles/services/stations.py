"""Filling stations: what each is made of, and which supply bottles hang on it.

Guarantees: a supply bottle hangs on one station at most; a bottle that is being filled, is out of
the shop or out of the register isn't connected; none is taken off while a refill draws on it.
"""

from __future__ import annotations

import math
import uuid
from dataclasses import dataclass, fields
from typing import Any

from django.db import IntegrityError, transaction

from bottles.models import Bottle, Custody, Refill, Scale, Station, Supply
from bottles.services.cleaning import clean
from bottles.services.plan_again import plan_again
from bottles.services.refusals import locked
from bottles.services.standing import restate
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act, Place
from shop.people.models import User


@dataclass(frozen=True, slots=True)
class StationValues:
    """What a station is made of, each figure with what was typed."""

    code: str
    name: str
    hose_length_um: int
    hose_length_typed: str
    hose_bore_um: int
    hose_bore_typed: str
    place: Place | None = None
    scale: Scale | None = None
    supply_scale: Scale | None = None
    hose_pull_g: int = 0
    hose_pull_typed: str = ""
    line_loss_g: int | None = None
    line_loss_typed: str = ""
    gauge_tolerance_pa: int = 206_843
    thermometer_tolerance_mk: int = 1000
    pumped: bool = False
    pump_note: str = ""
    pump_most_pa: int | None = None
    pump_most_typed: str = ""
    pump_least_pa: int | None = None
    pump_least_typed: str = ""
    active: bool = True

    def columns(self) -> dict[str, Any]:
        """The values by the names of their columns."""
        return {field.name: getattr(self, field.name) for field in fields(self)}


def line_volume_m3(station: Station) -> float:
    """Return the inside volume of a station's hose."""
    return math.pi / 4 * (station.hose_bore_um * 1e-6) ** 2 * station.hose_length_um * 1e-6


def add_station(*, key: uuid.UUID, person: User | None, values: StationValues) -> Station:
    """Set up a station; raise Refusal where its code is another's or something can't be."""
    _refuse_odd(values)
    station = Station(**values.columns())
    clean(station)
    with acts.begin(key=key, person=person, code="station.added", subject=f"station:{values.code}"):
        _once(station.save)
    return station


def change_station(
    *, key: uuid.UUID, person: User | None, station: Station, version: int, values: StationValues
) -> None:
    """Change what a station is made of; raise Stale where someone else saved meanwhile."""
    _refuse_odd(values)
    wanted = values.columns()
    with acts.begin(
        key=key, person=person, code="station.changed", subject=f"station:{station.code}",
        changes=acts.changed(station, wanted),
    ):
        if not values.active:
            _refuse_in_use(station)
        _once(lambda: acts.update_master(station, version=version, values=wanted))


def connect(
    *, key: uuid.UUID, person: User | None, station: Station, bottle: Bottle, inverted: bool = False
) -> Supply:
    """Hang a supply bottle on a station.

    Raises Retired; NotReady where it hangs on one already, isn't in the shop, is being filled, or
    where the station is out of use.
    """
    with acts.begin(key=key, person=person, code="supply.connected", subject=f"station:{station.code}",
                    changes={"bottle": bottle.code, "inverted": inverted}) as act:  # fmt: skip
        bottle = locked(bottle)
        station = Station.objects.get(pk=station.pk)
        if not station.active:
            raise NotReady("This station is out of use. A manager can put it back.", code="station out of use")
        hangs = Supply.objects.filter(bottle=bottle).select_related("station").first()
        if hangs is not None:
            raise NotReady(f"{bottle.code} hangs on {hangs.station} already. Take it off there first.",
                           code="on a station", field="bottle")  # fmt: skip
        if not restate(bottle).is_in:
            raise NotReady(f"{bottle.code} isn't in the shop. Check it in first.", code="not in", field="bottle")
        if Refill.objects.filter(bottle=bottle, closed_at__isnull=True).exists():
            raise NotReady(f"{bottle.code} is being filled itself. Close that refill first.", code="open refill", field="bottle")
        supply = Supply.objects.create(station=station, bottle=bottle, inverted=inverted)
        _moved(act, bottle, station.place)
        plan_again(act, bottle.code)
    return supply


def disconnect(*, key: uuid.UUID, person: User | None, supply: Supply, place: Place | None = None) -> None:
    """Take a supply bottle off its station, and put it at a place where one is given.

    Raises NotReady where it was taken off meanwhile or an open refill draws on it.
    """
    with acts.begin(key=key, person=person, code="supply.taken off", subject=f"station:{supply.station.code}",
                    changes={"bottle": supply.bottle.code}) as act:  # fmt: skip
        bottle = locked(supply.bottle)
        if not Supply.objects.filter(pk=supply.pk).exists():
            raise NotReady(f"{bottle.code} was taken off already.", code="taken off")
        drawing = drawing_refill(bottle)
        if drawing is not None:
            raise NotReady(
                f"{drawing.bottle} is being filled from {bottle.code}. Weigh it with the line disconnected and close that "
                "refill, or go on from another supply bottle.", code="open refill",
            )  # fmt: skip
        Supply.objects.filter(pk=supply.pk).delete()
        _moved(act, bottle, place)
        plan_again(act, bottle.code)


def drawing_refill(source: Bottle) -> Refill | None:
    """Return the open refill whose draw in force is on a bottle, or None."""
    open_ones = Refill.objects.filter(closed_at__isnull=True, draws__source=source).select_related("bottle").distinct()
    for refill in open_ones:
        last = refill.draws.order_by("-id").first()
        if last is not None and last.source_id == source.pk:
            return refill
    return None


def _moved(act: Act, bottle: Bottle, place: Place | None) -> None:
    """Write where the bottle stands now; what it waits for stays."""
    if place is None:
        return
    last = restate(bottle).custody
    if last is None or not last.is_in or last.place_id == place.pk:
        return
    custody = Custody(
        act=act, bottle=bottle, kind="moved", place=place, with_whom=last.with_whom, wanted=last.wanted,
        promised_at=last.promised_at, happened_at=clock.now(),
    )  # fmt: skip
    clean(custody)
    custody.save()
    restate(bottle)


def _refuse_in_use(station: Station) -> None:
    if Supply.objects.filter(station=station).exists():
        raise NotReady("Supply bottles still hang on this station. Take them off first.", code="supplies connected", field="active")
    if Refill.objects.filter(station=station, closed_at__isnull=True).exists():
        raise NotReady("A refill is open at this station. Close it first.", code="open refill", field="active")


def _refuse_odd(values: StationValues) -> None:
    """Refuse figures that no filling hose, gauge or thermometer has."""
    odd = None
    if not 100_000 <= values.hose_length_um <= 50_000_000:
        odd = "hose_length", "A filling hose is between 10 cm and 50 m long. Check the figure and its unit."
    elif not 500 <= values.hose_bore_um <= 50_000:
        odd = "hose_bore", "The bore of a filling hose lies between 0.5 and 50 mm. Check the figure and its unit."
    elif abs(values.hose_pull_g) > 5_000:
        odd = "hose_pull", "A hose that pulls with more than 5 kg makes the scale useless. Hang it up, then measure again."
    elif values.line_loss_g is not None and values.line_loss_g > 5_000:
        odd = "line_loss", "A line that loses more than 5 kg isn't a filling hose. Check the figure and its unit."
    elif not 1_000 <= values.gauge_tolerance_pa <= 2_000_000:
        odd = "gauge_tolerance", "A gauge's tolerance lies between 0.01 and 20 bar. Check the figure and its unit."
    elif not 50 <= values.thermometer_tolerance_mk <= 10_000:
        odd = "thermometer_tolerance", "A thermometer's tolerance lies between 0.05 and 10 °C. Check the figure and its unit."
    elif values.pumped and not values.pump_note.strip():
        odd = "pump_note", "Write the pump's limits as they stand on its plate: pressure, temperature, made for nitrous oxide."
    elif not values.pumped and (values.pump_most_pa is not None or values.pump_least_pa is not None):
        odd = "pumped", "These are figures of a pump. Tick that it has one, or leave them empty."
    elif values.pump_most_pa is not None and not 1_000_000 <= values.pump_most_pa <= 100_000_000:
        odd = "pump_most", "A pump for nitrous oxide delivers at 10 to 1,000 bar. Check the figure on its plate and its unit."
    elif values.pump_least_pa is not None and values.pump_least_pa > 7_000_000:
        odd = "pump_least", "No supply bottle keeps up so high an inlet pressure: at most 70 bar. Check the figure and its unit."
    elif values.pump_most_pa is not None and values.pump_least_pa is not None and values.pump_least_pa >= values.pump_most_pa:
        odd = "pump_least", "A pump delivers above its inlet's pressure. The two figures look exchanged: read the plate again."
    elif values.scale is not None and values.scale == values.supply_scale:
        odd = "supply_scale", "One scale can't carry both bottles at once. Choose another for the supply, or none."
    if odd:
        raise Refusal(odd[1], code="out of range", field=odd[0])


def _once(save: Any) -> None:
    try:
        with transaction.atomic():
            save()
    except IntegrityError:
        raise Refusal("Another station has this code. Choose one of its own.", code="code taken", field="code") from None
