"""The whole forecast of a refill: limits, band, and what would help."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import floor

from bottles.physics.condensation import PRIOR, Condensation
from bottles.physics.contents import NEAR_CRITICAL
from bottles.physics.forecast_band import Tolerances as Tolerances
from bottles.physics.forecast_band import band_of, unsure_start
from bottles.physics.forecast_help import least_source, warmest_receiver
from bottles.physics.forecast_words import SENTENCES
from bottles.physics.receiver_start import AIR, VENTED, Start, start_vessel
from bottles.physics.transfer import (
    PHYSICS_VERSION,
    Outcome,
    Transfer,
    held,
    mixed,
    wall_condensing,
)
from bottles.physics.vessel import Vessel
from shop.physics.errors import OutOfRange
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE
from shop.physics.saturation_table import saturated


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
    narrows: str | None = None

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
            "narrows": self.narrows,
            "condensation": self.condensation.figure,
            "condensation_origin": self.condensation.origin,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
            "physics_version": PHYSICS_VERSION,
        }


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
    tolerances : Tolerances or None, of thermometer and scales [-]

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
    unsure = unsure_start(begins, receiver, tolerances)
    if begins.kind != VENTED and begins.net_kg is None:
        # Chilled before filling, a bottle keeps what it holds; only venting follows it down.
        begins = replace(begins, net_kg=receiver.net_kg)
    room = max(limit_kg - receiver.net_kg, 0.0)
    codes = _standing_codes(source, receiver, begins, room, condensation)
    ends = source_range_kg or (source.net_kg, source.net_kg)
    transfers = [Transfer(source.changed(net_kg=net), receiver, line_volume_m3) for net in dict.fromkeys(ends)]
    bands = [band_of(each, room, condensation, tolerances, unsure) for each in transfers]
    least = least_source(transfers[-1], limit_kg)
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
            "source weight" if high > low else None,
        )  # fmt: skip
    transfer, answer = transfers[0], bands[0]
    limits = (
        mixed(transfer, limit_kg),
        wall_condensing(transfer, limit_kg),
        held(transfer, limit_kg),
    )
    if room > 0.0 and transfer.mixed_free_kg() <= 0.0:
        codes.append("no_flow")
    gives_liquid = transfer.path.gives_liquid
    if limits[0].liquid_out and gives_liquid:
        codes.append("liquid_runs_out")
    if room > 0.0 and "fill limit" in (limits[0].stopped_by, limits[2].stopped_by):
        codes.append("can_pass_limit")
    if not gives_liquid:
        codes.append("no_source_liquid")
    if _leaves_below_tube(source, limits):
        codes.append("left_below_tube")
    if any(min(limit.source_final_k, limit.receiver_final_k) < T_TRIPLE + 0.01 for limit in limits):
        codes.append("freezes")
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
        warmest_receiver(transfer, receiver_at, limit_kg), least, fills, answer.width, condensation,
        _told(codes), answer.narrows,
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


def _leaves_below_tube(source: Vessel, limits: tuple[Outcome, ...]) -> bool:
    """Say whether any of the limits comes to the liquid that the dip tube doesn't reach."""
    if not source.below_tube_m3 or not source.liquid_pickup:
        return False
    return any(
        limit.liquid_out
        and limit.source_final_k <= T_SATURATION_MAX
        and limit.source_left_kg > saturated(limit.source_final_k)[2] * source.volume_m3 * (1.0 + 1e-6)
        for limit in limits
    )


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
