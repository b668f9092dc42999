"""The whole forecast of a refill: limits, band, and what would help."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import floor, sqrt

from bottles.physics.condensation import PRIOR, Condensation, band, between
from bottles.physics.contents import NEAR_CRITICAL, SCALE_TOLERANCE, THERMOMETER_TOLERANCE
from bottles.physics.forecast_words import SENTENCES
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, Start, start_vessel
from bottles.physics.transfer import (
    PHYSICS_VERSION,
    Outcome,
    Transfer,
    held,
    line_loss,
    mixed,
    wall_condensing,
)
from bottles.physics.vessel import COLDEST, HOTTEST, Vessel
from shop.physics.errors import OutOfRange
from shop.physics.fluid import T_SATURATION_MAX, engine
from shop.physics.roots import find_root

_EVEN = 100.0  # Pa, a thousandth of a bar: some hundredths of a gram, a hundredth of a kelvin


@dataclass(frozen=True, slots=True)
class Tolerances:
    """How well a shop reads; each is taken as the edge of 19 readings in 20."""

    thermometer_k: float = THERMOMETER_TOLERANCE
    scale_kg: float = SCALE_TOLERANCE


@dataclass(frozen=True, slots=True)
class Forecast:
    """What will go over, between which ends, and why."""

    mixed: Outcome | None
    wall_condensing: Outcome | None
    held: Outcome | None
    low_kg: float
    likely_kg: float | None
    high_kg: float
    room_kg: float
    reaches_limit: str
    line_loss_kg: float
    source_left_kg: float | None
    warmest_receiver_k: float | None
    least_source_kg: float | None
    full_fills: int | None
    width: tuple[tuple[str, float], ...]
    condensation: Condensation
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        limits = {"mixed": self.mixed, "wall_condensing": self.wall_condensing, "held": self.held}
        warmest = self.warmest_receiver_k
        return {
            **{name: limit.as_dict() if limit else None for name, limit in limits.items()},
            "low_kg": self.low_kg,
            "likely_kg": self.likely_kg,
            "high_kg": self.high_kg,
            "room_kg": self.room_kg,
            "reaches_limit": self.reaches_limit,
            "line_loss_kg": self.line_loss_kg,
            "source_left_kg": self.source_left_kg,
            "warmest_receiver_c": None if warmest is None else warmest - 273.15,
            "least_source_kg": self.least_source_kg,
            "full_fills": self.full_fills,
            "width": [{"from": name, "kg": kilograms} for name, kilograms in self.width],
            "condensation": self.condensation.figure,
            "condensation_origin": self.condensation.origin,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
            "physics_version": PHYSICS_VERSION,
        }


@dataclass(frozen=True, slots=True)
class _Band:
    """Masses of one pair of bottles, capped by the room in the receiver."""

    low: float
    likely: float
    high: float
    width: tuple[tuple[str, float], ...]


def forecast(
    *,
    source: Vessel,
    receiver_volume_m3: float,
    receiver_wall_j_k: float,
    receiver_temperature_k: float,
    limit_kg: float,
    start: Start | None = None,
    source_range_kg: tuple[float, float] | None = None,
    line_volume_m3: float = 0.0,
    condensation: Condensation = PRIOR,
    tolerances: Tolerances | None = None,
) -> Forecast:
    """Forecast a refill before a valve is opened.

    Parameters
    ----------
    source : Vessel, the supply bottle; its net counts unless a range is given [-]
    receiver_volume_m3 : float, water capacity of the bottle to fill [m3]
    receiver_wall_j_k : float, heat capacity of its wall [J/K]
    receiver_temperature_k : float, its temperature [K]
    limit_kg : float, its fill limit [kg]
    start : Start or None, how it starts; vented without [-]
    source_range_kg : tuple of float or None, least and most in the supply bottle, where only
        a reading is known [kg]
    line_volume_m3 : float, inside volume of hose and fittings [m3]
    condensation : Condensation, the figure with its deviation [-]
    tolerances : Tolerances or None, of thermometer and scale [-]

    Returns
    -------
    Forecast, masses [kg], temperatures [K], the limits and warnings [-]

    Assumptions
    -----------
    Two bottles, each a volume with a wall, as the limits say. The band joins, by the root of
    the sum of squares, the condensation figure's two deviations and the tolerances of each
    reading; what a reading is worth is taken from the mixed limit. `warmest_receiver_k` and
    `least_source_kg` belong to the mixed limit; the warmest start is looked for between -40
    and 52 °C. The supply is warmed to its temperature again between full fills.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `limit`, `line`, `source_range`, `start`, or a bottle out of range.
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model on Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    begins, tolerances = start or Start(), tolerances or Tolerances()
    _check(limit_kg, line_volume_m3, source_range_kg)

    def receiver_at(temperature_k: float) -> Vessel:
        return start_vessel(
            volume_m3=receiver_volume_m3,
            wall_j_k=receiver_wall_j_k,
            temperature_k=temperature_k,
            start=begins,
        )

    receiver = receiver_at(receiver_temperature_k)
    unsure = _unsure_start(begins, receiver, tolerances)
    if begins.kind != VENTED and begins.net_kg is None:
        # Chilled before filling, a bottle keeps what it holds; only venting follows it down.
        begins = replace(begins, net_kg=receiver.net_kg)
    room = max(limit_kg - receiver.net_kg, 0.0)
    codes = _standing_codes(source, receiver, begins, room, condensation)
    ends = source_range_kg or (source.net_kg, source.net_kg)
    transfers = [Transfer(replace(source, net_kg=net), receiver, line_volume_m3) for net in dict.fromkeys(ends)]
    bands = [_band(each, room, condensation, tolerances, unsure) for each in transfers]
    least = _least_source(transfers[-1], limit_kg, line_volume_m3)
    if source_range_kg is not None:
        low = min(each.low for each in bands)
        high = max(each.high for each in bands)
        codes.append("source_unknown")
        if high <= 0.0 and room > 0.0:
            codes.append("no_flow")
        likely = [each.likely for each in bands]
        width = (("source weight", max(likely) - min(likely)),)
        return Forecast(
            None, None, None, low, None, high, room, _reaches(room, low, None, high),
            transfers[-1].line_kg, None, None, least, None, width, condensation, _told(codes),
        )  # fmt: skip
    transfer, answer = transfers[0], bands[0]
    limits = (
        mixed(transfer, limit_kg),
        wall_condensing(transfer, limit_kg),
        held(transfer, limit_kg),
    )
    if room > 0.0 and transfer.surplus(0.0) <= 0.0:
        codes.append("no_flow")
    if limits[0].liquid_out and transfer.path.after(0.0).liquid:
        codes.append("liquid_runs_out")
    if room > 0.0 and "fill limit" in (limits[0].stopped_by, limits[2].stopped_by):
        codes.append("can_pass_limit")
    if not transfer.path.after(0.0).liquid:
        codes.append("no_source_liquid")
    line = transfer.line_kg
    fills = None
    if least is not None and room > 0.0:
        spare = source.net_kg - least
        fills = floor(spare / (room + line) + 1e-9) + 1 if spare >= -1e-9 else 0
    elif room > 0.0:
        fills = 0
    left = source.net_kg - answer.likely - (line if answer.likely > 0.0 else 0.0)
    return Forecast(
        *limits, answer.low, answer.likely, answer.high, room,
        _reaches(room, answer.low, answer.likely, answer.high), line, left,
        _warmest(transfer, receiver_at, limit_kg, line_volume_m3), least, fills, answer.width, condensation,
        _told(codes),
    )  # fmt: skip


def _check(limit_kg: float, line_volume_m3: float, source_range_kg: tuple[float, float] | None) -> None:
    """Refuse what no refill can be."""
    if not 0.0 < limit_kg < 1e6:
        raise OutOfRange("limit", "A fill limit is above nothing. Check it and its unit.")
    if not 0.0 <= line_volume_m3 < 1.0:
        raise OutOfRange("line", "A line's volume can't be below nothing. Check it and its unit.")
    if source_range_kg and not 0.0 <= source_range_kg[0] <= source_range_kg[1]:
        raise OutOfRange("source_range", "The least in the supply bottle is above the most. Check the reading.")


def _standing_codes(
    source: Vessel, receiver: Vessel, start: Start, room: float, condensation: Condensation
) -> list[str]:
    """Warnings that hold whatever goes over."""
    codes = []
    if room <= 0.0:
        codes.append("receiver_full")
    if start.kind == AIR:
        codes.append("air")
    if max(source.temperature_k, receiver.temperature_k) >= NEAR_CRITICAL:
        codes.append("near_critical")
    if condensation.is_prior:
        codes.append("condensation_prior")
    return codes


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)


def _reaches(room: float, low: float, likely: float | None, high: float) -> str:
    """Word for whether the fill limit is reached."""
    nearly = room * (1.0 - 1e-9)
    if room > 0.0 and high >= nearly:
        if low >= nearly:
            return "in every case"
        if likely is not None and likely >= nearly:
            return "likely"
        return "at best"
    return "no" if room > 0.0 else "already"


def _unsure_start(start: Start, receiver: Vessel, tolerances: Tolerances) -> tuple[str, float]:
    """Reading or assumption behind the receiver's start, and its tolerance in mass."""
    if start.kind == VENTED:
        return "receiver start", receiver.net_kg  # an atmosphere more (common practice)
    if start.kind == OWN_VAPOUR and start.net_kg is None:
        return "receiver start", 0.25 * receiver.net_kg  # (common practice)
    return "receiver weight", tolerances.scale_kg


def _band(
    transfer: Transfer,
    room: float,
    condensation: Condensation,
    tolerances: Tolerances,
    unsure: tuple[str, float],
) -> _Band:
    """Low, likely and high of one pair of bottles, and what makes the width."""
    quick = transfer.mixed_free_kg()
    if quick <= 0.0 or room <= 0.0:
        return _Band(0.0, 0.0, 0.0, ())
    parts = _reading_parts(transfer, min(quick, room), tolerances, unsure)
    if transfer.path.after(0.0).liquid:
        slow = transfer.slow_free_kg()
        likely = between(slow, quick, condensation.figure)
        below, above = band(slow, quick, condensation)
    else:
        # Without liquid nothing enters under the vapour: between quick and kept at temperature.
        slow = held(transfer, transfer.receiver.net_kg + room).moved_kg
        likely = quick
        below, above = max(quick - slow, 0.0), max(slow - quick, 0.0)
    readings = sum(part * part for _, part in parts)
    low = likely - sqrt(below * below + readings)
    high = likely + sqrt(above * above + readings)
    width = sorted([("condensation", max(below, above)), *parts], key=lambda part: part[1], reverse=True)
    low, likely, high = (min(max(mass, 0.0), room) for mass in (low, likely, high))
    # Where every case is full there is no width to explain.
    return _Band(low, likely, high, tuple(width) if high > low else ())


def _reading_parts(
    transfer: Transfer, moved: float, tolerances: Tolerances, unsure: tuple[str, float]
) -> list[tuple[str, float]]:
    """What each reading's tolerance is worth in mass, by the mixed limit's own slope."""
    source, receiver = transfer.source, transfer.receiver
    there = transfer.surplus(moved)
    step = 1e-3 * moved
    slope = (transfer.surplus(moved - step) - there) / step
    if slope <= 0.0:
        return []
    degree, gram = tolerances.thermometer_k, tolerances.scale_kg
    cooler = -1.0 if source.temperature_k + degree > HOTTEST else 1.0
    other = -1.0 if receiver.temperature_k + degree > HOTTEST else 1.0
    changed = (
        ("source temperature",
         replace(source, temperature_k=source.temperature_k + cooler * degree), receiver),
        ("source weight", replace(source, net_kg=source.net_kg + gram), receiver),
        ("receiver temperature", source,
         replace(receiver, temperature_k=receiver.temperature_k + other * degree)),
        (unsure[0], source, replace(receiver, net_kg=receiver.net_kg + unsure[1])),
    )  # fmt: skip
    parts = []
    for name, new_source, new_receiver in changed:
        path = transfer.path if new_source is source else None
        new = Transfer(new_source, new_receiver, transfer.line_volume_m3, path=path)
        parts.append((name, min(abs(new.surplus(moved) - there) / slope, moved)))
    return parts


def _warmest(
    transfer: Transfer,
    receiver_at: Callable[[float], Vessel],
    limit_kg: float,
    line_volume_m3: float,
) -> float | None:
    """Warmest start of the receiver that still gives a full fill in the mixed limit."""
    near = [transfer]

    def surplus(temperature_k: float) -> float:
        try:
            receiver = receiver_at(temperature_k)
        except OutOfRange:
            return -1e9
        other = near[0] = Transfer(transfer.source, receiver, line_volume_m3, path=transfer.path, like=near[0])
        room = limit_kg - receiver.net_kg
        if room <= 0.0 or room > other.capacity_kg:
            return -1e9
        full = other.surplus(room)
        if full >= 0.0 and other.surplus(0.0) <= 0.0:
            return -1e9
        return 0.0 if abs(full) < _EVEN else full

    if limit_kg <= transfer.receiver.net_kg:
        return None
    cold = surplus(COLDEST)
    if cold < 0.0:
        return None
    hot = surplus(HOTTEST)
    if hot >= 0.0:
        return HOTTEST
    return find_root(surplus, COLDEST, HOTTEST, tolerance=2e-3, at_low=cold, at_high=hot)


def _least_source(transfer: Transfer, limit_kg: float, line_volume_m3: float) -> float | None:
    """Least in the supply that still gives a full fill in the mixed limit."""
    source, receiver = transfer.source, transfer.receiver
    room = limit_kg - receiver.net_kg
    if room <= 0.0:
        return None
    full = 750.0
    if source.temperature_k <= T_SATURATION_MAX:
        full = max(full, engine().saturation(source.temperature_k)[1])
    most = full * source.volume_m3
    near = [transfer]

    def surplus(net_kg: float) -> float:
        new = replace(source, net_kg=net_kg)
        if net_kg - line_loss(new, line_volume_m3) <= room * (1.0 + 1e-9):
            return -1e9
        other = near[0] = Transfer(new, receiver, line_volume_m3, like=near[0])
        full = other.surplus(room)
        if full >= 0.0:
            full = min(full, other.surplus(0.0))
        return 0.0 if abs(full) < _EVEN else full

    if most <= room:
        return None
    # A supply with nothing left has no pressure; what is in it now halves the search at once.
    low, at_low, high, at_high = room, -transfer.path.after(0.0).pressure_pa, most, -1.0
    if room < source.net_kg < most:
        now = surplus(source.net_kg)
        if now >= 0.0:
            high, at_high = source.net_kg, now
        else:
            low, at_low = source.net_kg, max(now, at_low)
    if at_high < 0.0:
        at_high = surplus(most)
    if at_high < 0.0:
        return None
    return find_root(surplus, low, high, tolerance=1e-5 * most, at_low=at_low, at_high=at_high)
