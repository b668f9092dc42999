"""A refill with a pump: its own stops, and the heat that the pump adds.

A pump moves liquid against any pressure up to what its plate allows, so equal pressures end
nothing. What ends it is the fill limit, the supply's liquid, or the plate.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import isfinite

from bottles.physics.contents import NEAR_CRITICAL
from bottles.physics.joining import line_loss
from bottles.physics.pumped_words import SENTENCES
from bottles.physics.transfer import FILL_LIMIT, LIQUID_OUT, Outcome
from bottles.physics.venting_filling import RECEIVER_FULL
from bottles.physics.vessel import HEAT, Vessel, pressure_and_energy, settle
from bottles.physics.withdrawal import Adiabatic, Held
from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_MAX, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.roots import find_root, first_true
from shop.physics.states import RHO_CRITICAL

DELIVERY_LIMIT = "pump's highest delivery pressure"
INLET_LIMIT = "pump's lowest inlet pressure"
PUMP_EFFICIENCY = 0.5  # work on the liquid over work put in; small piston pumps (common practice, no source)
_STEPS = 24
_EMPTY = 1e-9  # kg
_DENSEST = 1240.0  # kg/m3, liquid at the triple point
_WARMS = 5.0  # K


@dataclass(frozen=True, slots=True)
class PumpPlate:
    """A pump's limits from its plate, absolute; None where one isn't known."""

    highest_pa: float | None = None
    lowest_inlet_pa: float | None = None
    efficiency: float = PUMP_EFFICIENCY

    def __post_init__(self) -> None:
        """Refuse what no pump can be."""
        known = [pressure for pressure in (self.highest_pa, self.lowest_inlet_pa) if pressure is not None]
        if not all(0.0 < pressure <= P_MAX for pressure in known):
            raise OutOfRange("plate", "A pump's limits lie above nothing and below 500 bar. Read its plate again.")
        if not 0.05 <= self.efficiency <= 1.0:
            raise OutOfRange("plate", "A pump's efficiency lies between 5 and 100 %. Check the figure.")


@dataclass(frozen=True, slots=True)
class PumpedRefill:
    """What a pump moves, between a quick refill and one kept at its temperatures."""

    quick: Outcome
    held: Outcome
    low_kg: float
    high_kg: float
    line_loss_kg: float
    pump_heat_j: float
    liquid_warmed_k: float
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON; pressures absolute."""
        return {
            "quick": self.quick.as_dict(),
            "held": self.held.as_dict(),
            "low_kg": self.low_kg,
            "high_kg": self.high_kg,
            "line_loss_kg": self.line_loss_kg,
            "pump_heat_kj": self.pump_heat_j / 1e3,
            "liquid_warmed_k": self.liquid_warmed_k,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def pumped_refill(
    source: Vessel, receiver: Vessel, limit_kg: float, *, plate: PumpPlate | None = None, line_volume_m3: float = 0.0
) -> PumpedRefill:
    """Forecast a refill with a pump, to the first of its stops.

    Parameters
    ----------
    source : Vessel, the supply bottle at rest [-]
    receiver : Vessel, the bottle to fill at its start [-]
    limit_kg : float, its fill limit [kg]
    plate : PumpPlate or None, the pump's limits [-]
    line_volume_m3 : float, inside volume of hoses, pump and fittings [m3]

    Returns
    -------
    PumpedRefill, masses [kg], temperatures [K], absolute pressures [Pa], heat from the pump
    [J] and how far it warms the liquid [K]

    Assumptions
    -----------
    Quick: supply and bottle to fill uniform with their walls, no heat from outside but the
    pump's. Held: both kept at their temperatures. Work is volume times the pressure
    difference over the efficiency, all of it staying in the liquid; where the supply stands
    higher it flows by itself. It ends where the tube's end is out of the liquid. Delivery
    pressure is the bottle's own: hose and valve take none.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `limit`, `line`, `plate`.
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics; efficiency: common practice.
    """
    if not 0.0 < limit_kg < 1e6:
        raise OutOfRange("limit", "A fill limit is above nothing. Check it and its unit.")
    if not 0.0 <= line_volume_m3 < 1.0:
        raise OutOfRange("line", "A line's volume can't be below nothing. Check it and its unit.")
    plate = plate or PumpPlate()
    if source.net_kg < _EMPTY:
        source = replace(source, net_kg=_EMPTY)
    run = _Run(source, receiver, limit_kg, plate, line_loss(source, line_volume_m3))
    quick, heat, warmed = run.quick()
    long = run.held()
    codes = ["never_dry", "never_dead_headed", "oil_free"]
    if plate.highest_pa is None:
        codes.append("highest_unknown")
    if plate.lowest_inlet_pa is None:
        codes.append("lowest_unknown")
    stops = {quick.stopped_by, long.stopped_by}
    liquid = run.has_liquid
    if limit_kg <= receiver.net_kg:
        codes.insert(0, "receiver_full")
    elif not liquid:
        codes.insert(0, "no_source_liquid")
    elif LIQUID_OUT in stops:
        codes.insert(0, "liquid_runs_out")
    words = ((DELIVERY_LIMIT, "delivery_limit"), (INLET_LIMIT, "inlet_limit"), (RECEIVER_FULL, "full_of_liquid"))
    codes += [code for stop, code in words if stop in stops]
    if warmed > _WARMS:
        codes.append("pump_warms")
    if liquid:
        codes.append("saturated_inlet")
    if max(source.temperature_k, receiver.temperature_k) >= NEAR_CRITICAL:
        codes.append("near_critical")
    moved = (quick.moved_kg, long.moved_kg)
    told = tuple((code, SENTENCES[code]) for code in codes)
    return PumpedRefill(quick, long, min(moved), max(moved), run.line, heat, warmed, told)


class _Run:
    """Both bottles, the limit and the plate."""

    def __init__(self, source: Vessel, receiver: Vessel, limit: float, plate: PumpPlate, line: float) -> None:
        self.source, self.receiver, self.plate, self.line = source, receiver, plate, line
        # The path is that of a tube to the very bottom: the pump stops before that matters.
        self.path = Adiabatic(replace(source, below_tube_m3=0.0))
        self.has_liquid = self._covered(source.net_kg, source.temperature_k) > 0.0 and source.liquid_pickup
        self.room = limit - receiver.net_kg
        self.highest = plate.highest_pa or P_MAX
        self.lowest = plate.lowest_inlet_pa or 0.0
        self._most = max(min(self.room, receiver.volume_m3 * _DENSEST - receiver.net_kg), 0.0)

    def quick(self) -> tuple[Outcome, float, float]:
        """No heat from outside but the pump's: outcome, heat, how far the liquid is warmed."""
        path, receiver = self.path, self.receiver
        wall = receiver.wall_j_k + 2.5 * receiver.air
        t = receiver.temperature_k
        pressure, energy = pressure_and_energy(receiver.volume_m3, receiver.net_kg, t, receiver.air)
        energy += wall * t

        def left_state(given: float) -> tuple[float, float]:
            after = path.after(given)
            return after.temperature_k, after.pressure_pa

        allowed, stopped = self._supply(left_state, path.dry_out)
        moved = heat = top = 0.0
        if allowed <= 0.0 or self._too_much(0.0, t, pressure):
            stopped = stopped if allowed <= 0.0 else self._receiver_stop(0.0, t)
            return self._outcome(0.0, stopped, t, pressure), 0.0, 0.0
        guess, rise, step = HEAT, 0.0, allowed / _STEPS
        given = path.after(self.line)
        for index in range(1, _STEPS + 1):
            target = allowed if index == _STEPS else index * step
            part = target - moved
            ahead = path.after(self.line + target)
            arrived = ahead.energy_given_j - given.energy_given_j
            lift = pressure + 0.5 * part * rise - 0.5 * (given.pressure_pa + ahead.pressure_pa)
            density = self._outlet_density(target, 0.5 * (given.temperature_k + ahead.temperature_k))
            work = max(lift, 0.0) / density / self.plate.efficiency

            def state(
                share: float, base: float = energy, more: float = arrived + work * part,
                around: float = t, done: float = moved, part: float = part, heat_of: float = guess,
            ) -> tuple[float, float, float]:  # fmt: skip
                return settle(
                    receiver.volume_m3, wall, receiver.net_kg + done + share * part, base + share * more, around,
                    receiver.air, heat_of,
                )  # fmt: skip

            new_t, new_p, guess = state(1.0)
            if self._too_much(target, new_t, new_p):
                def past(share: float, done: float = moved, part: float = part,
                         at: Callable[[float], tuple[float, float, float]] = state) -> bool:  # fmt: skip
                    reached = at(share)
                    return self._too_much(done + share * part, reached[0], reached[1])

                share = first_true(past, 0.0, 1.0, tolerance=1e-7)
                t, pressure, _ = state(share)
                moved, heat = moved + share * part, heat + work * part * share
                return self._outcome(moved, self._receiver_stop(moved, t), t, pressure), heat, top
            rise = (new_p - pressure) / part
            t, pressure, moved, given = new_t, new_p, target, ahead
            energy, heat = energy + arrived + work * part, heat + work * part
            top = max(top, self._warmed(work, given.temperature_k))
        return self._outcome(moved, stopped, t, pressure), heat, top

    def held(self) -> Outcome:
        """Both kept at their temperatures."""
        source, receiver = Held(replace(self.source, below_tube_m3=0.0)), self.receiver
        t1, t2 = self.source.temperature_k, receiver.temperature_k

        def pressure(moved: float) -> float:
            return pressure_and_energy(receiver.volume_m3, receiver.net_kg + moved, t2, receiver.air)[0]

        def all_liquid() -> float:
            rho_v = engine().saturation(t1)[2] if t1 <= T_SATURATION_MAX else RHO_CRITICAL
            return max(self.source.net_kg - rho_v * self.source.volume_m3, 0.0)

        moved, stopped = self._supply(lambda given: (t1, source.pressure(given)), all_liquid)
        if self._too_much(0.0, t2, pressure(0.0)) and moved > 0.0:
            moved, stopped = 0.0, self._receiver_stop(0.0, t2)
        elif moved > 0.0 and self._too_much(moved, t2, pressure(moved)):
            moved = first_true(
                lambda mass: self._too_much(mass, t2, pressure(mass)), 0.0, moved, tolerance=1e-7 * moved
            )  # fmt: skip
            stopped = self._receiver_stop(moved, t2)
        given = moved + self.line if moved > 0.0 else 0.0
        return Outcome(
            moved, receiver.net_kg + moved, self.source.net_kg - given, t1, t2, source.pressure(given),
            pressure(moved), stopped, self._covered(self.source.net_kg - given, t1) <= 1e-9 * self.source.volume_m3,
        )  # fmt: skip

    def _supply(
        self, left_state: Callable[[float], tuple[float, float]], dry_out: Callable[[], float]
    ) -> tuple[float, str]:
        """Most that limit and supply allow, and which of them ends it."""
        if self.room <= 0.0:
            return 0.0, FILL_LIMIT
        if not self.has_liquid:
            return 0.0, LIQUID_OUT
        net, tube = self.source.net_kg, self.source.below_tube_m3
        wet = min(dry_out(), net * (1.0 - 1e-6))

        def above_tube(given: float) -> float:
            return self._covered(net - given, left_state(given)[0])

        if tube > 0.0 and above_tube(wet) < 0.0:
            wet = find_root(above_tube, 0.0, wet, tolerance=1e-9 * net)
        allowed, stopped = wet - self.line, LIQUID_OUT
        if left_state(0.0)[1] < self.lowest:
            return 0.0, INLET_LIMIT
        if allowed > 0.0 and left_state(self.line + allowed)[1] < self.lowest:
            low = first_true(lambda given: left_state(given)[1] < self.lowest, 0.0, wet, tolerance=1e-7 * wet)
            allowed, stopped = low - self.line, INLET_LIMIT
        if allowed >= self.room:
            return self._most, FILL_LIMIT if self._most == self.room else RECEIVER_FULL
        return max(allowed, 0.0), stopped

    def _covered(self, mass: float, temperature: float) -> float:
        """Liquid above the tube's end [m3]; below nothing once it's out."""
        volume, tube = self.source.volume_m3, self.source.below_tube_m3
        if temperature > T_SATURATION_MAX:
            return volume - tube if mass > RHO_CRITICAL * volume else -tube - 1e-12
        _, rho_l, rho_v, _, _ = engine().saturation(max(temperature, T_TRIPLE))
        return min((mass - rho_v * volume) / (rho_l - rho_v), volume) - tube

    def _too_much(self, moved: float, temperature: float, pressure: float) -> bool:
        """Say whether the bottle to fill is at the plate's pressure, or full of liquid."""
        return pressure >= self.highest or not isfinite(pressure) or self._full(moved, temperature)

    def _full(self, moved: float, temperature: float) -> bool:
        if not T_TRIPLE <= temperature <= T_SATURATION_MAX:
            return False
        return self.receiver.net_kg + moved >= engine().saturation(temperature)[1] * self.receiver.volume_m3

    def _receiver_stop(self, moved: float, temperature: float) -> str:
        """Word for what the bottle to fill stopped."""
        return RECEIVER_FULL if self._full(moved, temperature) else DELIVERY_LIMIT

    def _outlet_density(self, moved: float, temperature: float) -> float:
        """Density of what the pump draws."""
        left = (self.source.net_kg - self.line - moved) / self.source.volume_m3
        if temperature > T_SATURATION_MAX:
            return left
        return max(engine().saturation(max(temperature, T_TRIPLE))[1], left)

    def _warmed(self, work: float, temperature: float) -> float:
        """How far the work on a kilogram warms the liquid."""
        t = min(max(temperature, T_TRIPLE + 1.0), T_SATURATION_MAX - 1.0)
        return work / ((engine().saturation(t + 0.5)[3] - engine().saturation(t - 0.5)[3]) / 1.0)

    def _outcome(self, moved: float, stopped: str, t2: float, p2: float) -> Outcome:
        """Put the supply's end beside the bottle to fill's."""
        given = moved + self.line if moved > 0.0 else 0.0
        after = self.path.after(given)
        left = self.source.net_kg - given
        return Outcome(
            moved, self.receiver.net_kg + moved, left, after.temperature_k, t2, after.pressure_pa, p2, stopped,
            self._covered(left, after.temperature_k) <= 1e-9 * self.source.volume_m3,
        )  # fmt: skip
