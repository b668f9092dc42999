"""How wide a forecast is: its low, likely and high, what makes the width, and what would narrow it."""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

from bottles.physics.condensation import Condensation, band, between
from bottles.physics.contents import SCALE_TOLERANCE, THERMOMETER_TOLERANCE
from bottles.physics.receiver_start import OWN_VAPOUR, VENTED, Start
from bottles.physics.transfer import Transfer, held
from bottles.physics.vessel import Vessel
from shop.physics.errors import OutOfRange

CONDENSATION = "condensation"
MORE_REFILLS = "more refills"
_NOTHING = 1e-4  # kg: a band narrowed by less isn't narrowed


@dataclass(frozen=True, slots=True)
class Tolerances:
    """How well a shop reads; each is taken as the edge of 19 readings in 20.

    The two bottles may stand on scales of their own; without its own the bottle to fill's is the supply's.
    """

    thermometer_k: float = THERMOMETER_TOLERANCE
    scale_kg: float = SCALE_TOLERANCE
    receiver_scale_kg: float | None = None

    @property
    def receiver_kg(self) -> float:
        """The tolerance of the weight of the bottle to fill [kg]."""
        return self.scale_kg if self.receiver_scale_kg is None else self.receiver_scale_kg


@dataclass(frozen=True, slots=True)
class Band:
    """Masses of one pair of bottles, capped by the room in the receiver.

    `width` names each part with what it is worth alone, the largest first; `narrows` is the
    measurement without whose doubt the band would be narrowest.
    """

    low: float
    likely: float
    high: float
    width: tuple[tuple[str, float], ...]
    narrows: str | None


def unsure_start(start: Start, receiver: Vessel, tolerances: Tolerances) -> tuple[str, float]:
    """Reading or assumption behind the receiver's start, and its tolerance in mass.

    Parameters
    ----------
    start : Start, how it starts [-]
    receiver : Vessel, the bottle at its start [-]
    tolerances : Tolerances, of thermometer and scales [-]

    Returns
    -------
    tuple of str and float, what it's called [-], its tolerance [kg]

    Assumptions
    -----------
    Vented: an atmosphere more may be left. Own vapour without a weight: a quarter of it.

    Valid for
    ---------
    Any start.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Common practice, no source.
    """
    if start.kind == VENTED:
        return "receiver start", receiver.net_kg
    if start.kind == OWN_VAPOUR and start.net_kg is None:
        return "receiver start", 0.25 * receiver.net_kg
    return "receiver weight", tolerances.receiver_kg


def band_of(
    transfer: Transfer,
    room: float,
    condensation: Condensation,
    tolerances: Tolerances,
    unsure: tuple[str, float],
) -> Band:
    """Low, likely and high of one pair of bottles, and what makes the width.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line [-]
    room : float, what the receiver may still take [kg]
    condensation : Condensation, the figure with its deviation [-]
    tolerances : Tolerances, of thermometer and scales [-]
    unsure : tuple of str and float, what is unsure in the receiver's start [-], by how much [kg]

    Returns
    -------
    Band, masses [kg]

    Assumptions
    -----------
    The condensation figure's two deviations and each reading's tolerance, taken from the mixed
    limit's slope, join by the root of the sum of squares. The cautious end goes no further than
    the supply's liquid. Where vapour is drawn on purpose nothing enters under the vapour:
    then it's the mixed limit and the held one that bound.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model.
    """
    quick = transfer.mixed_free_kg()
    if quick <= 0.0 or room <= 0.0:
        return Band(0.0, 0.0, 0.0, (), None)
    parts = _reading_parts(transfer, quick, room, tolerances, unsure)
    if transfer.source.liquid_pickup:
        slow = transfer.cautious_free_kg()
        likely = between(slow, quick, condensation.figure)
        below, above = band(slow, quick, condensation)
    else:
        slow = held(transfer, transfer.receiver.net_kg + room).moved_kg
        likely = quick
        below, above = max(quick - slow, 0.0), max(slow - quick, 0.0)
    readings = sum(part * part for _, part in parts)
    low, high = _edges(likely, below, above, readings, room)
    if not high > low:
        # Where every case is full there is no width to explain.
        return Band(low, min(max(likely, 0.0), room), high, (), None)
    width = sorted([(CONDENSATION, max(below, above)), *parts], key=lambda part: part[1], reverse=True)
    narrows, narrowest = None, high - low - _NOTHING
    for name, part in width:
        if name == CONDENSATION:
            left = _edges(likely, 0.0, 0.0, readings, room)
            # A refill with vapour alone tells nothing of how vapour condenses beside liquid.
            measurement = MORE_REFILLS if transfer.path.gives_liquid else None
        else:
            known = tolerances.receiver_kg * part / unsure[1] if name == "receiver start" else 0.0
            left = _edges(likely, below, above, readings - part * part + min(known, part) ** 2, room)
            measurement = "receiver weight" if name == "receiver start" else name
        if left[1] - left[0] < narrowest:
            narrows, narrowest = measurement, left[1] - left[0]
    return Band(low, min(max(likely, 0.0), room), high, tuple(width), narrows)


def _edges(likely: float, below: float, above: float, readings: float, room: float) -> tuple[float, float]:
    """Low and high, kept to what can be."""
    low, high = likely - sqrt(below * below + readings), likely + sqrt(above * above + readings)
    return min(max(low, 0.0), room), min(max(high, 0.0), room)


def _reading_parts(
    transfer: Transfer, quick: float, room: float, tolerances: Tolerances, unsure: tuple[str, float]
) -> list[tuple[str, float]]:
    """What each reading's tolerance is worth in mass, by the mixed limit's own slope."""
    source, receiver = transfer.source, transfer.receiver
    moved = min(quick, room)
    there = transfer.surplus(moved)
    if quick > room * (1.0 + 1e-3):
        # From where it's full to where the flow would cease: a slope at one of them misleads, as
        # pressures go level before the receiver is full of liquid and climb steeply after.
        slope = there / (quick - room)
    else:
        step = 1e-3 * moved
        slope = (transfer.surplus(moved - step) - there) / step
    if slope <= 0.0:
        return []
    degree, gram = tolerances.thermometer_k, tolerances.scale_kg
    changed = (
        ("source temperature", _warmer(source, degree), receiver),
        ("source weight", _heavier(source, gram), receiver),
        ("receiver temperature", source, _warmer(receiver, degree)),
        (unsure[0], source, _heavier(receiver, unsure[1])),
    )
    parts = []
    for name, new_source, new_receiver in changed:
        path = transfer.path if new_source is source else None
        new = Transfer(new_source, new_receiver, transfer.line_volume_m3, path=path, like=transfer)
        parts.append((name, min(abs(new.surplus(moved) - there) / slope, moved)))
    return parts


def _warmer(vessel: Vessel, degree: float) -> Vessel:
    """The bottle a degree warmer, or colder where it can't be warmer."""
    try:
        return vessel.changed(temperature_k=vessel.temperature_k + degree)
    except OutOfRange:
        return vessel.changed(temperature_k=vessel.temperature_k - degree)


def _heavier(vessel: Vessel, more_kg: float) -> Vessel:
    """The bottle with more in it, or with less where it can't hold more."""
    try:
        return vessel.changed(net_kg=vessel.net_kg + more_kg)
    except OutOfRange:
        return vessel.changed(net_kg=max(vessel.net_kg - more_kg, 0.0))
