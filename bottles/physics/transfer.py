"""How much goes over from one bottle to another, between named limits.

`mixed`: each bottle uniform with its wall, no heat from outside (on screen *quick*).
`wall_condensing`: the receiver's vapour condenses on its wall alone (*slow to condense*).
`held`: both kept at their temperatures for as long as it takes (*kept at temperature*).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from bottles.physics.vessel import HEAT, Vessel, pressure_and_energy, settle
from bottles.physics.wall_condensing import Mark, slow_filling
from bottles.physics.withdrawal import Adiabatic, Held, mass_without_reach
from shop.physics.fluid import T_SATURATION_MAX, engine
from shop.physics.roots import find_root, first_true
from shop.physics.saturation_table import saturated

PHYSICS_VERSION = "transfer 1"
FILL_LIMIT = "fill limit"
EQUAL = "pressures equal"
LIQUID_OUT = "source out of liquid"
NO_DIFFERENCE = "no pressure difference"

_RESOLUTION = 1e-6  # of the most that can go over
_EMPTY = 1e-9  # kg: a supply bottle with nothing in it, so that it has a state
_DENSEST = 1240.0  # kg/m3, liquid at the triple point


@dataclass(frozen=True, slots=True)
class Outcome:
    """What one limit answers."""

    moved_kg: float
    receiver_final_kg: float
    source_left_kg: float
    source_final_k: float
    receiver_final_k: float
    source_final_pa: float
    receiver_final_pa: float
    stopped_by: str
    liquid_out: bool

    def as_dict(self) -> dict[str, float | str | bool]:
        """Words and numbers with their units in the keys, pressures absolute."""
        return {
            "moved_kg": self.moved_kg,
            "receiver_final_kg": self.receiver_final_kg,
            "source_left_kg": self.source_left_kg,
            "source_final_c": self.source_final_k - 273.15,
            "receiver_final_c": self.receiver_final_k - 273.15,
            "source_final_bar": self.source_final_pa / 1e5,
            "receiver_final_bar": self.receiver_final_pa / 1e5,
            "stopped_by": self.stopped_by,
            "liquid_out": self.liquid_out,
        }


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
            source = replace(source, net_kg=_EMPTY)
        self.source, self.receiver = source, receiver
        self.path = path or Adiabatic(source)
        self.line_volume_m3 = line_volume_m3
        self.line_kg = line_loss(source, line_volume_m3)
        self._wall = receiver.wall_j_k + 2.5 * receiver.air  # air's own heat, 5/2 R a mole
        t = receiver.temperature_k
        pressure, energy = pressure_and_energy(receiver.volume_m3, receiver.net_kg, t, receiver.air)
        self._energy = energy + self._wall * t
        self._rest = t, pressure
        self._guess, self._heat = t, HEAT
        if like is not None:
            self._guess, self._heat = like._guess, like._heat
        # The line's own contents leave with the energy that they took from the supply.
        self._line_j = self.path.after(self.line_kg).energy_given_j if self.line_kg else 0.0
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

    def mixed_receiver(self, moved_kg: float) -> tuple[float, float]:
        """Temperature and pressure of the receiver, uniform with its wall [K, Pa]."""
        if moved_kg == 0.0:
            return self._rest
        receiver = self.receiver
        gained = self.path.after(self.line_kg + moved_kg).energy_given_j - self._line_j
        t, p, self._heat = settle(
            receiver.volume_m3,
            self._wall,
            receiver.net_kg + moved_kg,
            self._energy + gained,
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

    def _equal_mixed(self) -> float:
        """Where both pressures meet."""
        most = self.capacity_kg
        start = self.surplus(0.0)
        if most <= 0.0 or start <= 0.0:
            return 0.0
        # Try first where liquid of the colder bottle's temperature would fill the receiver:
        # further on pressures climb by thousands of bars, which no root finder likes.
        coldest = min(self.source.temperature_k, self.receiver.temperature_k, T_SATURATION_MAX)
        full = self.receiver.volume_m3 * engine().saturation(coldest)[1] - self.receiver.net_kg
        low, at_low = 0.0, start
        for high in (full, most * (1.0 - 1e-9)):
            if not low < high < most:
                continue
            at_high = self.surplus(high)
            if at_high <= 0.0:
                return find_root(self.surplus, low, high, tolerance=_RESOLUTION * most, at_low=at_low, at_high=at_high)
            low, at_low = high, at_high
        return most


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


def mixed(transfer: Transfer, limit_kg: float) -> Outcome:
    """Limit in which each bottle is uniform with its wall and no heat comes from outside.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line [-]
    limit_kg : float, fill limit of the receiver [kg]

    Returns
    -------
    Outcome, masses [kg], temperatures [K], absolute pressures [Pa] and what stopped it [-]

    Assumptions
    -----------
    Liquid leaves at its saturated enthalpy, then vapour; mass and energy conserved.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics.
    """
    moved, stopped = _stop(transfer, limit_kg, transfer.mixed_free_kg)
    t2, p2 = transfer.mixed_receiver(moved)
    return _outcome(transfer, moved, stopped, t2, p2)


def wall_condensing(transfer: Transfer, limit_kg: float) -> Outcome:
    """Limit in which the receiver's vapour condenses on its wall alone.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line [-]
    limit_kg : float, fill limit of the receiver [kg]

    Returns
    -------
    Outcome, masses [kg], temperatures [K], absolute pressures [Pa] and what stopped it; the
    receiver's temperature is that of its wall and vapour [-]

    Assumptions
    -----------
    As `slow_filling`; ends when the supply's liquid is out.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model; masses to about 2 % of the limit.
    """
    marks = transfer.slow_marks()
    moved, stopped = _stop(transfer, limit_kg, transfer.slow_free_kg)
    if stopped == EQUAL and marks[-1].surplus_pa > 0.0 and moved >= marks[-1].moved_kg - 1e-12:
        dry = transfer.path.dry_out() - transfer.line_kg <= moved + 1e-9
        stopped = LIQUID_OUT if dry else EQUAL
    elif stopped == NO_DIFFERENCE and marks[0].surplus_pa > 0.0:
        stopped = LIQUID_OUT
    after = next((mark for mark in marks if mark.moved_kg >= moved), marks[-1])
    before = marks[max(marks.index(after) - 1, 0)]
    span = after.moved_kg - before.moved_kg
    share = (moved - before.moved_kg) / span if span > 0.0 else 0.0
    t2 = before.temperature_k + share * (after.temperature_k - before.temperature_k)
    p2 = before.pressure_pa + share * (after.pressure_pa - before.pressure_pa)
    # At the end of the liquid itself rounding mustn't say that a drop is left.
    return _outcome(transfer, moved, stopped, t2, p2, dry=stopped == LIQUID_OUT)


def held(transfer: Transfer, limit_kg: float) -> Outcome:
    """Limit in which both bottles are kept at their temperatures for as long as it takes.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line [-]
    limit_kg : float, fill limit of the receiver [kg]

    Returns
    -------
    Outcome, masses [kg], temperatures [K], absolute pressures [Pa] and what stopped it [-]

    Assumptions
    -----------
    Heat comes and goes as needed; ends at the first moment at which the receiver's pressure
    isn't below the supply's: at one temperature the receiver takes vapour alone.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        Where a state is out of range.

    References
    ----------
    Mass balance, any text on thermodynamics.
    """
    source = Held(transfer.source)
    receiver, line = transfer.receiver, transfer.line_kg

    def receiver_pressure(moved: float) -> float:
        return pressure_and_energy(receiver.volume_m3, receiver.net_kg + moved, receiver.temperature_k, receiver.air)[0]

    def even(moved: float) -> bool:
        return source.pressure(line + moved) <= receiver_pressure(moved) * (1.0 + 1e-12)

    def free() -> float:
        most = transfer.capacity_kg
        if even(0.0):
            return 0.0
        room = max(min(limit_kg - receiver.net_kg, most), 0.0)
        if not even(room):
            return most
        return first_true(even, 0.0, room, tolerance=_RESOLUTION * room)

    moved, stopped = _stop(transfer, limit_kg, free)
    given = moved + line if moved > 0.0 else 0.0
    return Outcome(
        moved,
        receiver.net_kg + moved,
        transfer.source.net_kg - given,
        transfer.source.temperature_k,
        receiver.temperature_k,
        source.pressure(given),
        receiver_pressure(moved),
        stopped,
        not source.has_liquid(given),
    )


def _stop(transfer: Transfer, limit_kg: float, free: Callable[[], float]) -> tuple[float, str]:
    """What goes over and what stops it, from what would go over without a limit."""
    room = limit_kg - transfer.receiver.net_kg
    if room <= 0.0:
        return 0.0, FILL_LIMIT
    moved = free()
    if moved >= room:
        return room, FILL_LIMIT
    if moved <= 0.0:
        return 0.0, NO_DIFFERENCE
    return moved, EQUAL


def _outcome(transfer: Transfer, moved: float, stopped: str, t2: float, p2: float, *, dry: bool = False) -> Outcome:
    """Put the supply's end beside the receiver's; nothing moved leaves the line empty."""
    given = moved + transfer.line_kg if moved > 0.0 else 0.0
    source = transfer.path.after(given)
    return Outcome(
        moved,
        transfer.receiver.net_kg + moved,
        transfer.source.net_kg - given,
        source.temperature_k,
        t2,
        source.pressure_pa,
        p2,
        stopped,
        dry or not source.liquid,
    )


def _end_of(marks: list[Mark]) -> float:
    """Where the surplus vanishes, between the last two marks."""
    last = marks[-1]
    if len(marks) == 1 or last.surplus_pa > 0.0:
        return last.moved_kg
    before = marks[-2]
    share = before.surplus_pa / (before.surplus_pa - last.surplus_pa)
    return before.moved_kg + share * (last.moved_kg - before.moved_kg)
