"""Two bottles joined: what both show after a mass has gone over, and where their pressures meet."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import chain

from bottles.physics.vessel import HEAT, Vessel, pressure_and_energy, settle
from bottles.physics.wall_condensing import NO_SURPLUS, Mark, slow_filling
from bottles.physics.withdrawal import Adiabatic
from bottles.physics.withdrawal_stages import mass_without_reach
from shop.physics.fluid import T_SATURATION_MAX
from shop.physics.roots import find_root
from shop.physics.saturation_table import saturated, saturation_table, to_s, to_t

_RESOLUTION = 1e-6  # of the most that can go over
_EVEN = 1e-6  # of the supply's pressure: less than a tenth of a gram on the flattest slope
_STIFF = 3e4  # m2/s2: liquid squeezed by a kilogram a cubic metre gains more pascals than this
_EMPTY = 1e-9  # kg: a supply bottle with nothing in it, so that it has a state
_DENSEST = 1240.0  # kg/m3, liquid at the triple point


class Transfer:
    """Two bottles joined; its limits share the supply's path and what the line takes."""

    def __init__(
        self,
        source: Vessel,
        receiver: Vessel,
        line_volume_m3: float = 0.0,
        *,
        path: Adiabatic | None = None,
        like: Transfer | None = None,
    ) -> None:
        """Fix both bottles at rest, and fill the line from the supply; a path may be shared.

        `like` is a transfer whose receiver settled nearby, to begin from.
        """
        if source.net_kg < _EMPTY:
            source = source.changed(net_kg=_EMPTY)
        self.source, self.receiver = source, receiver
        self.path = path or Adiabatic(source)
        self.line_volume_m3 = line_volume_m3
        self.line_kg = line_loss(source, line_volume_m3)
        self.receiver_wall_j_k = receiver.wall_j_k + 2.5 * receiver.air  # air's own heat, 5/2 R a mole
        t = receiver.temperature_k
        pressure, energy = pressure_and_energy(receiver.volume_m3, receiver.net_kg, t, receiver.air)
        self.receiver_j = energy + self.receiver_wall_j_k * t  # at its start
        self._rest = t, pressure
        self._guess, self._heat = t, HEAT
        if like is not None:
            self._guess, self._heat = like._guess, like._heat
        # The line's own contents leave with the energy that they took from the supply.
        self._line_j = self.path.after(self.line_kg).energy_given_j if self.line_kg else 0.0
        self._even_pa = 0.0
        self._marks: list[Mark] | None = None
        self._mixed: float | None = None

    @property
    def capacity_kg(self) -> float:
        """Most that could go over if nothing but room and supply stopped it."""
        room = self.receiver.volume_m3 * _DENSEST - self.receiver.net_kg
        return max(0.0, min(self.source.net_kg - self.line_kg, room))

    def surplus(self, moved_kg: float) -> float:
        """Pressure of the supply above the receiver's, both uniform with their walls [Pa]."""
        given = self.path.after(self.line_kg + moved_kg)
        return given.pressure_pa - self.mixed_receiver(moved_kg)[1]

    def gained_j(self, moved_kg: float) -> float:
        """Energy that went over with a mass, whatever the receiver does with it [J]."""
        return self.path.after(self.line_kg + moved_kg).energy_given_j - self._line_j

    def mixed_receiver(self, moved_kg: float) -> tuple[float, float]:
        """Temperature and pressure of the receiver, uniform with its wall [K, Pa]."""
        if moved_kg == 0.0:
            return self._rest
        receiver = self.receiver
        gained = self.gained_j(moved_kg)
        t, p, self._heat = settle(
            receiver.volume_m3,
            self.receiver_wall_j_k,
            receiver.net_kg + moved_kg,
            self.receiver_j + gained,
            self._guess,
            receiver.air,
            self._heat,
        )
        self._guess = t
        return t, p

    def mixed_free_kg(self) -> float:
        """What goes over in the mixed limit without a fill limit."""
        if self._mixed is None:
            self._mixed = self._equal_mixed()
        return self._mixed

    def slow_marks(self) -> list[Mark]:
        """The cautious limit's course without a fill limit."""
        if self._marks is None:
            self._marks = slow_filling(self.path, self.receiver, self.line_kg, self.capacity_kg)
        return self._marks

    def slow_free_kg(self) -> float:
        """What goes over in the cautious limit without a fill limit."""
        return _end_of(self.slow_marks())

    def cautious_free_kg(self) -> float:
        """The cautious end that a condensation figure counts from.

        It ends with the liquid, so that a supply that has none left counts for nothing, as one
        with its last drop does. Where vapour is drawn on purpose no liquid enters: the mixed limit.
        """
        return self.slow_free_kg() if self.source.liquid_pickup else self.mixed_free_kg()

    def _equal_mixed(self) -> float:
        """Where both pressures meet."""
        most = self.capacity_kg
        start = self.surplus(0.0)
        pressure = self.path.after(self.line_kg).pressure_pa
        self._even_pa = _EVEN * pressure
        if most <= 0.0 or start <= NO_SURPLUS * pressure:
            return 0.0
        closed, first = self._level()
        if closed is not None:
            return closed
        found = self._squeezed(first, most) if first is not None and not self.receiver.air else None
        if found is not None:
            return found
        # Try first where liquid of the colder bottle's temperature would fill the receiver:
        # further on pressures climb by thousands of bars, which no root finder likes.
        coldest = min(self.source.temperature_k, self.receiver.temperature_k, T_SATURATION_MAX)
        full = self.receiver.volume_m3 * saturated(coldest)[1] - self.receiver.net_kg
        low, at_low = 0.0, start
        for high in chain(self._places(start, first, min(full, most)), (full, most * (1.0 - 1e-9))):
            if not low < high < most:
                continue
            at_high = self._surplus_or_even(high)
            if at_high <= 0.0:
                return find_root(
                    self._surplus_or_even, low, high, tolerance=_RESOLUTION * most, at_low=at_low, at_high=at_high,
                    first=low + (high - low) * at_low / (at_low - at_high),
                )  # fmt: skip
            low, at_low = high, at_high
        return most

    def _places(self, start: float, first: float | None, full: float) -> Iterator[float]:
        """Where to look for the end before the receiver is full, nearest first."""
        if first is not None:
            yield first
        dry = max(self.path.dry_out(), self.line_kg)
        share = 1.0 + self.source.volume_m3 / self.receiver.volume_m3
        if dry > self.line_kg + full:
            return
        if dry > self.line_kg:
            yield dry - self.line_kg
            start, share = self.surplus(dry - self.line_kg), 1.0
        # Vapour alone from here on: its pressure falls a little faster than its mass.
        given = self.path.after(dry)
        left = self.source.net_kg - dry
        yield dry - self.line_kg + 1.3 * start * left / (given.pressure_pa * share)

    def _surplus_or_even(self, moved_kg: float) -> float:
        """Surplus, none where it's too small to tell."""
        surplus = self.surplus(moved_kg)
        return 0.0 if abs(surplus) < self._even_pa else surplus

    def _level(self) -> tuple[float | None, float | None]:
        """Where both bottles hold two phases at one temperature, by their balances alone.

        The second figure is a place to look from where there is no such end: more than goes over
        where air helps the receiver, less where it gets full of liquid.
        """
        one, two = self.source, self.receiver
        table = saturation_table()
        volume = one.volume_m3 + two.volume_m3
        wall = one.wall_j_k + self.receiver_wall_j_k
        mass = one.net_kg - self.line_kg + two.net_kg
        energy = self.path.start_j - self._line_j + self.receiver_j
        guess = min(0.5 * (one.temperature_k + two.temperature_k), T_SATURATION_MAX - 0.5)
        s = table.settled(volume, wall, mass, energy, to_s(guess))
        if s is None:
            return None, None
        side = table.side(s)
        given = self.path.given_at(to_t(s))
        if given is None:
            return None, None
        moved = given - self.line_kg
        density = (two.net_kg + moved) / two.volume_m3
        if not moved > 0.0 or density <= side[2]:
            return None, None
        if density >= side[1]:
            return None, side[1] * two.volume_m3 - two.net_kg
        if two.air or abs(self.surplus(moved)) >= self._even_pa:
            return None, moved
        return moved, None

    def _squeezed(self, low: float, most: float) -> float | None:
        """Where pressures meet in a receiver full of liquid; None where it isn't nearly so at `low`."""
        receiver = self.receiver
        if not 0.0 < low < most:
            return None
        at_low = self.surplus(low)
        if at_low <= 0.0:
            return None
        for _ in range(8):
            # Full at the temperature just met; from there on by the liquid's own stiffness.
            full = receiver.volume_m3 * saturated(min(self._guess, T_SATURATION_MAX))[1] - receiver.net_kg
            high = full if full > low * (1.0 + 1e-9) else low + at_low * receiver.volume_m3 / _STIFF
            if not high < most:
                return None
            at_high = self._surplus_or_even(high)
            if at_high <= 0.0:
                return find_root(
                    self._surplus_or_even, low, high, tolerance=_RESOLUTION * most, at_low=at_low, at_high=at_high
                )
            low, at_low = high, at_high
        return None


def line_loss(source: Vessel, line_volume_m3: float) -> float:
    """Nitrous that fills the line on opening and is lost on disconnecting.

    Parameters
    ----------
    source : Vessel, the supply bottle at rest [-]
    line_volume_m3 : float, inside volume of hose and fittings [m3]

    Returns
    -------
    float, mass [kg]

    Assumptions
    -----------
    Filled with what leaves the supply first, at the supply's pressure; never more than the
    supply holds.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        Where the supply's state is out of range.

    References
    ----------
    Common practice, no source.
    """
    if line_volume_m3 <= 0.0 or source.net_kg <= 0.0:
        return 0.0
    density = source.net_kg / source.volume_m3
    t = source.temperature_k
    if t <= T_SATURATION_MAX:
        side = saturated(t)
        _, rho_l, rho_v, _, _ = side
        if rho_v < density < rho_l:
            reached = source.net_kg > mass_without_reach(side, source.volume_m3, source.below_tube_m3)
            density = rho_l if source.liquid_pickup and reached else rho_v
    return min(density * line_volume_m3, 0.5 * source.net_kg)


def _end_of(marks: list[Mark]) -> float:
    """Where the surplus vanishes, between the last two marks."""
    last = marks[-1]
    if len(marks) == 1 or last.surplus_pa > 0.0:
        return last.moved_kg
    before = marks[-2]
    share = before.surplus_pa / (before.surplus_pa - last.surplus_pa)
    return before.moved_kg + share * (last.moved_kg - before.moved_kg)
