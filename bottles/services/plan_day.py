"""A day as it stands in the register: what waits to be filled, from what, where it's chilled.

A fixed number of queries, however many bottles. What may not be filled, or can't be counted on, is
listed with its reason. Nothing is written.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, datetime, time
from typing import Any

from django.db.models import Max

from bottles.models import Station
from bottles.rules.planning.problem import Day
from bottles.selectors.judging import Rulebook, rulebook
from bottles.selectors.learning import latest_figures
from bottles.selectors.planning import Cold, places_written_down
from bottles.services.plan_order import order_told
from bottles.services.plan_supplies import supplies_on_hand
from bottles.services.plan_waiting import ToFill
from shop.base import clock
from shop.base.models import Act, Shop

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
            "order": order_told(self.day, shop, int(inputs["lead_days"])),
        }  # fmt: skip


def gather(shop: Shop, inputs: Mapping[str, Any]) -> Gathered:
    """Gather a day by what it's planned with."""
    now, book = clock.now().replace(microsecond=0), rulebook(shop)
    room_k = inputs["room_mk"] / 1000
    colds = _colds(inputs)
    stations = list(Station.objects.filter(active=True, scale__isnull=False).order_by("name"))
    known = ToFill(shop, book, now, room_k, colds, latest_figures(shop))
    sources, not_counted = supplies_on_hand(book, stations, inputs["supply_mk"] / 1000)
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
