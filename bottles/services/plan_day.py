"""A day as it stands in the register: what waits to be filled, from what, where it's chilled.

A fixed number of queries, however many bottles. What may not be filled, or can't be counted on, is
listed with its reason. Nothing is written.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime, time, timedelta
from typing import Any

from django.db.models import Max, QuerySet

from bottles.models import Bottle, Refill, Standing, Station, Supply
from bottles.physics.receiver_start import VENTED, start_vessel
from bottles.physics.receiver_start import Start as Beginning
from bottles.physics.vessel import Vessel
from bottles.rules.fitness import Judgement
from bottles.rules.planning.ordering import order_by, pace_of
from bottles.rules.planning.problem import Day, Source, Waiting
from bottles.rules.planning.schedule import Rehearsal
from bottles.selectors import counter
from bottles.selectors.contents import Holding, holdings
from bottles.selectors.filling_facts import air_pressure, below_tube_m3, takes_liquid, walls_by
from bottles.selectors.judging import Rulebook, rulebook
from bottles.selectors.learning import Figures, latest_figures
from bottles.selectors.planning import Cold, places_written_down, starts_of, temperature_now, use_by_day
from bottles.services.stations import line_volume_m3
from shop.base import clock
from shop.base.models import Act, Shop
from shop.physics.errors import PhysicsError

# What is done at the scale and with the filler's look, and stands in the way of no plan.
DONE_BEFORE_FILLING = frozenset(
    {"look-owed", "star-check-owed", "pressure-kept-not-given", "dry-and-purge", "net-not-given"}
)
IN_REFILL = "in-open-refill"
FULL = frozenset({"at-its-limit", "within-plus-minus"})
GOOD_PER_MILLE = 950  # where the shop set none (common practice, no source)


@dataclass(frozen=True, slots=True)
class Gathered:
    """A day to plan, and what is said beside it."""

    day: Day
    now: datetime
    stations: tuple[str, ...]
    colds: tuple[Cold, ...]
    not_weighed: tuple[str, ...]  # taken as vented
    left_out: tuple[dict[str, Any], ...]  # bottles that wait for a fill and may not have it
    not_counted: tuple[dict[str, Any], ...]  # supply bottles
    pumped: tuple[str, ...]  # stations, planned as by pressure
    is_prior: bool  # whether no refill of the shop's own stands behind the figures
    after_act: int
    rooms_taken: tuple[int, ...]  # in each freezer or bath, by what the plan doesn't fill
    being_filled: tuple[tuple[str, str], ...]  # bottle and station

    def beside(self, shop: Shop, inputs: Mapping[str, Any]) -> dict[str, Any]:
        """Everything but the plan itself, ready to be kept."""
        return {
            "zero": self.now.isoformat(), "stations": list(self.stations), "not_weighed": list(self.not_weighed),
            "colds": [
                {"name": cold.name, "mk": round(cold.coldest_k * 1000), "takes": cold.takes, "taken": others}
                for cold, others in zip(self.colds, self.rooms_taken, strict=True)
            ],
            "left_out": list(self.left_out), "not_counted": list(self.not_counted), "pumped": list(self.pumped),
            "being_filled": [{"bottle": bottle, "station": station} for bottle, station in self.being_filled],
            "is_prior": self.is_prior, "closes_s": self.day.closes_s, "room_mk": round(self.day.room_k * 1000),
            "order": _order(self.day, shop, int(inputs["lead_days"])),
        }  # fmt: skip


def gather(shop: Shop, inputs: Mapping[str, Any]) -> Gathered:
    """Gather a day by what it's planned with; see `bottles.services.planning.Settings`."""
    now, book = clock.now().replace(microsecond=0), rulebook(shop)
    room_k = inputs["room_mk"] / 1000
    colds = _colds(inputs)
    stations = list(Station.objects.filter(active=True, scale__isnull=False).order_by("name"))
    known = _Register(shop, book, now, room_k, colds, latest_figures(shop))
    sources, not_counted = known.sources(stations, inputs["supply_mk"] / 1000)
    bottles, left_out, not_weighed = known.waiting({source.code for source in sources}, stations)
    taken = known.rooms_taken({bottle.code for bottle in bottles})
    stood = [sum(bottle.stands_in == number for bottle in bottles) for number in range(len(colds))]
    opens, closes = (_seconds_to(inputs[name], book.on, shop, now) for name in ("opens", "closes"))
    day = Day(
        tuple(bottles), tuple(sources), known.stations_free(stations, inputs), max(closes, 0), opens_s=max(opens, 0),
        people=inputs["people"], fill_s=inputs["fill_minutes"] * 60, change_s=inputs["change_minutes"] * 60,
        # Where more stand than it should take, it does take them.
        slots=tuple(max(cold.takes - others, inside) for cold, others, inside in zip(colds, taken, stood, strict=True)),
        good_per_mille=_good_enough(book), room_k=room_k,
    )  # fmt: skip
    latest = Act.objects.aggregate(latest=Max("pk"))["latest"] or 0
    return Gathered(
        day, now, tuple(station.name for station in stations), tuple(colds), tuple(not_weighed), tuple(left_out),
        tuple(not_counted), tuple(station.name for station in stations if station.pumped), known.is_prior, latest, taken,
        tuple((refill.bottle.code, refill.station.name) for refill in known.open),
    )  # fmt: skip


class _Register:
    """What is read of bottles and supply bottles, each once."""

    def __init__(self, shop: Shop, book: Rulebook, now: datetime, room_k: float, colds: list[Cold], figures: Figures) -> None:
        self.shop, self.book, self.now, self.room_k, self.colds, self.figures = shop, book, now, room_k, colds, figures
        self.is_prior = False
        opened = list(Refill.objects.filter(closed_at__isnull=True).select_related("bottle", "station"))
        # One that waits, to be chilled, holds no hose and goes on in the plan.
        self._waits = {refill.bottle_id: refill for refill in opened if refill.wait_until is not None}
        self.open = [refill for refill in opened if refill.wait_until is None]

    def stations_free(self, stations: Sequence[Station], inputs: Mapping[str, Any]) -> tuple[int, ...]:
        """When each hose is free: a refill that goes on holds it as long as a fill takes."""
        fill = timedelta(minutes=inputs["fill_minutes"])
        busy: dict[int, int] = {}
        for refill in self.open:
            until = max(int((refill.opened_at + fill - self.now).total_seconds()), 0)
            busy[refill.station_id] = max(busy.get(refill.station_id, 0), until)
        return tuple(busy.get(station.pk, 0) for station in stations)

    def waiting(
        self, supplies: set[str], stations: Sequence[Station]
    ) -> tuple[list[Waiting], list[dict[str, Any]], list[str]]:  # fmt: skip
        """Bottles to fill; those that wait for it and may not have it; those not weighed since they came."""
        filling = {refill.bottle_id for refill in self.open}
        hoses = {station.pk: number for number, station in enumerate(stations)}
        standings = [
            one for one in counter.waiting()
            if wants_filling(one.wanted or "") and one.pk not in filling and one.bottle.code not in supplies  # type: ignore[attr-defined]
        ]  # fmt: skip
        full = _with_tares(standings)
        judged = self.book.judge_all([one.bottle for one in standings], {one.pk: one for one in standings})
        held = holdings([one.bottle for one in standings], standings)
        found, left_out, not_weighed = [], [], []
        for one in standings:
            judgement, holding = judged[one.pk], held[one.pk]
            paused = self._waits.get(one.pk)
            if _is_done(one, judgement, goes_on=paused is not None):
                continue
            why = _why_not(judgement, goes_on=paused is not None)
            if why is not None:
                left_out.append({"bottle": one.bottle.code, **why})
                continue
            unweighed = "net" in judgement.not_judged or not holding.known
            bottle = self._bottle(full.get(one.pk, one), judgement, None if unweighed else holding)
            if bottle is None:
                continue
            found.append(bottle if paused is None else replace(bottle, hose=hoses.get(paused.station_id)))
            if unweighed:
                not_weighed.append(one.bottle.code)
        return found, left_out, not_weighed

    def _bottle(self, standing: Standing, judgement: Judgement, holding: Holding | None) -> Waiting | None:
        bottle, limit = standing.bottle, judgement.limit.grams or 0
        walls = walls_by(bottle, standing.tare).heat_j_k
        wall = sum(walls) / len(walls)
        volume = (bottle.capacity_ml or 0) / 1e6
        if holding is None or not holding.grams:
            vessel = start_vessel(
                volume_m3=volume, wall_j_k=wall, temperature_k=self.room_k, start=Beginning(VENTED, None, air_pressure(self.shop))
            )
        else:
            vessel = Vessel(volume, wall, holding.grams / 1000, self.room_k)
        if vessel.net_kg >= limit / 1000:
            return None
        now_k = temperature_now(vessel, standing.custody, self.colds, self.now)
        vessel = Vessel(volume, wall, vessel.net_kg, now_k)
        figure = self.figures.of(bottle).condensation
        unsure = vessel.net_kg if holding is None else holding.error_g / 1000
        self.is_prior = self.is_prior or figure.is_prior
        custody = standing.custody
        return Waiting(
            bottle.code, volume, wall, vessel.net_kg, limit / 1000, starts_of(vessel, self.colds),
            self._promised(custody.promised_at if custody else None), figure.figure, figure.deviation, unsure,
            next((number for number, cold in enumerate(self.colds) if custody and cold.holds(custody.place_id)), None),
        )  # fmt: skip

    def rooms_taken(self, planned: set[str]) -> tuple[int, ...]:
        """How many rooms of each freezer or bath are taken by bottles that the plan doesn't fill."""
        filling = [refill.bottle_id for refill in self.open]
        rows = Standing.objects.filter(is_in=True, custody__place__in=[cold.place_id for cold in self.colds if cold.place_id])
        places = list(rows.exclude(pk__in=filling).exclude(bottle__code__in=planned).values_list("custody__place", flat=True))
        return tuple(sum(cold.holds(place) for place in places) for cold in self.colds)

    def _promised(self, promised_at: datetime | None) -> int | None:
        """Seconds to a promise of today or before; one for another day presses nobody yet."""
        if promised_at is None or clock.day_of(promised_at, self.shop) > self.book.on:
            return None
        return int((promised_at - self.now).total_seconds())

    def sources(self, stations: Sequence[Station], temperature_k: float) -> tuple[list[Source], list[dict[str, Any]]]:
        """Supply bottles on the stations and in store; those that can't be counted on."""
        places = {station.pk: number for number, station in enumerate(stations)}
        hanging = {one.bottle_id: one for one in Supply.objects.filter(station__active=True).select_related("station")}
        standings = list(_supplies(list(hanging)))
        bottles = [one.bottle for one in standings]
        judged = self.book.judge_all(bottles, {one.pk: one for one in standings})
        held = holdings(bottles, standings)
        line = max((line_volume_m3(station) for station in stations), default=0.0)
        found, not_counted = [], []
        for one in standings:
            supply = hanging.get(one.pk)
            bottle, holding = one.bottle, held[one.pk]
            why = _why_not_emptied(judged[one.pk], bottle, holding)
            if supply is not None and supply.station_id not in places:
                why = f"{supply.station} has no scale: nothing is filled there."
            if why or bottle.capacity_ml is None or holding.grams is None:
                not_counted.append({"code": bottle.code, "why": why})
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
                not_counted.append({"code": bottle.code, "why": error.sentence})
                continue
            found.append(
                Source(
                    bottle.code, vessel.volume_m3, vessel.wall_j_k, vessel.net_kg, vessel.temperature_k,
                    None if supply is None else places[supply.station_id], vessel.liquid_pickup, vessel.below_tube_m3,
                    line if supply is None else line_volume_m3(supply.station),
                )
            )  # fmt: skip
        return found, not_counted


def wants_filling(wanted: str) -> bool:
    """Whether what a bottle waits for is to be filled, by the word with which it begins."""
    return wanted.strip().lower().startswith(("refill", "fill"))


def _with_tares(standings: Sequence[Standing]) -> dict[int, Standing]:
    rows = Standing.objects.filter(pk__in=[one.pk for one in standings])
    return {one.pk: one for one in rows.select_related("bottle", "tare", "custody").prefetch_related("tare__parts")}


def _supplies(connected: Sequence[int]) -> QuerySet[Standing]:
    """Standings of supply bottles that are in the shop, those on a station first."""
    rows = Standing.objects.filter(bottle__retired_at__isnull=True)
    rows = rows.filter(pk__in=connected) | rows.filter(is_in=True, bottle__use="supply")
    return (
        rows.select_related("bottle", "ownership", "weighing", "tare", "custody__place")
        .prefetch_related("tare__parts")
        .order_by("bottle__code")
    )


def _is_done(standing: Any, judgement: Judgement, *, goes_on: bool) -> bool:
    """Whether its refill is closed already, or it holds its limit: it waits for its owner."""
    weighed_now = standing.weighing is not None and "net" not in judgement.not_judged
    if weighed_now and not goes_on and standing.weighing.step == "disconnected":
        return True
    return any(reason.code in FULL for reason in judgement.reasons if "filling" in reason.about)


def _why_not(judgement: Judgement, *, goes_on: bool) -> dict[str, Any] | None:
    """The first reason that stands in the way of a fill; None where nothing does but what is done before any.

    A refill that is open and waits is no reason: it goes on.
    """
    passed = DONE_BEFORE_FILLING | ({IN_REFILL} if goes_on else set())
    stops = ("refuses", "unknown", "first")
    against = [
        reason for reason in judgement.reasons
        if "filling" in reason.about and reason.severity in stops and reason.code not in passed
    ]  # fmt: skip
    able = judgement.may_be_filled in ("yes", "only after") or (goes_on and judgement.may_be_filled == "no")
    if judgement.limit.grams and able and not against:
        return None
    kind = {"no": "no", "unknown": "unknown"}.get(judgement.may_be_filled, "after")
    if not against:
        return {"kind": "unknown", "sentence": "Its fill limit isn't known.", "next_step": "Complete its record."}
    return {"kind": kind, "sentence": against[0].sentence, "next_step": against[0].next_step}


def _why_not_emptied(judgement: Judgement, bottle: Bottle, holding: Holding) -> str:
    if judgement.may_be_emptied != "yes":
        why = [reason for reason in judgement.reasons if "emptying" in reason.about and reason.severity != "explains"]
        return f"{why[0].sentence} {why[0].next_step}".strip() if why else "It may not be emptied into another bottle."
    if holding.grams is None:
        return "Nobody weighed it: what it holds isn't known. Weigh it."
    if bottle.capacity_ml is None:
        return "Its water capacity isn't written down. Complete its record."
    return ""


def _colds(inputs: Mapping[str, Any]) -> list[Cold]:
    found = places_written_down()
    if not found and inputs.get("freezer_mk") and inputs.get("freezer_takes"):
        found = [Cold("the freezer", "freezer", inputs["freezer_mk"] / 1000, inputs["freezer_takes"])]
    return found


def _seconds_to(at: str, today: date, shop: Shop, now: datetime) -> int:
    return int((datetime.combine(today, time.fromisoformat(at), tzinfo=clock.zone(shop)) - now).total_seconds())


def _good_enough(book: Rulebook) -> int:
    values: dict[str, Any] = book.row.values if book.row else {}
    return int(values.get("good_enough_per_mille") or GOOD_PER_MILLE)


def _order(day: Day, shop: Shop, lead_days: int) -> dict[str, Any]:
    """Until when the stock lasts at the pace of recent weeks, and the last day to order."""
    heels = Rehearsal(day).heel_kg
    usable = round(sum(max(0.0, one.net_kg - heel) for one, heel in zip(day.sources, heels, strict=True)) * 1000)
    today = clock.today(shop)
    used, weekdays = use_by_day(shop, today)
    pace = pace_of(used)
    found = order_by(usable, pace, today=today, weekdays=weekdays, lead_days=lead_days)
    return {
        "usable_g": usable, "lead_days": lead_days,
        "pace": {"grams": pace.grams, "error_g": pace.error_g, "days": pace.days} if pace else None,
        "lasts_until": found.lasts_until.isoformat() if found else None,
        "soonest": found.soonest.isoformat() if found else None,
        "latest": found.latest.isoformat() if found and found.latest else None,
        "order_by": found.order_by.isoformat() if found else None,
    }  # fmt: skip
