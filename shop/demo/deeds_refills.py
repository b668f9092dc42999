"""Steps at the filling stations: supply bottles hung and taken off, refills opened, weighed, left waiting."""

from __future__ import annotations

from bottles.models import Refill, Station, Supply
from bottles.selectors.filling_facts import air_pressure
from bottles.services import refill_steps, stations
from bottles.services.forecasting import Asked, Readings, work_out
from bottles.services.learning import gather, learn
from bottles.services.refill_steps import Weight, weigh_refill
from bottles.services.refilling import Opened, Opening, look_items, open_refill
from shop.demo.deeds_books import answering
from shop.demo.doing import Doer, bottle_of, deed, instant, mass, place_of
from shop.demo.steps import Step
from shop.physics.units import parse_pressure, parse_temperature


@deed("supply.connect")
def _connect(doer: Doer, step: Step) -> Supply:
    station = Station.objects.get(code=step.values["station"])
    return stations.connect(**doer.common(step), station=station, bottle=bottle_of(step))


@deed("supply.disconnect")
def _disconnect(doer: Doer, step: Step) -> None:
    supply = Supply.objects.select_related("station", "bottle").get(bottle__code=step.values["bottle"])
    stations.disconnect(**doer.common(step), supply=supply, place=place_of(step.values["place"]))


@deed("refill.open")
def _open(doer: Doer, step: Step) -> Opened:
    told = step.values
    bottle = bottle_of(step)
    supply = Supply.objects.select_related("station__scale", "station__supply_scale", "bottle").get(
        station__code=told["station"], bottle__code=told["supply"]
    )
    asked = Asked(
        bottle=bottle, supply=supply, limit_g=doer.limit_g(bottle) or 0, source_limit_g=doer.limit_g(supply.bottle),
        shop=doer.shop,
    )
    readings = Readings(
        supply_temperature=parse_temperature(told["supply_temperature"], default_unit="°C"),
        bottle_temperature=parse_temperature(told["bottle_temperature"], default_unit="°C"),
        gauge=parse_pressure(told["gauge"], default_unit="bar", ambient_pa=air_pressure(doer.shop)) if told["gauge"] else None,
        supply_weight=mass(told["supply_gross"]) if told["supply_gross"] else None, bottle_weight=mass(told["gross"]),
        bottle_taken=told["bottle_taken"],
    )
    answer = work_out(asked, readings)
    items = look_items(bottle, doer.shop)
    look = {item.code: True for item in items if item.when == "always" or told["star_checks"]}
    return answering(step, lambda reason: open_refill(
        **doer.common(step),
        opening=Opening(asked=asked, answer=answer, method=told["method"], look=look, pressure_kept=True, reason=reason),
    ))  # fmt: skip


@deed("refill.weigh")
def _weigh(doer: Doer, step: Step) -> object:
    told = step.values
    weight = Weight(
        gross=mass(told["gross"]), line_off=told["line_off"],
        supply_gross=mass(told["supply_gross"]) if told["supply_gross"] else None,
    )
    return weigh_refill(**doer.common(step), refill=_open_one(step), weight=weight, ended_by=told["ended_by"])


@deed("refill.wait")
def _wait(doer: Doer, step: Step) -> None:
    refill = _open_one(step)
    refill_steps.wait(
        **doer.common(step), refill=refill, version=refill.version, until=instant(step.values["until"]), note=step.values["note"]
    )


@deed("learning.fit")
def _learn(doer: Doer, step: Step) -> object:
    return learn(key=doer.key_of(step.name), shop=doer.shop, gathered=gather(doer.shop))


def _open_one(step: Step) -> Refill:
    return Refill.objects.select_related("bottle", "station__scale", "station__supply_scale").get(
        bottle__code=step.values["bottle"], closed_at__isnull=True
    )
