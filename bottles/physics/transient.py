"""The course of a transfer over time: pressures, temperatures, mass, minutes.

Mass goes over in small helpings while pressures drive it, each helping's time following from
the flow at both its ends; where leaks or exchange drive it, time goes on in steps and the
helping is what the line lets through at the step's end. Nothing flows backwards. What ends
it is located: the fill limit, the end of the supply's liquid, equal pressures.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from math import inf

import numpy as np

from bottles.physics.course import Course, seconds_until
from bottles.physics.hose import effective_area, flow_between, line_flow
from bottles.physics.transfer import EQUAL, FILL_LIMIT, LIQUID_OUT, NO_DIFFERENCE, Transfer
from bottles.physics.transient_source import ClosedSupply, LeakingSupply, Supply
from bottles.physics.transient_zones import Around, Filling, Zones
from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.fluid import P_MAX
from shop.physics.roots import find_root, first_true

TIME_UP = "time is up"
BURSTS = (
    "The bottle to fill would be full of liquid and go on warming past 500 bar: its safety disc would burst first. "
    "Set a lower fill limit, or keep it colder."
)
# Between pool and what is above it: a tenth of a square metre of surface and wet wall, at some
# 600 W/m2/K (common practice, no source).
EXCHANGE = 60.0  # W/K
_EVEN = 1.0  # Pa: pressures that differ by less are equal
_AT_REST = 0.003  # K
_FIRST = 0.004  # the first helping, as a share of what can go in
_GROWTH = 1.5
_PAUSES = 16  # steps of the longest size over the time allowed, where time drives
_SHORTEST = 0.25  # s: no step of time is cut shorter
_STRAY = 20.0  # K: over so many kelvin a course is cut in its steps
_MOST_STEPS = 4000


@dataclass(frozen=True, slots=True)
class Setting:
    """Line, surroundings, exchange and patience; `steps` is how finely the course is cut.

    Without surroundings a bottle passes no heat. Without leaks an `exchange_w_k` of nothing is
    *slow to condense*, of `inf` is *quick*; with it, a `leak_w_k` of `inf` at both bottles is
    *kept at temperature*.
    """

    cd_area_m2: float = field(default_factory=effective_area)
    source_around: Around | None = None
    receiver_around: Around | None = None
    exchange_w_k: float = EXCHANGE
    within_s: float = 4.0 * 3600.0
    steps: int = 40

    def __post_init__(self) -> None:
        """Refuse what no line can be."""
        if not 0.0 < self.cd_area_m2 < 1e-2:
            raise OutOfRange("hose", "A line lets something through. Check hose, bore and valves, and their units.")
        if not (0.0 < self.within_s <= 1e7 and self.steps >= 4):
            raise OutOfRange("time", "A course needs some time, at most a hundred days. Check the time and its unit.")


def transient(transfer: Transfer, limit_kg: float, setting: Setting | None = None) -> Course:
    """Follow a transfer over time, with heat leaks and a line of a given capacity.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line's volume [-]
    limit_kg : float, fill limit of the receiver [kg]
    setting : Setting or None, area [m2], surroundings [K, W/K], exchange [W/K], time [s]

    Returns
    -------
    Course, times [s], masses [kg], flow [kg/s], absolute pressures [Pa], temperatures [K]

    Assumptions
    -----------
    Supply uniform with its wall; receiver in two zones, a pool of liquid and vapour with the
    wall. Flow as `line_flow`, through a check valve. Ends at the fill limit, when both
    bottles have come to rest at equal pressures, or when time is up; without any exchange or
    leak it ends with the supply's liquid, as the cautious limit does. Pressures count as equal
    within 1 Pa: the root of a difference gets there in finite time.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C at the start, surroundings between -80 °C and 80 °C.

    Raises
    ------
    OutOfRange
        `receiver_bursts` where it would be full of liquid and warm up above 500 bar, or where
        a state is out of range.
    NoSolution
        `course` where it can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics; zones and exchange are this
    project's own.
    """
    return _March(transfer, limit_kg, setting or Setting()).run()


@dataclass(frozen=True, slots=True)
class _Step:
    """Both bottles after a mass and a time, the flow at its end, and the enthalpy passed."""

    size: float
    seconds: float
    one: Supply
    two: Zones
    flow: float
    joules: float
    settled: bool = True  # its time agrees with the flow that the time leaves

    @property
    def surplus_pa(self) -> float:
        """Pressure of the supply above the receiver's."""
        return self.one.pressure_pa - self.two.pressure_pa


class _March:
    """One run: the moment reached, and the steps from it."""

    def __init__(self, transfer: Transfer, limit_kg: float, setting: Setting) -> None:
        self._set = setting
        source, receiver = transfer.source, transfer.receiver
        around = setting.source_around
        leaks = around is not None and around.leak_w_k > 0.0
        self._supply: ClosedSupply | LeakingSupply
        if leaks and around is not None:
            begins = transfer.path.after(transfer.line_kg).temperature_k
            self._supply = LeakingSupply(source, around, source.net_kg - transfer.line_kg, begins)
        else:
            self._supply = ClosedSupply(transfer.path, source.net_kg, source.volume_m3, transfer.line_kg)
        self._filling = Filling(receiver, setting.receiver_around, setting.exchange_w_k)
        chilled = setting.receiver_around is not None and setting.receiver_around.leak_w_k > 0.0
        self._driven = leaks or chilled or 0.0 < setting.exchange_w_k < inf
        self._ends_dry = not self._driven and setting.exchange_w_k == 0.0
        self._one: Supply = self._supply.start
        self._two: Zones = self._filling.start
        self._room = limit_kg - receiver.net_kg
        self._most = transfer.capacity_kg * (1.0 - 1e-9)
        self._scale = max(min(self._most, receiver.volume_m3 * 900.0), 1e-12)
        self._moved = self._time = self._rise = self._given_j = 0.0
        self._flow = self._flow_of(self._one, self._two, self._one)
        self._fall = max(2.0 * self._surplus() / setting.steps, 1.0)
        self._stray = _STRAY / setting.steps
        self._longest = setting.within_s / _PAUSES
        self._marks: list[tuple[float, ...]] = []

    def run(self) -> Course:
        """Go on until something ends it."""
        self._mark()
        stopped = self._pressed()
        if stopped == EQUAL and self._driven and not self._rests():
            stopped = self._drawn()
        if stopped == EQUAL and self._moved <= 0.0:
            stopped = NO_DIFFERENCE
        columns = [np.array(column) for column in zip(*self._marks, strict=True)]
        seconds, moved, flow, p1, p2, t1, t2, pool, density = columns
        half = int(np.argmax(moved >= 0.5 * moved[-1]))
        given = self._supply.start.energy_j - self._given_j
        return Course(
            seconds, moved, flow, p1, p2, t1, t2, pool, stopped, not self._one.liquid,
            seconds_until(seconds, moved, 0.9),
            float(seconds[-1]) if stopped == FILL_LIMIT and self._moved > 0.0 else None,
            flow_between(float(density[half]), float(t1[half]), float(p2[half])),
            self._one.energy_j - given,
            self._two.energy_j - self._filling.start.energy_j - self._given_j,
        )  # fmt: skip

    def _pressed(self) -> str:
        """Helpings of mass while the pressure difference drives them; says what ended it."""
        helping = _FIRST * self._scale
        for _ in range(_MOST_STEPS):
            if self._room - self._moved <= 0.0:
                return FILL_LIMIT
            spare = self._most - self._moved
            if self._surplus() <= _EVEN or spare <= 1e-9 * self._scale or self._flow <= 0.0:
                return EQUAL
            wet = self._supply.liquid_kg(self._one)
            if self._ends_dry and (wet is None or wet <= 1e-9 * self._scale):
                return LIQUID_OUT
            helping = min(helping, self._scale / self._set.steps)
            size = min(helping, self._room - self._moved, spare)
            if wet is not None and 1e-9 * self._scale < wet < size:
                size = wet
            step = self._helped(size)
            even = step.surplus_pa <= _EVEN
            # Some of the liquid left boils away meanwhile: with heat coming in its end is closed in on.
            if self._driven and self._one.liquid and not step.one.liquid and size > 1e-3 * self._scale:
                helping = 0.5 * size
                continue
            fell = (self._surplus() - step.surplus_pa) / self._fall
            if fell > 2.0 and size > 0.1 * _FIRST * self._scale:
                helping = max(size / fell, 0.1 * size)
                continue
            if even:
                size = first_true(self._evens, 0.0, size, tolerance=2e-7 * self._scale)
                step = self._helped(size)
            left = self._set.within_s - self._time
            if self._driven and (step.seconds > self._longest or not step.settled):
                return EQUAL  # time drives it from here
            if step.seconds > left:
                self._accept(self._stepped(size * left / step.seconds, left))
                return TIME_UP
            self._accept(step)
            if even and self._room - self._moved > 0.0:
                return EQUAL
            helping = size * min(_GROWTH, max(1.0 / max(fell, 1e-3), 0.5))
        raise NoSolution("course")

    def _drawn(self) -> str:
        """Steps of time while leaks and exchange drive what flows; says what ended it."""
        pause = max(0.02 * self._time, 1.0)
        for _ in range(_MOST_STEPS):
            left = self._set.within_s - self._time
            if left <= 1e-9 * self._set.within_s:
                return TIME_UP
            pause = min(pause, left, self._longest)
            room = max(min(self._room, self._most) - self._moved, 0.0)
            step = self._let_through(pause, min(self._scale / self._set.steps, room))
            runs_dry = self._one.liquid and not step.one.liquid and step.size > 1e-3 * self._scale
            strayed = self._strayed(step) / self._stray
            if (runs_dry or strayed > 2.0) and step.seconds > _SHORTEST:
                pause = max(step.seconds * (0.25 if runs_dry else 1.0 / strayed), 0.5 * _SHORTEST)
                continue
            self._accept(step)
            if self._room - self._moved <= 1e-12:
                return FILL_LIMIT
            if self._most - self._moved <= 1e-9 * self._scale or self._rests():
                return EQUAL
            pause = step.seconds * min(_GROWTH, max(1.0 / max(strayed, 1e-3), 0.5))
        raise NoSolution("course")

    def _strayed(self, step: _Step) -> float:
        """Furthest that a temperature went in a step."""
        before, after = self._two, step.two
        return max(
            abs(step.one.temperature_k - self._one.temperature_k),
            abs(after.temperature_k - before.temperature_k),
            abs(after.pool_k - before.pool_k) if min(after.pool_kg, before.pool_kg) > 1e-3 * self._scale else 0.0,
        )

    def _let_through(self, seconds: float, most: float) -> _Step:
        """What passes in a time, or the most and the shorter time that it takes."""

        def owed(size: float, within: float) -> float:
            return size - within * self._stepped(size, within).flow

        nothing = owed(0.0, seconds)
        if nothing >= 0.0 or most <= 0.0:
            return self._stepped(0.0, seconds)
        high = min(-nothing, most)
        at_high = owed(high, seconds)
        if at_high >= 0.0:
            tolerance = 1e-8 * self._scale
            high = find_root(
                lambda size: owed(size, seconds), 0.0, high, tolerance=tolerance, at_low=nothing, at_high=at_high
            )
        elif high >= most:
            seconds = find_root(
                lambda within: owed(most, within), 0.0, seconds, tolerance=1e-6 * seconds, at_low=most, at_high=at_high
            )
        return self._stepped(high, seconds)

    def _helped(self, size: float) -> _Step:
        """Step of a helping, with the time that it takes.

        Flow falling as the root of a difference that falls evenly takes twice the mass over
        the sum of both ends' flows: finite even where the last flow is none.
        """
        seconds = size / self._flow
        for _ in range(4):
            step = self._stepped(size, seconds)
            longer = 2.0 * size / (self._flow + step.flow)
            settled = not self._driven or abs(longer - seconds) <= 0.005 * longer
            if settled:
                break
            seconds = longer
        return replace(step, seconds=longer, settled=settled)

    def _stepped(self, size: float, seconds: float) -> _Step:
        """Both bottles after a mass and a time, and the flow then."""
        one, joules = self._supply.after(self._one, size, seconds)
        # Half a step ahead by the last step's slope: second order at no further call.
        ahead = self._two.pressure_pa + 0.5 * size * self._rise
        pressure = min(ahead, max(0.5 * (self._one.pressure_pa + one.pressure_pa), self._two.pressure_pa))
        two = self._filling.after(self._two, size, joules, seconds, pressure)
        return _Step(size, seconds, one, two, self._flow_of(one, two, self._one), joules)

    def _evens(self, size: float) -> bool:
        """Say whether pressures are equal once a mass has gone over."""
        return size > 0.0 and self._helped(size).surplus_pa <= _EVEN

    def _flow_of(self, one: Supply, two: Zones, before: Supply) -> float:
        """Flow between two states; at the last drop still that of liquid."""
        if one.pressure_pa - two.pressure_pa <= _EVEN:
            return 0.0
        density = one.outlet_density
        if before.liquid and not one.liquid:
            density = before.outlet_density
        return line_flow(self._set.cd_area_m2, density, one.temperature_k, two.pressure_pa)

    def _accept(self, step: _Step) -> None:
        """Move on to a state."""
        if step.two.pressure_pa > P_MAX:
            raise OutOfRange("receiver_bursts", BURSTS)
        if step.size > 0.0:
            self._given_j += step.joules
            self._rise = (step.two.pressure_pa - self._two.pressure_pa) / step.size
        self._one, self._two = step.one, step.two
        self._moved += step.size
        self._time += step.seconds
        self._flow = self._flow_of(step.one, step.two, step.one)
        self._mark()

    def _mark(self) -> None:
        """Write the moment down."""
        one, two = self._one, self._two
        self._marks.append(
            (self._time, self._moved, self._flow, one.pressure_pa, two.pressure_pa,
             one.temperature_k, two.temperature_k, two.pool_k, one.outlet_density)
        )  # fmt: skip

    def _surplus(self) -> float:
        """Pressure of the supply above the receiver's."""
        return self._one.pressure_pa - self._two.pressure_pa

    def _rests(self) -> bool:
        """Say whether nothing drives anything any more."""
        if self._surplus() > 100.0 * _EVEN:
            return False
        zones = self._two
        if self._set.exchange_w_k > 0.0 and abs(zones.temperature_k - zones.pool_k) > _AT_REST:
            return False
        pairs: list[tuple[Around | None, float]] = [
            (self._set.source_around, self._one.temperature_k),
            (self._set.receiver_around, zones.temperature_k),
        ]
        return all(
            around is None or around.leak_w_k == 0.0 or abs(around.temperature_k - t) <= _AT_REST for around, t in pairs
        )
