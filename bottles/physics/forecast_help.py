"""What would help: the warmest start and the least supply that still give a full fill."""

from __future__ import annotations

from collections.abc import Callable

from bottles.physics.transfer import Transfer, line_loss
from bottles.physics.vessel import COLDEST, HOTTEST, Vessel
from bottles.physics.withdrawal_stages import mass_without_reach
from bottles.physics.withdrawal_table import Drain, withdrawal_table
from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.fluid import T_SATURATION_MAX
from shop.physics.roots import find_root
from shop.physics.saturation_table import Side, saturated, saturation_table, to_s, to_t

_EVEN = 20.0  # Pa: a thousandth of a kelvin of the receiver's start
_EVEN_FLAT = 1.0  # Pa: a supply's mass may change the end by some hundreds of pascals a kilogram alone
_CONTENTS = 900.0  # J/kg/K: near enough to take steps of temperature by
_NO_FILL = -1e9  # Pa: where the question has no sense


def warmest_receiver(transfer: Transfer, receiver_at: Callable[[float], Vessel], limit_kg: float) -> float | None:
    """Warmest start of the receiver that still gives a full fill in the mixed limit.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line as they are [-]
    receiver_at : callable, the receiver by its temperature [K]
    limit_kg : float, its fill limit [kg]

    Returns
    -------
    float or None, temperature; None where no start between -40 and 52 °C gives one [K]

    Assumptions
    -----------
    The supply as it is; what the receiver starts with follows from `receiver_at`.

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
    near = [transfer]

    def join(temperature_k: float) -> Transfer:
        near[0] = Transfer(
            transfer.source, receiver_at(temperature_k), transfer.line_volume_m3, path=transfer.path, like=near[0]
        )
        return near[0]

    def surplus(temperature_k: float) -> float:
        try:
            return _full_surplus(join(temperature_k), limit_kg)
        except OutOfRange:
            return _NO_FILL

    if limit_kg <= transfer.receiver.net_kg:
        return None
    level = _level_start(transfer, join, limit_kg)
    if level is not None:
        return level
    cold = surplus(COLDEST)
    if cold < 0.0:
        return None
    hot = surplus(HOTTEST)
    if hot >= 0.0:
        return HOTTEST
    return find_root(surplus, COLDEST, HOTTEST, tolerance=2e-3, at_low=cold, at_high=hot)


def least_source(transfer: Transfer, limit_kg: float) -> float | None:
    """Least in the supply that still gives a full fill in the mixed limit.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line; what the supply holds doesn't count [-]
    limit_kg : float, fill limit of the receiver [kg]

    Returns
    -------
    float or None, mass; None where not even a supply full of liquid gives one [kg]

    Assumptions
    -----------
    The supply at its temperature.

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
    source, receiver = transfer.source, transfer.receiver
    room = limit_kg - receiver.net_kg
    if room <= 0.0:
        return None
    full = 750.0
    if source.temperature_k <= T_SATURATION_MAX:
        full = max(full, saturated(source.temperature_k)[1])
    most = full * source.volume_m3
    if most <= room:
        return None
    near = [transfer]

    def surplus(net_kg: float) -> float:
        new = source.changed(net_kg=net_kg)
        if net_kg - line_loss(new, transfer.line_volume_m3) <= room * (1.0 + 1e-9):
            return _NO_FILL
        near[0] = Transfer(new, receiver, transfer.line_volume_m3, like=near[0])
        return _full_surplus(near[0], limit_kg, _EVEN_FLAT)

    # A supply with nothing left has no pressure.
    low, at_low, high, at_high = room, -transfer.path.after(0.0).pressure_pa, most, -1.0
    guess, fall = _least_guess(transfer, room)
    reach = 0.0
    for _ in range(6):
        if guess is None or not low < guess < high:
            break
        at = surplus(guess)
        if at == 0.0:
            return guess
        reach = 4.0 * reach if reach else max(1.3 * abs(at) / fall, 1e-4 * guess)
        if at > 0.0:
            high, at_high, guess = guess, at, guess - reach
        else:
            low, at_low, guess = guess, at, guess + reach
        if at_high > 0.0 and low > room:
            break
    if at_high < 0.0:
        at_high = surplus(most)
    if at_high < 0.0:
        return None
    first = low + (high - low) * at_low / (at_low - at_high) if reach else None
    return find_root(surplus, low, high, tolerance=1e-5 * most, at_low=at_low, at_high=at_high, first=first)


def _full_surplus(transfer: Transfer, limit_kg: float, even: float = _EVEN) -> float:
    """Pressure left over when the receiver is full, or the least of start and end; even is none."""
    room = limit_kg - transfer.receiver.net_kg
    if room <= 0.0 or room > transfer.capacity_kg:
        return _NO_FILL
    full = transfer.surplus(room)
    if full >= 0.0:
        full = min(full, transfer.surplus(0.0))
    return 0.0 if abs(full) < even else full


def _level_start(transfer: Transfer, join: Callable[[float], Transfer], limit_kg: float) -> float | None:
    """Start from which both end with two phases at one temperature; None where they don't."""
    receiver = transfer.receiver
    if receiver.air or limit_kg - receiver.net_kg > transfer.capacity_kg:
        return None
    other, start, heat = transfer, receiver.temperature_k, receiver.wall_j_k + _CONTENTS * receiver.net_kg
    if heat <= 0.0:  # neither wall nor contents: nothing that could be warm or cold
        return None
    for _ in range(5 if heat > 0.0 else 0):
        room = limit_kg - other.receiver.net_kg
        end = transfer.path.after(transfer.line_kg + room)
        t = end.temperature_k
        if t > T_SATURATION_MAX:
            return None
        side = saturated(t)
        if not side[2] < limit_kg / receiver.volume_m3 < side[1] or abs(end.pressure_pa - side[0]) > 1.0:
            return None
        wanted = _wet_energy(side, limit_kg, receiver.volume_m3) + receiver.wall_j_k * t - transfer.gained_j(room)
        step = (wanted - other.receiver_j) / heat
        if abs(step) < 1e-3:
            return start if _full_surplus(other, limit_kg) == 0.0 else None
        before, held = start, other.receiver_j
        start += step
        if not COLDEST <= start <= HOTTEST:
            return None
        other = join(start)
        heat = max((other.receiver_j - held) / (start - before), 0.5 * heat)
    return None


def _least_guess(transfer: Transfer, room: float) -> tuple[float | None, float]:
    """Supply that gives just a full fill, where it and the receiver end with two phases.

    Else the supply whose liquid runs out just then. The second figure is how fast the
    surplus falls with it [Pa/kg].
    """
    source, receiver = transfer.source, transfer.receiver
    t1, v = source.temperature_k, source.volume_m3
    if t1 > T_SATURATION_MAX - 0.5:
        return None, 1.0
    table, start = saturation_table(), saturated(t1)
    outlet, density = (start[3], start[1]) if source.liquid_pickup else (start[4], start[2])
    line = transfer.line_volume_m3 * density
    give = room + line
    drain = Drain(withdrawal_table(liquid=source.liquid_pickup), v, source.wall_j_k, 1.0, t1)
    walls = source.wall_j_k + transfer.receiver_wall_j_k

    def net(s: float) -> float:
        share, rest = drain.parts(s)
        return (give + rest) / (1.0 - share)

    def over(s: float) -> float:
        side, holds = table.side(s), net(s)
        ends = _wet_energy(side, holds - line + receiver.net_kg, v + receiver.volume_m3)
        begins = _wet_energy(start, holds, v) + transfer.receiver_j - line * outlet
        return ends + walls * to_t(s) - source.wall_j_k * t1 - begins

    def above_dry(s: float) -> float:
        below = source.below_tube_m3 if source.liquid_pickup else 0.0
        return net(s) - give - mass_without_reach(table.side(s), v, below)

    low, high = to_s(t1 - 0.05), to_s(max(t1 - 60.0, 185.0))
    try:
        s = find_root(over, low, high, tolerance=1e-6)
        dry = above_dry(s) <= 0.0
        if dry:
            s = find_root(above_dry, low, s, tolerance=1e-6)
    except NoSolution:
        return None, 1.0
    pressure, guess = table.side(s)[0], net(s)
    return guess, pressure / (guess - give) if dry else 1e-2 * pressure / guess


def _wet_energy(side: Side, mass: float, volume: float) -> float:
    """Energy of two phases without their wall."""
    p, rho_l, rho_v, h_l, h_v = side
    q = (h_v - h_l) / (1.0 / rho_v - 1.0 / rho_l)
    return mass * (h_l - q / rho_l) + volume * (q - p)
