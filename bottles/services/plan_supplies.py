"""The supply bottles that a plan counts on; those that it can't, with the reason.

A fixed number of queries, however many there are. Nothing is written.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from django.db.models import QuerySet

from bottles.models import Bottle, Standing, Station, Supply
from bottles.physics.vessel import Vessel
from bottles.rules.fitness import Judgement
from bottles.rules.planning.problem import Source
from bottles.selectors.contents import Holding, holdings
from bottles.selectors.filling_facts import below_tube_m3, takes_liquid, walls_by
from bottles.selectors.gauge_readings import ByGauge, least_by_gauge
from bottles.selectors.judging import Rulebook
from bottles.services.stations import line_volume_m3
from shop.physics.errors import PhysicsError


def supplies_on_hand(
    book: Rulebook, stations: Sequence[Station], temperature_k: float
) -> tuple[list[Source], list[dict[str, Any]]]:  # fmt: skip
    """Supply bottles on the stations and in store; those that can't be counted on."""
    places = {station.pk: number for number, station in enumerate(stations)}
    hanging = {one.bottle_id: one for one in Supply.objects.filter(station__active=True).select_related("station")}
    standings = list(_supplies(list(hanging)))
    bottles = [one.bottle for one in standings]
    judged = book.judge_all(bottles, {one.pk: one for one in standings})
    held = holdings(bottles, standings)
    line = max((line_volume_m3(station) for station in stations), default=0.0)
    found: list[Source] = []
    not_counted: list[dict[str, Any]] = []
    by_gauge = least_by_gauge([key for key, holding in held.items() if holding.grams is None])
    for one in standings:
        supply = hanging.get(one.pk)
        bottle, holding = one.bottle, held[one.pk]
        why = _why_not_emptied(judged[one.pk], bottle, holding)
        if supply is not None and supply.station_id not in places:
            why = f"{supply.station} has no scale: nothing is filled there."
        if why or bottle.capacity_ml is None or holding.grams is None:
            not_counted.append(_not_counted(bottle, why, by_gauge.get(one.pk)))
            continue
        walls = walls_by(bottle, one.tare).heat_j_k
        inverted = supply is not None and supply.inverted
        try:
            vessel = Vessel(
                bottle.capacity_ml / 1e6, sum(walls) / len(walls), holding.grams / 1000, temperature_k,
                liquid_pickup=takes_liquid(bottle, inverted=inverted) is not False,
                below_tube_m3=below_tube_m3(bottle, inverted=inverted),
            )  # fmt: skip
        except PhysicsError as error:
            not_counted.append(_not_counted(bottle, error.sentence))
            continue
        found.append(
            Source(
                bottle.code, vessel.volume_m3, vessel.wall_j_k, vessel.net_kg, vessel.temperature_k,
                None if supply is None else places[supply.station_id], vessel.liquid_pickup, vessel.below_tube_m3,
                line if supply is None else line_volume_m3(supply.station), holding.error_g / 1000,
            )
        )  # fmt: skip
    return found, not_counted


def _supplies(connected: Sequence[int]) -> QuerySet[Standing]:
    """Standings of supply bottles that are in the shop, those on a station first."""
    rows = Standing.objects.filter(bottle__retired_at__isnull=True)
    rows = rows.filter(pk__in=connected) | rows.filter(is_in=True, bottle__use="supply")
    return (
        rows.select_related("bottle", "ownership", "weighing", "tare", "custody__place")
        .prefetch_related("tare__parts")
        .order_by("bottle__code")
    )


def _not_counted(bottle: Bottle, why: str, by_gauge: ByGauge | None = None) -> dict[str, Any]:
    """A supply bottle that isn't counted on, why, and what it holds at least where only a gauge tells."""
    return {
        "code": bottle.code, "why": why, "least_g": by_gauge.least_g if by_gauge else None,
        "read_at": by_gauge.read_at.isoformat() if by_gauge else None,
    }  # fmt: skip


def _why_not_emptied(judgement: Judgement, bottle: Bottle, holding: Holding) -> str:
    if judgement.may_be_emptied != "yes":
        why = [reason for reason in judgement.reasons if "emptying" in reason.about and reason.severity != "explains"]
        return f"{why[0].sentence} {why[0].next_step}".strip() if why else "It may not be emptied into another bottle."
    if holding.grams is None:
        return "Nobody weighed it: what it holds isn't known. Weigh it, then it's counted on."
    if bottle.capacity_ml is None:
        return "Its water capacity isn't written down. Complete its record."
    return ""
