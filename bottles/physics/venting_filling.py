"""Letting vapour out of the bottle to fill while it fills, so that more liquid enters.

At equal pressures nothing more goes over. Vapour let out of the bottle to fill makes room,
at the supply's pressure, for liquid. Both bottles stay at one pressure; the course is
followed by what the supply has given. While the bottle to fill holds both phases its
temperature is that pressure's, its energy is linear in its mass, and each step is explicit.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from bottles.physics.joining import Transfer
from bottles.physics.transfer import FILL_LIMIT, LIQUID_OUT, NO_DIFFERENCE
from bottles.physics.venting_words import SENTENCES
from bottles.physics.vessel import Vessel, pressure_and_energy
from bottles.physics.withdrawal import Adiabatic
from shop.physics.fluid import P_CRITICAL, P_TRIPLE, T_MAX, T_SATURATION_MAX, engine
from shop.physics.roots import find_root

RECEIVER_FULL = "full of liquid"
_STEPS = 24
_FULL = 1.0 - 1e-3  # share of the liquid's density at which no vapour is left to let out


@dataclass(frozen=True, slots=True)
class VentWhileFilling:
    """The least vented that gives a full fill, or what there is to be had."""

    vented_kg: float
    vented_j: float
    moved_kg: float
    gain_kg: float
    receiver_final_kg: float
    receiver_final_k: float
    source_left_kg: float
    source_final_k: float
    final_pa: float
    fills: bool
    stopped_by: str
    slow_vented_kg: float | None
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON; pressures absolute."""
        return {
            "vented_kg": self.vented_kg,
            "moved_kg": self.moved_kg,
            "gain_kg": self.gain_kg,
            "receiver_final_kg": self.receiver_final_kg,
            "receiver_final_c": self.receiver_final_k - 273.15,
            "source_left_kg": self.source_left_kg,
            "source_final_c": self.source_final_k - 273.15,
            "final_bar": self.final_pa / 1e5,
            "fills": self.fills,
            "stopped_by": self.stopped_by,
            "slow_vented_kg": self.slow_vented_kg,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


@dataclass(frozen=True, slots=True)
class _Point:
    """One moment: what was given, what was let out, and the bottle to fill."""

    given: float
    vented: float
    vented_j: float
    mass: float
    energy: float
    temperature: float
    outlet: float


def vent_while_filling(transfer: Transfer, limit_kg: float) -> VentWhileFilling:
    """Find the least vapour to let out while filling that gives a full fill.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line [-]
    limit_kg : float, fill limit of the bottle to fill [kg]

    Returns
    -------
    VentWhileFilling, masses [kg], temperatures [K], pressure of both bottles [Pa], energy
    that left with the vapour [J]; `slow_vented_kg` is a rough figure for vapour that is slow
    to condense, None where that would never be full [kg]

    Assumptions
    -----------
    Quick, as the mixed limit: each bottle uniform with its wall, no heat from outside.
    Vapour is let out only at equal pressures, so that none is lost that would have
    condensed. A bottle to fill that stands above the supply is first vented down to it.
    The slow figure is vapour displaced by its own volume of liquid at the slow end.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C; pressures below the critical; no air. Outside of that
    nothing is vented and a warning says why.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics.
    """
    receiver, line = transfer.receiver, transfer.line_kg
    plain = transfer.mixed_free_kg()
    room = limit_kg - receiver.net_kg
    if room <= 0.0 or plain >= room:
        return _plain(transfer, max(min(plain, room), 0.0), FILL_LIMIT, ["nothing_to_vent"], limit_kg)
    stopped = NO_DIFFERENCE if plain <= 0.0 else "pressures equal"
    after = transfer.path.after(line + plain)
    if receiver.air:
        return _plain(transfer, plain, stopped, ["air"])
    if after.pressure_pa >= 0.999 * P_CRITICAL:
        return _plain(transfer, plain, stopped, ["near_critical"])
    wet = transfer.path.dry_out() - line
    if not after.liquid or plain >= wet * (1.0 - 1e-9):
        return _plain(transfer, plain, LIQUID_OUT, ["no_source_liquid"])
    points, stopped = _course(transfer, _start(transfer, plain), line + wet, limit_kg)
    best = max(points, key=lambda point: point.mass)
    codes = ["outdoors", "cold", "watch_the_scale"]
    if stopped != FILL_LIMIT:
        codes.append("never_full")
    source = transfer.path.after(best.given)
    return VentWhileFilling(
        best.vented, best.vented_j, best.given - line, best.mass - receiver.net_kg - plain, best.mass,
        best.temperature, transfer.source.net_kg - best.given, source.temperature_k, source.pressure_pa,
        stopped == FILL_LIMIT, stopped, _displaced(transfer, limit_kg, best.vented, wet),
        _told(codes),
    )  # fmt: skip


def _plain(
    transfer: Transfer, moved: float, stopped: str, codes: list[str], limit: float | None = None
) -> VentWhileFilling:
    """Nothing is vented: the end as it is without."""
    slow = None
    if limit is not None and moved > 0.0 and not transfer.receiver.air and transfer.path.after(0.0).liquid:
        slow = _displaced(transfer, limit, 0.0, transfer.path.dry_out() - transfer.line_kg)
    given = moved + transfer.line_kg if moved > 0.0 else 0.0
    source = transfer.path.after(given)
    t, p = transfer.mixed_receiver(moved)
    return VentWhileFilling(
        0.0, 0.0, moved, 0.0, transfer.receiver.net_kg + moved, t, transfer.source.net_kg - given,
        source.temperature_k, p, stopped == FILL_LIMIT, stopped, slow, _told(codes),
    )  # fmt: skip


def _start(transfer: Transfer, plain: float) -> _Point:
    """Both at one pressure: after the plain transfer, or after venting down to the supply."""
    receiver, given = transfer.receiver, transfer.line_kg + plain
    vented = vented_j = 0.0
    if plain > 0.0:
        mass, t = receiver.net_kg + plain, transfer.mixed_receiver(plain)[0]
    else:
        aim = transfer.path.after(given).pressure_pa
        mass, t = receiver.net_kg, receiver.temperature_k
        path = Adiabatic(replace(receiver, liquid_pickup=False))
        above = path.after(0.0).pressure_pa - aim
        if above > 1e-9 * aim:
            most = mass * (1.0 - 1e-6)
            vented = find_root(
                lambda y: path.after(y).pressure_pa - aim, 0.0, most, tolerance=1e-8 * most, at_low=above
            )  # fmt: skip
        after = path.after(vented)
        mass, t, vented_j = mass - vented, after.temperature_k, after.energy_given_j
    energy = pressure_and_energy(receiver.volume_m3, mass, t)[1] + receiver.wall_j_k * t
    return _Point(given, vented, vented_j, mass, energy, t, _outlet(receiver.volume_m3, mass, t))


def _outlet(volume: float, mass: float, temperature: float) -> float:
    """Enthalpy of the vapour that is let out."""
    fluid = engine()
    if temperature <= T_SATURATION_MAX:
        side = fluid.saturation(temperature)
        if mass / volume > side[2]:
            return side[4]
    pressure, energy = fluid.pressure_energy(mass / volume, temperature)
    return energy + pressure * volume / mass


def _course(transfer: Transfer, start: _Point, end: float, limit: float) -> tuple[list[_Point], str]:
    """Follow both bottles at one pressure, to the limit or as far as there is liquid."""
    points = [start]
    step = (end - start.given) / _STEPS
    # The far end may be many times what is needed: no step larger than a twentieth of the want.
    step = min(step, max(0.05 * (limit - start.mass), 1e-4 * (end - start.given)))
    while True:
        before = points[-1]
        if before.mass >= limit * (1.0 - 1e-12):
            return points, FILL_LIMIT
        if before.given >= end * (1.0 - 1e-9):
            return points, LIQUID_OUT
        given = min(before.given + step, end)
        after = _step(transfer, before, given)
        if after is None:
            return points, RECEIVER_FULL
        if after.mass >= limit:
            return [*points, _at_limit(transfer, before, after, limit)], FILL_LIMIT
        points.append(after)
        step *= 1.25 if len(points) > 2 * _STEPS else 1.0


def _at_limit(transfer: Transfer, before: _Point, after: _Point, limit: float) -> _Point:
    """The point between two at which the limit is reached."""

    def past(given: float) -> float:
        point = _step(transfer, before, given)
        return (before.mass if point is None else point.mass) - limit

    given = find_root(
        past, before.given, after.given,
        tolerance=1e-9 * limit, at_low=before.mass - limit, at_high=after.mass - limit,
    )  # fmt: skip
    return _step(transfer, before, given) or after


def _step(transfer: Transfer, before: _Point, given: float) -> _Point | None:
    """One step of what the supply gives; None where no vapour is left to let out."""
    receiver = transfer.receiver
    source = transfer.path.after(given)
    arrived = given - before.given
    mass = before.mass + arrived
    energy = before.energy + source.energy_given_j - transfer.path.after(before.given).energy_given_j
    p, t = source.pressure_pa, source.temperature_k
    fluid = engine()
    side = fluid.saturation(min(t, T_SATURATION_MAX))
    if abs(side[0] - p) > 1e-7 * p:
        t = fluid.boiling_temperature(min(max(p, P_TRIPLE), 0.9999 * P_CRITICAL))
        side = fluid.saturation(t)
    p, rho_l, rho_v, h_l, h_v = side
    q = (h_v - h_l) / (1.0 / rho_v - 1.0 / rho_l)
    a, k = h_l - q / rho_l, q - p
    outlet = 0.5 * (before.outlet + h_v)
    vented = (mass * a + receiver.volume_m3 * k + receiver.wall_j_k * t - energy) / (a - outlet)
    out = h_v
    if mass - vented < rho_v * receiver.volume_m3:
        vented, t, out = _dry(receiver, before, mass, energy, (p, t, rho_v, h_v))
        outlet = 0.5 * (before.outlet + out)
    left = mass - vented
    if left > _FULL * rho_l * receiver.volume_m3:
        return None
    lost = vented * outlet
    return _Point(given, before.vented + vented, before.vented_j + lost, left, energy - lost, t, out)


def _dry(
    receiver: Vessel, before: _Point, mass: float, energy: float, edge: tuple[float, float, float, float]
) -> tuple[float, float, float]:
    """Let vapour out of a bottle too warm for liquid: what leaves, temperature, enthalpy."""
    p, t_sat, rho_v, h_v = edge
    fluid, volume = engine(), receiver.volume_m3

    def vapour(t: float) -> tuple[float, float]:
        if t <= t_sat + 2e-3:
            return rho_v, h_v
        density = fluid.density(p, t)
        return density, fluid.state().enthalpy

    def surplus(t: float) -> float:
        density, enthalpy = vapour(t)
        out = mass - density * volume
        held = density * volume * (enthalpy - p / density) + receiver.wall_j_k * t
        return held + out * 0.5 * (before.outlet + enthalpy) - energy

    low, t = surplus(t_sat), t_sat
    if low < 0.0:
        t = find_root(surplus, t_sat, min(before.temperature + 60.0, T_MAX), tolerance=1e-7, at_low=low)
    density, enthalpy = vapour(t)
    return mass - density * volume, t, enthalpy


def _displaced(transfer: Transfer, limit: float, least: float, wet: float) -> float | None:
    """Vapour that liquid must push out at the slow end, roughly."""
    last = transfer.slow_marks()[-1]
    short = limit - transfer.receiver.net_kg - transfer.slow_free_kg()
    if short <= 0.0 or not P_TRIPLE < last.pressure_pa < P_CRITICAL:
        return least if short <= 0.0 else None
    _, rho_l, rho_v, _, _ = engine().saturation(engine().boiling_temperature(last.pressure_pa))
    out = short / (rho_l / rho_v - 1.0)
    return max(out, least) if transfer.slow_free_kg() + short + out <= wet else None


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)
