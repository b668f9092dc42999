"""What waits to be filled today, as a plan takes it; what may not be, with its reason.

A fixed number of queries, however many bottles. Nothing is written.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import datetime, timedelta
from typing import Any

from bottles.models import Refill, Standing, Station
from bottles.physics.receiver_start import VENTED, start_vessel
from bottles.physics.receiver_start import Start as Beginning
from bottles.physics.vessel import Vessel
from bottles.rules.fitness import Judgement
from bottles.rules.planning.problem import Waiting
from bottles.selectors import counter
from bottles.selectors.contents import Holding, holdings
from bottles.selectors.filling_facts import air_pressure, walls_by
from bottles.selectors.judging import Rulebook
from bottles.selectors.learning import Figures
from bottles.selectors.planning import Cold, starts_of, temperature_now
from shop.base import clock
from shop.base.models import Shop

# What is done at the scale and with the filler's look, and stands in the way of no plan.
DONE_BEFORE_FILLING = frozenset(
    {"look-owed", "star-check-owed", "pressure-kept-not-given", "dry-and-purge", "net-not-given"}
)
IN_REFILL = "in-open-refill"
FULL = frozenset({"at-its-limit", "within-plus-minus"})


class ToFill:
    """The bottles to fill and the refills that are open, each read once."""

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


def wants_filling(wanted: str) -> bool:
    """Whether what a bottle waits for is to be filled, by the word with which it begins."""
    return wanted.strip().lower().startswith(("refill", "fill"))


def _with_tares(standings: Sequence[Standing]) -> dict[int, Standing]:
    rows = Standing.objects.filter(pk__in=[one.pk for one in standings])
    return {one.pk: one for one in rows.select_related("bottle", "tare", "custody").prefetch_related("tare__parts")}


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
