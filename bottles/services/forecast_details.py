"""What is worked out beside a forecast: a pump's, what would help, the course, other starts, the fills left."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import ceil

from bottles.models import Station
from bottles.physics.chilling import Chilling, time_to_reach
from bottles.physics.course import Course
from bottles.physics.fills_left import FillsLeft, fills_left
from bottles.physics.heating import room_loss
from bottles.physics.hose import effective_area
from bottles.physics.likely_course import likely_course
from bottles.physics.pumped import PumpedRefill, PumpPlate, pumped_refill
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, Start
from bottles.physics.remedies import CHILL, EVERY, LIKELY, QUICK, Remedies, remedies
from bottles.physics.transfer import Transfer
from bottles.physics.transient import Setting, transient
from bottles.physics.transient_zones import Around
from bottles.selectors.cold_places import ColdPlace, cold_places
from bottles.services.forecasting import Answer, Asked, Pair, Readings, work_out
from shop.physics.errors import PhysicsError
from shop.physics.fluid import T_SATURATION_MAX, engine

PUMPED = "pumped"
STARTS = (VENTED, OWN_VAPOUR, AIR)
WATCHED_S = 30 * 60.0  # how long somebody stands beside joined bottles (common practice, no source)


@dataclass(frozen=True, slots=True)
class StartWorth:
    """How a refill would end from one start: what goes over, what the bottle holds then."""

    kind: str
    begins_g: int
    likely_g: int
    holds_g: int


@dataclass(frozen=True, slots=True)
class Helps:
    """What would help a short fill, and how long chilling for it takes, place by place."""

    found: Remedies
    places: tuple[ColdPlace, ...]
    chill_k: float | None  # to where the times are reckoned; None: no chilling fills it
    times: tuple[tuple[str, Chilling], ...]


@dataclass(frozen=True, slots=True)
class OverTime:
    """A refill's likely course, and the same left joined while heat comes in from the room."""

    likely: Course
    left_joined: Course


def forecast_by(asked: Asked, readings: Readings, method: str) -> Answer:
    """Work out the forecast by the method of the refill: a pump has stops of its own."""
    answer = work_out(asked, readings)
    return _with_pump(asked, answer) if method == PUMPED else answer


def would_help(pair: Pair) -> Helps:
    """Work out what would give a full fill, with the shop's own freezers and baths."""
    places = tuple(cold_places())
    found = remedies(
        source=pair.source, receiver_volume_m3=pair.receiver_volume_m3, receiver_wall_j_k=pair.receiver_wall_j_k,
        receiver_temperature_k=pair.receiver_temperature_k, limit_kg=pair.limit_kg, start=pair.start,
        source_range_kg=pair.source_range_kg, line_volume_m3=pair.line_volume_m3, condensation=pair.condensation,
        coldest_k=min(place.coldest_k for place in places),
    )  # fmt: skip
    chilled = {each.case: each.temperature_k for each in found.remedies if each.kind == CHILL and each.fills}
    to = next((chilled[case] for case in (LIKELY, EVERY, QUICK) if case in chilled), None)
    return Helps(found, places, to, _times(pair, to, places) if to is not None else ())


def course_over_time(pair: Pair, station: Station) -> OverTime | None:
    """Follow the refill over time; None where the supply's weight isn't known or it can't be followed.

    Left joined, both bottles stand in a room as warm as the supply bottle. What hose and valves,
    walls and the vapour let through is an estimate (common practice, no source).
    """
    if pair.source_range_kg is not None:
        return None
    transfer = Transfer(pair.source, pair.receiver, pair.line_volume_m3)
    line = effective_area(station.hose_length_um / 1e6, station.hose_bore_um / 1e6)
    room = pair.source.temperature_k
    around = [Around(room, room_loss(volume)) for volume in (pair.source.volume_m3, pair.receiver_volume_m3)]
    setting = Setting(cd_area_m2=line, source_around=around[0], receiver_around=around[1], within_s=WATCHED_S)
    try:
        likely = likely_course(transfer, pair.limit_kg, pair.condensation.figure, line)
        return OverTime(likely, transient(transfer, pair.limit_kg, setting))
    except PhysicsError:
        return None


def fills_ahead(pair: Pair) -> FillsLeft | None:
    """Count the full fills like this one; None where the supply's weight isn't known."""
    if pair.source_range_kg is not None:
        return None
    try:
        return fills_left(
            pair.source, pair.receiver, pair.limit_kg, line_volume_m3=pair.line_volume_m3, condensation=pair.condensation
        )
    except PhysicsError:
        return None


def below_tube_g(pair: Pair) -> int:
    """Return the liquid that the dip tube's end doesn't reach."""
    source = pair.source
    if not source.liquid_pickup or source.temperature_k > T_SATURATION_MAX:
        return 0
    return round(source.below_tube_m3 * engine().saturation(source.temperature_k)[1] * 1000)


def starts_compared(pair: Pair) -> list[StartWorth]:
    """Work the refill out for the start as it is, then for each other one; a start that can't be is left out."""
    found = [_worth(pair, pair.start)]
    found += [_worth(pair, Start(kind, None, pair.start.ambient_pa)) for kind in STARTS if kind != pair.start.kind]
    return [one for one in found if one is not None]


def _worth(pair: Pair, start: Start) -> StartWorth | None:
    try:
        answer = replace(pair, start=start).worked_out()
    except PhysicsError:
        return None
    if answer.likely_kg is None:
        return None
    begins = pair.limit_kg - answer.room_kg
    return StartWorth(
        start.kind, round(begins * 1000), round(answer.likely_kg * 1000), round((begins + answer.likely_kg) * 1000)
    )


def _times(pair: Pair, to_k: float, places: Sequence[ColdPlace]) -> tuple[tuple[str, Chilling], ...]:
    bottle, found = pair.receiver, []
    for place in places:
        if place.surroundings is None:
            continue
        try:
            found.append((place.name, time_to_reach(bottle, to_k, place.surroundings)))
        except PhysicsError:
            continue
    return tuple(found)


def _with_pump(asked: Asked, answer: Answer) -> Answer:
    """The same with what a pump moves, between the least and the most that the supply may hold."""
    pair, station = answer.pair, asked.supply.station
    plate = PumpPlate(station.pump_most_pa, station.pump_least_pa)
    receiver = pair.receiver

    def run(net_kg: float) -> PumpedRefill:
        source = replace(pair.source, net_kg=max(net_kg, 0.0))
        return pumped_refill(source, receiver, pair.limit_kg, plate=plate, line_volume_m3=pair.line_volume_m3)

    net, unsure = pair.source.net_kg, pair.tolerances.scale_kg
    ends = [run(each) for each in pair.source_range_kg or (net - unsure, net + unsure)]
    main = run(net)
    known = pair.source_range_kg is None
    return replace(
        answer, pumped=main, low_g=int(min(one.low_kg for one in ends) * 1000),
        likely_g=round(main.quick.moved_kg * 1000) if known else None,
        high_g=ceil(max(one.high_kg for one in ends) * 1000 - 1e-6),
        source_left_g=max(0, round(main.quick.source_left_kg * 1000)) if known else None,
    )  # fmt: skip
