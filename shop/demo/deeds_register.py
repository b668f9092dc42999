"""Steps of the register: premises, customers, cars, bottles, where they are, what was seen on them."""

from __future__ import annotations

from datetime import date
from typing import Any

from bottles.models import Bottle, Condition, Scale
from bottles.rules.stamps import read_stamp
from bottles.services import conditions, custody, owners, registering, scales, stations, tares
from bottles.services.owners import Owner
from bottles.services.registering import FirstFacts, Particulars
from bottles.services.scales import ScaleData
from bottles.services.stamps import SeenStamp
from bottles.services.tares import NewTare, Part
from shop.base import clock
from shop.base.models import Place
from shop.cars.services import add_car
from shop.demo.doing import Doer, bottle_of, car_of, customer_of, deed, instant, mass, place_of
from shop.demo.kit import kit_for
from shop.demo.names import MAKERS, SUPPLIER
from shop.demo.steps import Step
from shop.people.services import add_customer, record_consent
from shop.physics.units import parse_length, parse_volume
from shop.rooms.services import add_place, decide_policy


@deed("policy.decide")
def _policy(doer: Doer, step: Step) -> object:
    today = clock.today(doer.shop)
    return decide_policy(**doer.common(step), effective_from=today, today=today, values=dict(step.values))


@deed("place.add")
def _place(doer: Doer, step: Step) -> Place:
    return add_place(**doer.common(step), values=dict(step.values))


@deed("scale.add")
def _scale(doer: Doer, step: Step) -> Scale:
    told: dict[str, Any] = dict(step.values)
    figures: dict[str, Any] = {name: mass(told.pop(name)) for name in ("resolution", "error", "capacity")}
    days: dict[str, Any] = {name: date.fromisoformat(told.pop(name)) for name in ("calibrated_on", "calibration_due")}
    return scales.add_scale(**doer.common(step), data=ScaleData(**told, **figures, **days))


@deed("station.add")
def _station(doer: Doer, step: Step) -> object:
    told = step.values
    length, bore = (parse_length(told[name], default_unit="mm") for name in ("hose_length", "hose_bore"))
    values = stations.StationValues(
        code=told["code"], name=told["name"], place=place_of(told["place"]), scale=Scale.objects.get(code=told["scale"]),
        supply_scale=Scale.objects.get(code=told["supply_scale"]) if told["supply_scale"] else None,
        hose_length_um=length.stored, hose_length_typed=length.typed, hose_bore_um=bore.stored, hose_bore_typed=bore.typed,
        hose_pull_g=mass(told["hose_pull"]).stored if told["hose_pull"] else 0, hose_pull_typed=told["hose_pull"],
        line_loss_g=mass(told["line_loss"]).stored if told["line_loss"] else None, line_loss_typed=told["line_loss"],
    )
    return stations.add_station(**doer.common(step), values=values)


@deed("customer.add")
def _customer(doer: Doer, step: Step) -> object:
    return add_customer(**doer.common(step), **step.values)


@deed("consent")
def _consent(doer: Doer, step: Step) -> object:
    customer, today = customer_of(step.values["name"]), clock.today(doer.shop)
    assert customer is not None
    return record_consent(
        **doer.common(step), customer=customer, purpose="fill", given=step.values["given"], on=today, today=today,
        how="said at the counter",
    )


@deed("car.add")
def _car(doer: Doer, step: Step) -> object:
    told = dict(step.values)
    return add_car(**doer.common(step), customer=customer_of(told.pop("owner")), **told)


@deed("bottle.register")
def _bottle(doer: Doer, step: Step) -> Bottle:
    told = step.values
    capacity = parse_volume(told["capacity_typed"], default_unit="mL") if told["capacity_typed"] else None
    charge = mass(told["charge_typed"]) if told["charge_typed"] else None
    particulars = Particulars(
        serial=told["serial"], mark=told["mark"], maker=MAKERS[told["maker"]], wall=told["wall"], alloy=told["alloy"],
        capacity_ml=capacity.stored if capacity else None, capacity_basis="stamped" if capacity else "unknown",
        capacity_typed=told["capacity_typed"], charge_g=charge.stored if charge else None, charge_typed=told["charge_typed"],
        dip_tube=told["dip_tube"], outlet=told["outlet"], disc=told["disc"], use=told["use"], permit=told["permit"],
        permit_until=date.fromisoformat(told["permit_until"]) if told["permit_until"] else None,
        permit_lists_nitrous=told["permit_lists"], own_limit_g=told["own_limit_g"], last_held=told["last_held"],
        race_grade=told["race_grade"], note=told["note"],
    )
    year_first, today = kit_for(doer.shop.country).year_first, clock.today(doer.shop)
    stamps = [
        SeenStamp(kind, read_stamp(text, year_first=year_first, today=None if kind == "end" else today))
        for kind, text in told["stamps"]
    ]
    first = FirstFacts(owner=_owner(told["owner"]), tare=_tare(told["parts"]) if told["parts"] else None, stamps=stamps)
    return registering.register_bottle(
        **doer.common(step), particulars=particulars, first=first, code=told["code"], confirmed=told["confirmed"]
    )


@deed("bottle.retire")
def _retire(doer: Doer, step: Step) -> None:
    conditions.retire(**doer.common(step), bottle=bottle_of(step), reason=step.values["reason"])


@deed("owner.change")
def _change_owner(doer: Doer, step: Step) -> object:
    return owners.change_owner(
        **doer.common(step), bottle=bottle_of(step), owner=_owner(step.values["owner"]), since=clock.today(doer.shop)
    )


@deed("tare.start")
def _start_tare(doer: Doer, step: Step) -> object:
    return tares.start_tare(**doer.common(step), bottle=bottle_of(step), tare=_tare(step.values["parts"]))


@deed("condition.note")
def _note(doer: Doer, step: Step) -> Condition:
    return conditions.note_condition(
        **doer.common(step), bottle=bottle_of(step), code=step.values["condition"], seen_on=clock.today(doer.shop),
        note=step.values["note"],
    )


@deed("condition.end")
def _end(doer: Doer, step: Step) -> object:
    condition = Condition.objects.get(bottle=bottle_of(step), code=step.values["condition"], end__isnull=True)
    return conditions.end_condition(**doer.common(step), condition=condition, how=step.values["how"])


@deed("custody.in")
def _in(doer: Doer, step: Step) -> object:
    told = step.values
    return custody.check_in(
        **doer.common(step), bottle=bottle_of(step), place=place_of(told["place"]), brought_by=told["brought_by"],
        wanted=told["wanted"], promised_at=instant(told["promised"]),
    )


@deed("custody.move")
def _move(doer: Doer, step: Step) -> object:
    return custody.move(**doer.common(step), bottle=bottle_of(step), place=place_of(step.values["place"]))


@deed("custody.out")
def _out(doer: Doer, step: Step) -> object:
    told = step.values
    return custody.hand_over(
        **doer.common(step), bottle=bottle_of(step), kind=told["kind"], to_whom=told["to"], limit_g=told["limit_g"],
        car=car_of(told["car"]),
    )


def _owner(name: str) -> Owner:
    if name == "shop":
        return Owner("shop")
    if name == "supplier":
        return Owner("supplier", supplier=SUPPLIER)
    return Owner("customer", customer=customer_of(name))


def _tare(parts: list[Any]) -> NewTare:
    return NewTare(parts=tuple(Part(thing, mass(text)) for thing, text in parts), basis="weighed")
