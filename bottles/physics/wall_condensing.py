"""The cautious limit: vapour in the bottle to fill condenses on its wall alone.

What arrives is throttled to the pressure inside and parts there into saturated liquid, which
lies at the bottom with the heat it came with, and vapour, which joins what is above. That
vapour, compressed by the rising liquid, shares one temperature with the wall. Once it's
saturated it condenses on the wall, warming it; the condensate drips into the liquid. Nothing
passes between the liquid and what is above it. It ends when the supply's liquid is out.
"""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.vessel import HEAT, LEAST_SPACE, Vessel, settle
from bottles.physics.withdrawal import Adiabatic
from shop.physics.fluid import P_CRITICAL, P_TRIPLE, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_table import Side, saturated, saturation_table, to_s, to_t

_STEPS = 20  # of the largest size, over what can go in
NO_SURPLUS = 1e-8  # of a pressure: even, as far as two ways to compute it agree
_FIRST = 0.004  # the first step, as a share of what can go in


@dataclass(frozen=True, slots=True)
class Mark:
    """A moment of the slow filling: what has arrived, and what stands above the liquid."""

    moved_kg: float
    temperature_k: float
    pressure_pa: float
    surplus_pa: float


class _Above:
    """Vapour and wall above the liquid: one temperature, a shrinking space."""

    __slots__ = ("air", "climb", "energy", "heat", "mass", "pressure", "s", "table", "temperature", "volume", "wall")

    def __init__(self, receiver: Vessel) -> None:
        fluid = engine()
        t, v = receiver.temperature_k, receiver.volume_m3
        self.wall, self.air = receiver.wall_j_k, receiver.air
        self.temperature = t
        self.volume, self.mass = v, receiver.net_kg
        energy = 0.0
        if self.mass > 0.0:
            density = self.mass / v
            _, energy = fluid.pressure_energy(density, t)
            quality = fluid.quality()
            if quality is not None:
                p, _, rho_v, _, h_v = saturated(min(t, T_SATURATION_MAX))
                self.mass *= quality
                self.volume = self.mass / rho_v if quality > 0.0 else 1e-6 * v
                energy = h_v - p / rho_v
        self.energy = self.mass * energy + self.wall * t
        self.pressure, self.heat = 0.0, HEAT
        self.table = saturation_table()
        self.s: float | None = None  # of saturated vapour in the table, and how far it went in the last step
        self.climb = 0.0
        self.settle()

    def settle(self) -> None:
        """Find temperature and pressure; let what has condensed drip away."""
        if self.s is not None and self._settle_wet(self.s + self.climb):
            return
        before = self.temperature
        t, self.pressure, self.heat = settle(
            self.volume, self.wall, self.mass, self.energy, before, self.air, self.heat
        )
        self.temperature, self.s = t, None
        if t <= T_SATURATION_MAX and self.mass > 0.0:
            s = to_s(t)
            side = self.table.side(s)
            if side[2] < self.mass / self.volume < side[1]:
                self.s, self.climb = s, 0.0
                self._drip(side)

    def _settle_wet(self, guess: float) -> bool:
        """The same where vapour was saturated before, as it mostly stays."""
        s = self.table.settled(self.volume, self.wall, self.mass, self.energy, guess)
        if s is None:
            return False
        side = self.table.side(s)
        if not side[2] < self.mass / self.volume < side[1]:
            return False
        self.climb = s - self.s if self.s is not None else 0.0
        self.s, self.temperature, self.pressure = s, to_t(s), side[0]
        if self.air:
            space = (side[1] * self.volume - self.mass) / (side[1] - side[2])
            self.pressure += self.air * self.temperature / max(space, LEAST_SPACE * self.volume)
        self._drip(side)
        return True

    def _drip(self, side: Side) -> None:
        """Take away the liquid with the volume and the energy that it has."""
        p_sat, rho_l, rho_v, h_l, _ = side
        drip = (self.mass - rho_v * self.volume) / (1.0 - rho_v / rho_l)
        self.mass -= drip
        self.volume -= drip / rho_l
        self.energy -= drip * (h_l - p_sat / rho_l)


def slow_filling(source: Adiabatic, receiver: Vessel, line_kg: float, most_kg: float) -> list[Mark]:
    """March the cautious limit to equal pressures or to the end of the supply's liquid.

    Parameters
    ----------
    source : Adiabatic, the supply bottle's path [-]
    receiver : Vessel, the bottle to fill at its start [-]
    line_kg : float, what the line took first [kg]
    most_kg : float, most that can go over [kg]

    Returns
    -------
    list of Mark, from the start to the end; the last one says where it ended [-]

    Assumptions
    -----------
    As the head of this module says: first order in its step, steps growing from small ones
    because the first vapour raises the pressure fastest.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics; the split into liquid, vapour and
    wall is this project's own.
    """
    above = _Above(receiver)
    moved = 0.0
    given = source.after(line_kg)
    surplus = given.pressure_pa - above.pressure
    marks = [Mark(0.0, above.temperature, above.pressure, surplus)]
    end = min(most_kg, source.dry_out() - line_kg)
    if surplus <= NO_SURPLUS * given.pressure_pa or end <= 0.0:
        return marks
    scale = min(end, receiver.volume_m3 * 900.0)
    step = _FIRST * scale
    rise = 0.0
    floor = 1e-4 * receiver.volume_m3
    while moved < end:
        step = min(step, end - moved)
        ahead = source.after(line_kg + moved + step)
        # Half a step ahead by the last step's slope: second order at no further call.
        pressure = min(above.pressure + 0.5 * step * rise, 0.5 * (given.pressure_pa + ahead.pressure_pa))
        # The last drop of liquid leaves as such, though vapour is what follows it.
        outlet = 0.5 * (given.outlet_j_kg + ahead.outlet_j_kg) if ahead.liquid else given.outlet_j_kg
        stays, density, h_v = _parted(outlet, pressure)
        grown = stays * step / density
        left = above.volume - grown
        if grown > 0.3 * above.volume or above.mass + step > 1100.0 * left:
            # What is above is all but gone: shorter steps, until the bottle is full of liquid.
            step *= 0.5
            if step < 1e-5 * scale or above.volume < floor:
                break
            continue
        above.energy += (step - stays * step) * h_v + pressure * grown
        above.mass += step - stays * step
        above.volume -= grown
        before = above.pressure
        above.settle()
        rise = (above.pressure - before) / step
        moved += step
        given = ahead
        surplus = given.pressure_pa - above.pressure
        marks.append(Mark(moved, above.temperature, above.pressure, surplus))
        if surplus <= 0.0:
            break
        step = min(step * 1.5, scale / _STEPS)
    return marks


def _parted(enthalpy: float, pressure: float) -> tuple[float, float, float]:
    """Share that stays liquid on arriving, that liquid's density, the vapour's enthalpy."""
    if pressure >= P_CRITICAL:
        t = T_SATURATION_MAX
    elif pressure <= P_TRIPLE:
        t = T_TRIPLE
    else:
        t = engine().boiling_temperature(pressure)
    _, rho_l, _, h_l, h_v = saturated(t)
    share = (h_v - enthalpy) / (h_v - h_l)
    return min(max(share, 0.0), 1.0), rho_l, max(h_v, enthalpy)
