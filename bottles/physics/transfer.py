"""How much goes over from one bottle to another, between named limits.

`mixed`: each bottle uniform with its wall, no heat from outside (on screen *quick*).
`wall_condensing`: the receiver's vapour condenses on its wall alone (*slow to condense*).
`held`: both kept at their temperatures for as long as it takes (*kept at temperature*).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from bottles.physics.joining import Transfer as Transfer
from bottles.physics.joining import line_loss as line_loss
from bottles.physics.vessel import pressure_and_energy
from bottles.physics.withdrawal import Held
from shop.physics.fluid import T_SATURATION_MAX, engine
from shop.physics.roots import find_root, first_true

PHYSICS_VERSION = "transfer 2"
FILL_LIMIT = "fill limit"
EQUAL = "pressures equal"
LIQUID_OUT = "source out of liquid"
NO_DIFFERENCE = "no pressure difference"

_RESOLUTION = 1e-6  # of the most that can go over


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
    elif stopped == NO_DIFFERENCE and transfer.mixed_free_kg() > 0.0:
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

    def gap(moved: float) -> float:
        return source.pressure(line + moved) - receiver_pressure(moved)

    def free() -> float:
        most = transfer.capacity_kg
        if even(0.0):
            return 0.0
        room = max(min(limit_kg - receiver.net_kg, most), 0.0)
        if not even(room):
            return most
        # Between the places where a phase comes or goes both pressures are smooth or level.
        low, high, tolerance = 0.0, room, _RESOLUTION * room
        for place in _turns(transfer, room):
            if even(place):
                high = place
                break
            low = place
        at_low, at_high = gap(low), gap(high)
        if at_low > 1e-6 * source.pressure(line + low) and at_high < 0.0:
            return find_root(gap, low, high, tolerance=tolerance, at_low=at_low, at_high=at_high)
        return first_true(even, low, high, tolerance=tolerance)

    moved, stopped = _stop(transfer, limit_kg, free)
    given = moved + line
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


def _turns(transfer: Transfer, room: float) -> list[float]:
    """Masses gone over at which a bottle kept at its temperature gains or loses a phase, in order."""
    source, receiver = transfer.source, transfer.receiver
    places = []
    if source.temperature_k <= T_SATURATION_MAX:
        _, rho_l, rho_v, _, _ = engine().saturation(source.temperature_k)
        places += [source.net_kg - transfer.line_kg - density * source.volume_m3 for density in (rho_l, rho_v)]
    if receiver.temperature_k <= T_SATURATION_MAX:
        _, rho_l, rho_v, _, _ = engine().saturation(receiver.temperature_k)
        places += [density * receiver.volume_m3 - receiver.net_kg for density in (rho_l, rho_v)]
    return sorted(place for place in places if 0.0 < place < room)


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
    """Put the supply's end beside the receiver's; the line was filled on opening, whatever followed."""
    given = moved + transfer.line_kg
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
