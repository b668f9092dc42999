"""The likely course for a page: between the two limits' own courses, by the condensation figure."""

from __future__ import annotations

import numpy as np

from bottles.physics.condensation import between
from bottles.physics.course import Course, seconds_until
from bottles.physics.hose import LEAST_FLOW, MOST_FLOW, flow_between, line_flow
from bottles.physics.transfer import EQUAL, FILL_LIMIT, LIQUID_OUT, NO_DIFFERENCE, Transfer
from bottles.physics.wall_condensing import Mark
from shop.physics.errors import OutOfRange
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine

_POINTS = 18


def likely_course(
    transfer: Transfer, limit_kg: float, figure: float, cd_area_m2: float, points: int = _POINTS
) -> Course:
    """Course that ends at the likely mass, drawn between the limits' courses.

    Parameters
    ----------
    transfer : Transfer, both bottles and the line; what it found already is used again [-]
    limit_kg : float, fill limit of the receiver [kg]
    figure : float, condensation figure [-]
    cd_area_m2 : float, discharge coefficient times area of the line [m2]
    points : int, moments of the course [-]

    Returns
    -------
    Course, times [s], masses [kg], flow [kg/s], absolute pressures [Pa], temperatures [K]

    Assumptions
    -----------
    Ends at wall + c (mixed - wall), capped by the limit. At each share of its way the gap in
    pressure, as a share of the supply's, and the receiver's temperature lie between the two
    limits' own at that share, in proportion to the figure; the supply follows its own path
    without heat from outside.
    A supply without liquid follows the mixed limit as far as the likely mass. The flow is
    `line_flow`.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `hose`, `condensation`, or a state out of range.
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model.
    """
    if not cd_area_m2 > 0.0 or points < 3:
        raise OutOfRange("hose", "A line lets something through. Check hose, bore and valves, and their units.")
    if not 0.0 <= figure <= 1.0:
        raise OutOfRange("condensation", "A condensation figure lies between 0 and 1. Check the figure.")
    room = limit_kg - transfer.receiver.net_kg
    quick = transfer.mixed_free_kg()
    wet = transfer.path.after(transfer.line_kg).liquid
    likely = between(transfer.cautious_free_kg(), quick, figure) if figure < 1.0 else quick
    figure = figure if wet else 1.0
    slow = transfer.slow_free_kg() if figure < 1.0 else quick
    most = likely if wet else quick
    if room <= 0.0 or likely <= 0.0:
        flows = LIQUID_OUT if quick > 0.0 else NO_DIFFERENCE
        return _still(transfer, FILL_LIMIT if room <= 0.0 else flows)
    # Close together at the end, where flow dies away like a root.
    way = 1.0 - (1.0 - np.linspace(0.0, 1.0, points)) ** 2
    if min(room, likely) < most:
        way = np.linspace(0.0, 1.0, points) * (min(room, likely) / most)
    dry = (transfer.path.dry_out() - transfer.line_kg) / most if wet else 0.0
    if 0.0 < dry < way[-1]:
        way = np.union1d(way, [dry])
    rows: list[tuple[float, ...]] = []
    seconds = flow = 0.0
    spread = LEAST_FLOW, MOST_FLOW
    marks = _columns(transfer.slow_marks()) if figure < 1.0 else None
    for index, share in enumerate(way):
        moved = float(share * most)
        given = transfer.path.after(transfer.line_kg + moved)
        gap, kelvin = _between_limits(transfer, float(share), (slow, quick), figure, marks)
        pressure = given.pressure_pa * (1.0 - gap)
        source = transfer.source
        density = (source.net_kg - transfer.line_kg - moved) / source.volume_m3
        ahead = wet and (index == 0 or share <= dry)
        density = _enters(density, given.temperature_k, liquid=ahead)
        if index == len(way) // 2:
            spread = flow_between(density, given.temperature_k, pressure)
        last, flow = flow, line_flow(cd_area_m2, density, given.temperature_k, pressure)
        if index:
            seconds += 2.0 * (moved - rows[-1][1]) / max(last + flow, 1e-12)
        rows.append((seconds, moved, flow, given.pressure_pa, pressure, given.temperature_k, kelvin))
        if ahead and share == dry:
            vapour = _enters(0.0, given.temperature_k, liquid=False)
            flow = line_flow(cd_area_m2, vapour, given.temperature_k, pressure)
    stopped = FILL_LIMIT if room <= likely else EQUAL
    if stopped == EQUAL and rows[-1][3] - rows[-1][4] > 1e3:
        stopped = LIQUID_OUT
    return _course(rows, stopped, spread, liquid_out=not given.liquid)


def _columns(marks: list[Mark]) -> tuple[list[float], list[float], list[float]]:
    """The cautious limit's course: mass, gap as a share of the supply's pressure, temperature."""
    gaps = [m.surplus_pa / (m.surplus_pa + m.pressure_pa) for m in marks]
    return [m.moved_kg for m in marks], gaps, [m.temperature_k for m in marks]


def _between_limits(
    transfer: Transfer,
    share: float,
    ends: tuple[float, float],
    figure: float,
    marks: tuple[list[float], list[float], list[float]] | None,
) -> tuple[float, float]:
    """Gap as a share of the supply's pressure, and the receiver's temperature, at a share of the way."""
    slow, quick = ends
    gap = kelvin = 0.0
    if figure > 0.0:
        there = share * quick
        kelvin, pressure = transfer.mixed_receiver(there)
        gap = max(1.0 - pressure / transfer.path.after(transfer.line_kg + there).pressure_pa, 0.0)
    if marks is None:
        return gap, kelvin
    moved, gaps, temperatures = marks
    other_gap = max(float(np.interp(share * slow, moved, gaps)), 0.0)
    other = float(np.interp(share * slow, moved, temperatures))
    return other_gap + figure * (gap - other_gap), other + figure * (kelvin - other)


def _enters(density: float, temperature: float, *, liquid: bool) -> float:
    """Density of the phase that enters the line."""
    if temperature <= T_SATURATION_MAX:
        _, rho_l, rho_v, _, _ = engine().saturation(max(temperature, T_TRIPLE))
        if density < rho_l and (liquid or density > rho_v or density == 0.0):
            return rho_l if liquid else rho_v
    return density


def _still(transfer: Transfer, stopped: str) -> Course:
    """Nothing moves: one moment."""
    given = transfer.path.after(0.0)
    kelvin, pressure = transfer.mixed_receiver(0.0)
    row = (0.0, 0.0, 0.0, given.pressure_pa, pressure, given.temperature_k, kelvin)
    return _course([row], stopped, (LEAST_FLOW, MOST_FLOW), liquid_out=not given.liquid)


def _course(rows: list[tuple[float, ...]], stopped: str, spread: tuple[float, float], *, liquid_out: bool) -> Course:
    """Moments as columns."""
    seconds, moved, flow, p1, p2, t1, t2 = np.array(rows).T
    reached = stopped == FILL_LIMIT and moved[-1] > 0.0
    return Course(
        seconds, moved, flow, p1, p2, t1, t2, None, stopped, liquid_out, seconds_until(seconds, moved, 0.9),
        float(seconds[-1]) if reached else None, spread,
    )  # fmt: skip
