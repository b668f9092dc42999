"""How long a bottle takes to chill, or to warm, in a freezer, in iced water, in a room."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import exp, log

from bottles.physics.chilling_words import SENTENCES
from bottles.physics.contents import NEAR_CRITICAL, one_phase_temperature
from bottles.physics.heating import ROOM_TRANSFER, room_loss, seconds_to_reach
from bottles.physics.vessel import COLDEST, HOTTEST, Vessel
from shop.physics.errors import OutOfRange
from shop.physics.roots import find_root

ROOM = "room"
FREEZER = "freezer"
MOVED_AIR = "freezer with a fan"
ICED_WATER = "iced water"
# Heat passed by an area, with what the wall and the contents hold back (common practice, no
# source): still air with radiation as for a room; a freezer's still air radiates less, its
# walls being frosted and close; moved air at some 2 m/s; water that is stirred now and then,
# where the film inside the wall counts as much as the water's.
TRANSFER: Mapping[str, float] = {ROOM: ROOM_TRANSFER, FREEZER: 8.0, MOVED_AIR: 22.0, ICED_WATER: 250.0}  # W/m2/K
SPREAD = 1.5  # the coefficient may be so many times more or less (common practice, no source)
_ICE = 273.15  # K
_SOON = 0.5  # K from the surroundings' temperature
_CLOSEST = 1e-4  # share of the difference at which a bottle counts as being there


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What a bottle stands in, and how cold or warm that is."""

    kind: str = FREEZER
    temperature_k: float = 255.15

    def __post_init__(self) -> None:
        """Refuse what isn't known or couldn't be."""
        if self.kind not in TRANSFER:
            raise OutOfRange("surroundings", "Say where it stands: " + ", ".join(TRANSFER) + ".")
        if not COLDEST - 20.0 <= self.temperature_k <= HOTTEST:
            raise OutOfRange(
                "surroundings", "Surroundings lie between -60 °C and 52 °C. Check the temperature and its unit."
            )
        if self.kind == ICED_WATER and not _ICE - 3.0 <= self.temperature_k <= _ICE + 12.0:
            raise OutOfRange("surroundings", "Iced water lies near 0 °C. Check the temperature and its unit.")


@dataclass(frozen=True, slots=True)
class Chilling:
    """Time to a temperature: likely, and between what; None where it never gets there."""

    quick_s: float | None
    likely_s: float | None
    slow_s: float | None
    heat_j: float | None
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        times = {"quick_minutes": self.quick_s, "likely_minutes": self.likely_s, "slow_minutes": self.slow_s}
        return {
            **{name: None if seconds is None else seconds / 60.0 for name, seconds in times.items()},
            "heat_kj": None if self.heat_j is None else self.heat_j / 1e3,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def heat_passed(volume_m3: float, kind: str) -> float:
    """Heat that passes between a standing bottle and what surrounds it, a kelvin of difference.

    Parameters
    ----------
    volume_m3 : float, water capacity [m3]
    kind : str, `room`, `freezer`, `freezer with a fan` or `iced water` [-]

    Returns
    -------
    float, watts a kelvin [W/K]

    Assumptions
    -----------
    A cylinder four times as long as wide, free all round; 10 W/m2/K in a room, 8 in a
    freezer's still air, 22 in moved air, 250 in iced water up to its shoulder; any of them
    may be half as much again or a third less.

    Valid for
    ---------
    Bottles of 0.3 to 60 L standing free, not frosted over.

    Raises
    ------
    OutOfRange
        `surroundings` for a word that isn't known.

    References
    ----------
    Common practice, no source.
    """
    if kind not in TRANSFER:
        raise OutOfRange("surroundings", "Say where it stands: " + ", ".join(TRANSFER) + ".")
    return room_loss(volume_m3) * TRANSFER[kind] / ROOM_TRANSFER


def time_to_reach(vessel: Vessel, target_k: float, surroundings: Surroundings) -> Chilling:
    """How long a bottle takes to a temperature, chilling or warming.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    target_k : float, temperature to reach [K]
    surroundings : Surroundings, what it stands in [-]

    Returns
    -------
    Chilling, times [s] and the heat that passes [J]; None where it never gets there

    Assumptions
    -----------
    Contents and wall at one temperature, surroundings that keep theirs; heat passed is
    proportional to the difference, so that the times' range is that of the coefficient.

    Valid for
    ---------
    Bottles between -40 and 52 °C of 0.3 to 60 L.

    Raises
    ------
    OutOfRange
        `bottle_temperature` for a target out of range; where a state is out of range.

    References
    ----------
    Newton's law of cooling, any text on heat transfer; coefficients: common practice.
    """
    if not COLDEST - 1e-9 <= target_k <= HOTTEST + 1e-9:
        raise OutOfRange("bottle_temperature", "A bottle is chilled or warmed between -40 °C and 52 °C. Check the target.")
    codes = _standing(vessel, surroundings, target_k)
    ambient, start = surroundings.temperature_k, vessel.temperature_k
    if abs(target_k - start) < 1e-9:
        return Chilling(0.0, 0.0, 0.0, 0.0, _told(["already_there", *codes]))
    passed = heat_passed(vessel.volume_m3, surroundings.kind)
    seconds = None
    if abs(ambient - target_k) > 1e-6:
        seconds = seconds_to_reach(vessel, target_k, ambient_k=ambient, loss_w_k=passed)
    if seconds is None:
        return Chilling(None, None, None, None, _told(["never_gets_there", *codes]))
    if abs(ambient - target_k) < _SOON:
        codes.insert(0, "all_but_there")
    # By a constant power of one watt, so many seconds are so many joules.
    heat = seconds_to_reach(vessel, target_k, ambient_k=start, loss_w_k=0.0, watts=1.0 if target_k > start else -1.0)
    return Chilling(seconds / SPREAD, seconds, seconds * SPREAD, heat, _told(codes))


def temperature_after(
    vessel: Vessel, seconds: float, surroundings: Surroundings
) -> tuple[float, float, float]:
    """How cold, or how warm, a bottle gets in a given time.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    seconds : float, time [s]
    surroundings : Surroundings, what it stands in [-]

    Returns
    -------
    tuple of float, temperature if heat passes slowly, likely, quickly: the last one is
    nearest to the surroundings' and never past it [K]

    Assumptions
    -----------
    As `time_to_reach`.

    Valid for
    ---------
    Bottles between -40 and 52 °C of 0.3 to 60 L.

    Raises
    ------
    OutOfRange
        `time` below nothing; where a state is out of range.

    References
    ----------
    Newton's law of cooling, any text on heat transfer; coefficients: common practice.
    """
    if not 0.0 <= seconds < 1e9:
        raise OutOfRange("time", "A time can't be below nothing. Check it and its unit.")
    start, ambient = vessel.temperature_k, surroundings.temperature_k
    passed = heat_passed(vessel.volume_m3, surroundings.kind)
    slow, likely, quick = (_after(vessel, seconds * factor, ambient, passed) for factor in (1.0 / SPREAD, 1.0, SPREAD))
    return (start, start, start) if seconds == 0.0 or start == ambient else (slow, likely, quick)


def _after(vessel: Vessel, seconds: float, ambient: float, passed: float) -> float:
    """Temperature after a time, by the logarithm of the share of the difference that is left."""
    start = vessel.temperature_k
    if seconds <= 0.0 or start == ambient:
        return start

    def there(share_log: float) -> float:
        return ambient + (start - ambient) * exp(share_log)

    def late(share_log: float) -> float:
        if share_log >= 0.0:
            return -seconds
        took = seconds_to_reach(vessel, there(share_log), ambient_k=ambient, loss_w_k=passed)
        return -seconds if took is None else took - seconds

    closest = log(_CLOSEST)
    at_closest = late(closest)
    if at_closest <= 0.0:
        return there(closest)
    return there(find_root(late, closest, 0.0, tolerance=1e-4, at_low=at_closest, at_high=-seconds))


def _standing(vessel: Vessel, surroundings: Surroundings, target: float) -> list[str]:
    """Warnings that hold however long it takes."""
    chills = target < vessel.temperature_k
    codes = []
    if surroundings.kind in (FREEZER, MOVED_AIR):
        codes.append("freezer")
    if chills:
        codes += ["cold_hides", "no_dry_ice"]
    elif target > vessel.temperature_k:
        codes.append("no_flame")
    if surroundings.kind == ICED_WATER or target < _ICE + 5.0:
        codes.append("wet")
    if not chills and _becomes_full(vessel, target):
        codes.insert(0, "full_of_liquid")
    if max(target, vessel.temperature_k) >= NEAR_CRITICAL and vessel.net_kg > 0.0:
        codes.append("near_critical")
    return codes


def _becomes_full(vessel: Vessel, target: float) -> bool:
    """Say whether a bottle is full of liquid at a temperature."""
    try:
        temperature, word = one_phase_temperature(vessel.net_kg, vessel.volume_m3)
    except OutOfRange:  # a fill that is one phase at any temperature
        return vessel.net_kg > 1000.0 * vessel.volume_m3
    return word == "liquid-full" and vessel.temperature_k < temperature <= target


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)
