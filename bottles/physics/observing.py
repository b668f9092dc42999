"""What one closed refill tells of the condensation figure: recomputed from its readings and weighings."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import hypot

from bottles.physics.forecast_band import Tolerances, unsure_start
from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel
from shop.physics.errors import OutOfRange

ALIKE = "limits alike"
NO_LIQUID = "no liquid"
NO_FLOW = "no flow"

_EDGE = 2.0  # a ± is the edge of 19 in 20: so many deviations


@dataclass(frozen=True, slots=True)
class Refilled:
    """A closed refill as the physics takes it; each ± is the edge of 19 in 20."""

    source: Vessel
    receiver_volume_m3: float
    receiver_wall_j_k: float
    receiver_temperature_k: float
    start: Start
    moved_kg: float
    moved_error_kg: float
    line_volume_m3: float = 0.0
    source_error_kg: float = 0.0
    start_error_kg: float = 0.0
    source_error_k: float = 1.0
    receiver_error_k: float = 1.0


@dataclass(frozen=True, slots=True)
class Told:
    """A refill between its two limits; why it tells nothing, else its own figure and deviation."""

    slow_kg: float
    quick_kg: float
    figure: float
    deviation: float
    silent: str = ""


def observe(refilled: Refilled) -> Told:
    """Tell where between its two limits a refill ended, and how surely.

    Parameters
    ----------
    refilled : Refilled, both bottles as they were read, what came over by the scale [-]

    Returns
    -------
    Told, the limits without the fill limit [kg], the condensation figure of this refill and the
    standard deviation that its readings give it, or why it tells nothing [-]

    Assumptions
    -----------
    What each reading is worth is taken from the mixed limit's slope at what came over, as the
    forecast's band does; readings are independent of each other. Where both limits differ by
    less than the ± of what came over nothing can be told of what lies between them.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        A bottle out of range.
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model; JCGM 100:2008 (GUM), 5.1.2, for joining uncertainties.
    """
    receiver = start_vessel(
        volume_m3=refilled.receiver_volume_m3, wall_j_k=refilled.receiver_wall_j_k,
        temperature_k=refilled.receiver_temperature_k, start=refilled.start,
    )  # fmt: skip
    transfer = Transfer(refilled.source, receiver, refilled.line_volume_m3)
    quick = transfer.mixed_free_kg()
    if quick <= 0.0:
        return Told(0.0, 0.0, 0.0, 0.0, NO_FLOW)
    if not transfer.path.gives_liquid:
        return Told(0.0, quick, 0.0, 0.0, NO_LIQUID)
    slow = transfer.slow_free_kg()
    gap = quick - slow
    if gap <= refilled.moved_error_kg:
        return Told(slow, quick, 0.0, 0.0, ALIKE)
    edge = hypot(refilled.moved_error_kg, *_parts(transfer, refilled))
    return Told(slow, quick, (refilled.moved_kg - slow) / gap, edge / _EDGE / gap)


def _parts(transfer: Transfer, refilled: Refilled) -> list[float]:
    """What each reading's ± is worth in mass."""
    source, receiver = transfer.source, transfer.receiver
    quick = transfer.mixed_free_kg()
    moved = min(quick, max(refilled.moved_kg, 0.1 * quick))
    there = transfer.surplus(moved)
    if quick > moved * (1.0 + 1e-3):
        # From what came to where the flow would cease: pressures may go level and then climb steeply.
        slope = there / (quick - moved)
    else:
        step = 1e-3 * moved
        slope = (transfer.surplus(moved - step) - there) / step
    if slope <= 0.0:
        return []
    _, unsure = unsure_start(refilled.start, receiver, Tolerances(receiver_scale_kg=refilled.start_error_kg))
    changed = (
        (_other(source, refilled.source_error_k, 0.0), receiver),
        (_other(source, 0.0, refilled.source_error_kg), receiver),
        (source, _other(receiver, refilled.receiver_error_k, 0.0)),
        (source, _other(receiver, 0.0, unsure)),
    )
    parts = []
    for new_source, new_receiver in changed:
        if new_source == source and new_receiver == receiver:
            continue
        path = transfer.path if new_source is source else None
        new = Transfer(new_source, new_receiver, refilled.line_volume_m3, path=path, like=transfer)
        parts.append(min(abs(new.surplus(moved) - there) / slope, moved))
    return parts


def _other(vessel: Vessel, kelvin: float, kilograms: float) -> Vessel:
    """The bottle so much warmer and fuller, or colder and emptier where it can't be that."""
    t, net = vessel.temperature_k, vessel.net_kg
    try:
        return replace(vessel, temperature_k=t + kelvin, net_kg=net + kilograms)
    except OutOfRange:
        return replace(vessel, temperature_k=t - kelvin, net_kg=max(net - kilograms, 0.0))
