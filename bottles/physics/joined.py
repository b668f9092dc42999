"""Two bottles joined, valves open: which gives, which takes, and whether it takes too much."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.contents import NEAR_CRITICAL, one_phase_temperature
from bottles.physics.joined_words import SENTENCES
from bottles.physics.joining import Transfer
from bottles.physics.transfer import EQUAL, LIQUID_OUT, Outcome, held, mixed
from bottles.physics.venting_filling import RECEIVER_FULL
from bottles.physics.vessel import Vessel, pressure_and_energy
from shop.physics.errors import OutOfRange
from shop.physics.fluid import T_SATURATION_MAX, engine

FIRST, SECOND = "first", "second"
_NO_LIMIT = 1e5  # kg, more than any bottle holds
_EVEN = 1e-6  # share of a pressure that makes no flow
_FULL = 1.0 - 1e-4  # share of the liquid's density from which a bottle counts as full of it
_NOTHING = 1e-6  # kg


@dataclass(frozen=True, slots=True)
class Passing:
    """One end of a joined pair: its outcome, and what it does to the bottle that takes."""

    outcome: Outcome
    ends_by: str
    over_limit_kg: float | None
    full_of_liquid: bool
    full_at_k: float | None

    def as_dict(self) -> dict[str, object]:
        """Words and numbers with their units in the keys."""
        return {
            **self.outcome.as_dict(),
            "stopped_by": self.ends_by,
            "over_limit_kg": self.over_limit_kg,
            "full_of_liquid": self.full_of_liquid,
            "full_at_c": None if self.full_at_k is None else self.full_at_k - 273.15,
        }


@dataclass(frozen=True, slots=True)
class Joined:
    """What flows between two joined bottles; `flows_from` is None where nothing does."""

    flows_from: str | None
    phase: str | None
    quick: Passing | None
    long: Passing | None
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, ready for JSON."""
        return {
            "flows_from": self.flows_from,
            "phase": self.phase,
            "quick": None if self.quick is None else self.quick.as_dict(),
            "long": None if self.long is None else self.long.as_dict(),
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def joined(
    first: Vessel,
    second: Vessel,
    *,
    limits_kg: tuple[float | None, float | None] = (None, None),
    line_volume_m3: float = 0.0,
) -> Joined:
    """Forecast what two bottles do that are joined and left open.

    Parameters
    ----------
    first, second : Vessel, both at rest [-]
    limits_kg : tuple of float or None, fill limit of each where it's known [kg]
    line_volume_m3 : float, inside volume of the hose or manifold [m3]

    Returns
    -------
    Joined, which one gives and in which phase [-], the quick end and the long one: masses
    [kg], temperatures [K], pressures [Pa]; by how much the one that takes passes its limit
    [kg]; the temperature from which it's full of liquid [K]

    Assumptions
    -----------
    Quick: each bottle uniform with its wall, no heat from outside, to equal pressures. Long:
    each kept at its own temperature for as long as it takes; the colder one takes until it's
    full of liquid or the warmer is dry. No scale stops either.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `limit`, `line`.
    NoSolution
        Where a bottle's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics.
    """
    if any(limit is not None and not 0.0 < limit < 1e6 for limit in limits_kg):
        raise OutOfRange("limit", "A fill limit is above nothing. Check it and its unit.")
    if not 0.0 <= line_volume_m3 < 1.0:
        raise OutOfRange("line", "A line's volume can't be below nothing. Check it and its unit.")
    pressures = [_pressure(vessel) for vessel in (first, second)]
    if abs(pressures[0] - pressures[1]) <= _EVEN * max(pressures):
        same = abs(first.temperature_k - second.temperature_k) < 1e-3
        return Joined(None, None, None, None, _told(["equal" if same else "equal_pressures", "close_valves"]))
    forward = pressures[0] > pressures[1]
    source, receiver = (first, second) if forward else (second, first)
    limit = limits_kg[1] if forward else limits_kg[0]
    transfer = Transfer(source, receiver, line_volume_m3)
    liquid = transfer.path.after(0.0).liquid
    quick = _passing(transfer, mixed(transfer, _NO_LIMIT), limit)
    long = _passing(transfer, held(transfer, _NO_LIMIT), limit)
    codes = ["close_valves"]
    for passing in (quick, long):
        if passing.full_of_liquid and "full_of_liquid" not in codes:
            codes.insert(0, "full_of_liquid")
        if (passing.over_limit_kg or 0.0) > _NOTHING and "passes_limit" not in codes:
            codes.insert(0, "passes_limit")
    if limit is None:
        codes.append("limit_unknown")
    if not liquid:
        codes.append("vapour")
    if long.outcome.moved_kg > quick.outcome.moved_kg + _NOTHING:
        codes.append("later")
    if max(source.temperature_k, receiver.temperature_k) >= NEAR_CRITICAL:
        codes.append("near_critical")
    return Joined(FIRST if forward else SECOND, "liquid" if liquid else "vapour", quick, long, _told(codes))


def _pressure(vessel: Vessel) -> float:
    """Pressure at rest."""
    return pressure_and_energy(vessel.volume_m3, vessel.net_kg, vessel.temperature_k, vessel.air)[0]


def _passing(transfer: Transfer, outcome: Outcome, limit: float | None) -> Passing:
    """What an end does to the bottle that takes."""
    net, volume, t = outcome.receiver_final_kg, transfer.receiver.volume_m3, outcome.receiver_final_k
    full = False
    if t <= T_SATURATION_MAX:
        full = net >= _FULL * engine().saturation(t)[1] * volume
    ends_by = outcome.stopped_by
    if ends_by == EQUAL:
        if full:
            ends_by = RECEIVER_FULL
        elif outcome.liquid_out and transfer.path.after(0.0).liquid:
            ends_by = LIQUID_OUT
    over = None if limit is None else max(net - limit, 0.0)
    return Passing(outcome, ends_by, over, full, _full_at(net, volume))


def _full_at(net: float, volume: float) -> float | None:
    """Temperature from which a fill is liquid alone; None for one that never is."""
    try:
        temperature, word = one_phase_temperature(net, volume)
    except OutOfRange:  # one phase at any temperature
        return None
    return temperature if word == "liquid-full" else None


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)
