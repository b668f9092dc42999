"""A bottle that warms: to a target pressure by a heater, or in a room until it is full of liquid."""

from __future__ import annotations

from dataclasses import dataclass
from math import expm1, log, log1p, pi

from bottles.physics.contents import NEAR_CRITICAL, one_phase_temperature, pressures_when_hot
from bottles.physics.heating_words import SENTENCES
from bottles.physics.vessel import HOTTEST, Vessel, pressure_and_energy
from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.fluid import P_MAX, T_MAX
from shop.physics.roots import find_root

ROOM_TRANSFER = 10.0  # W/m2/K, still air and radiation together (common practice, no source)
_PIECES = 40


@dataclass(frozen=True, slots=True)
class Heating:
    """What it takes to warm a bottle to a pressure."""

    temperature_k: float
    energy_j: float
    seconds: float | None
    one_phase_at_k: float | None
    becomes: str | None
    pressure_at_55_pa: float | None
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON; pressures absolute."""
        one, hot = self.one_phase_at_k, self.pressure_at_55_pa
        return {
            "temperature_c": self.temperature_k - 273.15,
            "energy_kj": self.energy_j / 1e3,
            "minutes": None if self.seconds is None else self.seconds / 60.0,
            "one_phase_at_c": None if one is None else one - 273.15,
            "becomes": self.becomes,
            "pressure_at_55c_bar": None if hot is None else hot / 1e5,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


@dataclass(frozen=True, slots=True)
class Overfull:
    """A bottle above its limit: how much must come out, and how long there is."""

    must_come_out_kg: float
    pressure_pa: float
    full_now: bool
    full_at_k: float | None
    seconds_until_full: float | None


def room_loss(volume_m3: float) -> float:
    """Heat that passes between a standing bottle and a room, a kelvin of difference.

    Parameters
    ----------
    volume_m3 : float, water capacity [m3]

    Returns
    -------
    float, watts a kelvin [W/K]

    Assumptions
    -----------
    A cylinder four times as long as wide, 10 W/m2/K of still air and radiation together.

    Valid for
    ---------
    Bottles of 0.3 to 60 L standing free indoors; frost, wind and sun change it.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Common practice, no source.
    """
    diameter = float((volume_m3 / pi) ** (1.0 / 3.0))
    return ROOM_TRANSFER * 4.5 * pi * diameter * diameter


def seconds_to_reach(
    vessel: Vessel, target_k: float, *, ambient_k: float, loss_w_k: float, watts: float = 0.0
) -> float | None:
    """Time that a bottle takes to a temperature.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    target_k : float, temperature to reach [K]
    ambient_k : float, temperature of the room [K]
    loss_w_k : float, heat passed a kelvin of difference [W/K]
    watts : float, heat put in besides [W]

    Returns
    -------
    float or None, time; None where it never gets there [s]

    Assumptions
    -----------
    Contents and wall at one temperature; heat passed is proportional to the difference.
    Between knots the heat that a kelvin takes is constant, each piece then being exact.

    Valid for
    ---------
    Two phases and one, up to 500 bar.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`.

    References
    ----------
    Newton's law of cooling, any text on heat transfer.
    """
    t0 = vessel.temperature_k
    power = (watts - loss_w_k * (t0 - ambient_k), watts - loss_w_k * (target_k - ambient_k))
    if target_k == t0:
        return 0.0
    # The same sign all the way, the sign of the wanted change: else it stops short.
    if min(power) * max(power) <= 0.0 or (power[0] > 0.0) != (target_k > t0):
        return None
    ratio = log(power[1] / power[0])
    if abs(ratio) < 1e-9:
        return (_energy(vessel, target_k) - _energy(vessel, t0)) / power[0]
    seconds, before = 0.0, (_energy(vessel, t0), power[0])
    for piece in range(1, _PIECES + 1):
        # Knots even in the logarithm of the power, which is where the time goes.
        part = expm1(ratio * piece / _PIECES)
        t = t0 + (target_k - t0) * part / expm1(ratio)
        after = (_energy(vessel, t), power[0] * (1.0 + part))
        change = after[1] - before[1]
        mean = change / log1p(change / before[1])
        seconds += (after[0] - before[0]) / mean
        before = after
    return seconds


def heat_to_pressure(
    vessel: Vessel,
    target_pa: float,
    *,
    watts: float,
    ambient_k: float,
    loss_w_k: float | None = None,
) -> Heating:
    """Temperature, energy and time that bring a bottle to a pressure.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    target_pa : float, absolute pressure wanted [Pa]
    watts : float, heat that the heater puts into the bottle [W]
    ambient_k : float, temperature of the room [K]
    loss_w_k : float or None, heat lost a kelvin above the room; by size without [W/K]

    Returns
    -------
    Heating, temperature [K], energy of contents and wall [J], time [s], pressure [Pa]

    Assumptions
    -----------
    By the equation of state at the bottle's own fill: near the critical point a full bottle
    is one phase and has no vapour pressure, and a nearly empty one boils dry. Contents and
    wall at one temperature.

    Valid for
    ---------
    Bottles between -40 and 52 °C at the start, up to 500 bar.

    Raises
    ------
    OutOfRange
        `pressure_range`, `power`, `empty`.
    NoSolution
        `pressure_unreachable` where no temperature in range gives that pressure.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850; 52 °C as highest temperature of a
    bottle: common practice.
    """
    if not 0.0 < target_pa <= P_MAX:
        raise OutOfRange("pressure_range", "A target between nothing and 500 bar is needed.")
    if not (watts >= 0.0 and (loss_w_k is None or loss_w_k >= 0.0)):
        raise OutOfRange("power", "Power and loss can't be below nothing. Check both.")
    if vessel.net_kg <= 0.0:
        raise OutOfRange("empty", "An empty bottle shows no pressure however warm. Weigh it.")
    volume, net = vessel.volume_m3, vessel.net_kg

    def surplus(temperature: float) -> float:
        return pressure_and_energy(volume, net, temperature)[0] - target_pa

    codes: list[str] = []
    seconds: float | None
    start = vessel.temperature_k
    if surplus(start) >= 0.0:
        target, energy, seconds = start, 0.0, 0.0
        codes.append("already_there")
    else:
        if surplus(T_MAX) < 0.0:
            raise NoSolution(
                "pressure_unreachable",
                "So little nitrous doesn't reach that pressure however warm. Refill the bottle.",
            )
        target = find_root(surplus, start, T_MAX, tolerance=1e-6)
        energy = _energy(vessel, target) - _energy(vessel, start)
        loss = room_loss(volume) if loss_w_k is None else loss_w_k
        seconds = seconds_to_reach(vessel, target, ambient_k=ambient_k, loss_w_k=loss, watts=watts)
        if seconds is None:
            codes.append("never_gets_there")
    one_phase, becomes = _one_phase(net, volume)
    if target > HOTTEST:
        codes.append("above_52")
    if one_phase is not None and start < one_phase < target:
        codes.append("full_of_liquid" if becomes == "liquid-full" else "boils_dry")
    if target >= NEAR_CRITICAL:
        codes.append("near_critical")
    return Heating(
        target, energy, seconds, one_phase, becomes,
        pressures_when_hot(net, volume, (328.15,))[0],
        tuple((code, SENTENCES[code]) for code in codes),
    )  # fmt: skip


def overfull(vessel: Vessel, limit_kg: float, *, ambient_k: float, loss_w_k: float | None = None) -> Overfull:
    """How much must come out of a bottle, and how long until it is full of liquid.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    limit_kg : float, its fill limit [kg]
    ambient_k : float, temperature of the room [K]
    loss_w_k : float or None, heat passed a kelvin of difference; by size without [W/K]

    Returns
    -------
    Overfull, mass [kg], pressure now [Pa], temperature [K], time; None where this room
    doesn't warm it so far [s]

    Assumptions
    -----------
    Left alone in the room; contents and wall at one temperature.

    Valid for
    ---------
    Bottles between -40 and 52 °C.

    Raises
    ------
    OutOfRange
        Where the bottle's state is out of range.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850; heat passed: common practice.
    """
    volume, net = vessel.volume_m3, vessel.net_kg
    one_phase, becomes = _one_phase(net, volume)
    pressure = pressure_and_energy(volume, net, vessel.temperature_k)[0]
    out = max(0.0, net - limit_kg)
    if becomes != "liquid-full" or one_phase is None:
        return Overfull(out, pressure, False, None, None)
    if vessel.temperature_k >= one_phase:
        return Overfull(out, pressure, True, one_phase, 0.0)
    loss = room_loss(volume) if loss_w_k is None else loss_w_k
    seconds = seconds_to_reach(vessel, one_phase, ambient_k=ambient_k, loss_w_k=loss)
    return Overfull(out, pressure, False, one_phase, seconds)


def _energy(vessel: Vessel, temperature: float) -> float:
    """Energy of contents and wall."""
    contents = pressure_and_energy(vessel.volume_m3, vessel.net_kg, temperature)[1]
    return contents + vessel.wall_j_k * temperature


def _one_phase(net_kg: float, volume_m3: float) -> tuple[float | None, str | None]:
    """Temperature of one phase and its word; none for a fill that is one phase at any."""
    try:
        return one_phase_temperature(net_kg, volume_m3)
    except OutOfRange:
        return None, None
