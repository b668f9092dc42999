"""The stages of a bottle that gives nitrous without heat from outside: two phases, or one."""

from __future__ import annotations

from bottles.physics.vessel import pressure_and_energy
from bottles.physics.withdrawal_table import Drain, withdrawal_table
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.roots import find_root
from shop.physics.saturation_table import Side, saturated, saturation_table, to_s, to_t
from shop.physics.states import RHO_CRITICAL

_STEP, _STEP_THIN = 0.12, 0.25  # share of the mass that one step in one phase may take; in thin vapour
_PROBES = (0.0, 1e-3, 0.03, 0.2, 0.5)  # share of a step
_RISE = (1e-3, 1e-2, 0.1, 0.3, 1.0, 3.0, 10.0, 30.0)  # K below saturation, where a level is looked for


class TwoPhase:
    """Liquid and vapour, one of which is drawn: closed, by the table.

    It ends where that phase can't be drawn any more: liquid at the dip tube's end, else with
    the liquid; or, where liquid gathers below the tube first, where its level comes to the end.
    """

    def __init__(
        self, volume: float, wall: float, mass: float, temperature: float, side: Side, *, liquid: bool, below: float
    ) -> None:
        self._v, self._below = volume, below
        self.liquid, self.rises = liquid, False
        self._top = (mass, temperature)
        self._drain = Drain(withdrawal_table(liquid=liquid), volume, wall, mass, temperature)
        self._end: tuple[float, float] | None = None
        self._past = T_TRIPLE  # a temperature at which the stage is over, where one was met
        self._read = saturation_table().side
        self._known = (mass, temperature, side)

    @property
    def dries(self) -> bool:
        """Say whether vapour alone is left at its end."""
        return not self.rises and not (self.liquid and self._below)

    def rise_to_tube(self) -> None:
        """End where liquid that gathers comes up to the dip tube's end, if it ever does."""
        top, below = self._top[1], self._below

        def over(t: float) -> float:
            return self._drain.mass_at(t) - mass_without_reach(saturated(t), self._v, below)

        before = top
        for colder in _RISE:
            t = max(top - colder, T_TRIPLE)
            if over(t) > 0.0:
                t = find_root(over, t, before, tolerance=1e-7) if over(before) < 0.0 else t
                self.rises, self._end = True, (self._drain.mass_at(t), t)
                return
            before = t

    def _at(self, left: float) -> tuple[float, float, Side]:
        """Mass, temperature and saturated states, kept for the next question of the same mass."""
        if self._known[0] != left:
            s = self._drain.s_at(left)
            self._known = (left, to_t(s), self._read(s))
        return self._known

    def _least(self, side: Side) -> float:
        """Mass at which the stage is over, at a temperature's saturated states."""
        return mass_without_reach(side, self._v, self._below if self.liquid else 0.0)

    def left_at(self, s: float) -> float | None:
        """Mass left at a temperature, where this stage goes through it."""
        if s < to_s(self._top[1]):
            return None
        left = self._drain.mass_and_slope(s)[0]
        if self._end is None:
            return left if left >= self._least(self._read(s)) else None
        return left if left >= self._end[0] else None

    def reaches(self, left: float) -> bool:
        """Say whether this stage goes on with a mass left."""
        if self._end is None:
            _, temperature, side = self._at(left)
            if temperature > T_TRIPLE + 1e-9:
                # Rounding at the very start of what gathers mustn't pass for its end.
                if left >= self._least(side) * (1.0 - 1e-12):
                    return True
                self._past = temperature
            return left >= self.end[0]
        return left >= self._end[0]

    @property
    def end(self) -> tuple[float, float]:
        """Mass and temperature where it ends."""
        if self._end is None:
            read, drain = self._read, self._drain

            def over(s: float) -> float:
                return drain.mass_and_slope(s)[0] - self._least(read(s))

            cold = to_s(T_TRIPLE)
            past = to_s(self._past)
            at_past = over(past)
            if at_past >= 0.0 and past < cold:
                past, at_past = cold, over(cold)
            if at_past >= 0.0:
                self._end = (0.0, T_TRIPLE)
            else:
                # A sliver of liquid may end just below the start; what gathers begins there.
                start = to_s(self._top[1])
                later = to_s(self._top[1] - 1e-3)
                at_later = over(later)
                if at_later > 0.0:
                    # Cooler than where the stage is over, whichever side of `past` that is.
                    s = find_root(over, past, later, tolerance=1e-10, at_low=at_past, at_high=at_later)
                elif over(start) > 0.0:
                    s = find_root(over, later, start, tolerance=1e-12)
                else:
                    s = start
                self._end = (self._least(read(s)), to_t(s))
        return self._end

    def state(self, left: float) -> tuple[float, float, float, float, bool]:
        """Temperature, pressure, energy, enthalpy of what leaves, liquid or not."""
        _, temperature, side = self._at(left)
        p, rho_l, rho_v, h_l, h_v = side
        q = (h_v - h_l) / (1.0 / rho_v - 1.0 / rho_l)
        energy = left * (h_l - q / rho_l) + self._v * (q - p)
        liquid = self.liquid and left > self._least(side) * (1.0 + 1e-9)
        return temperature, p, energy, h_l if self.liquid else h_v, liquid


class OnePhase:
    """One phase, drawn as it is, by steps of Runge and Kutta in mass."""

    def __init__(self, volume: float, wall: float, mass: float, temperature: float) -> None:
        self._v, self._c = volume, wall
        slope = _one_phase_slope(volume, wall, mass, temperature)
        self._nodes = [(mass, temperature, slope)]
        self._end: tuple[float, float] | None = None
        self.thin = mass < RHO_CRITICAL * volume  # vapour, or a fluid as thin

    def reaches(self, left: float) -> bool:
        """Say whether it's still one phase with a mass left."""
        while self._end is None and self._nodes[-1][0] > left:
            self._extend()
        return left >= (self._end or self._nodes[-1])[0]

    @property
    def end(self) -> tuple[float, float]:
        """Mass and temperature where a second phase appears."""
        while self._end is None and self._nodes[-1][0] > 1e-7 * self._nodes[0][0]:
            self._extend()
        return self._end or (0.0, self._nodes[-1][1])

    def _extend(self) -> None:
        """One step further; past saturation the phase is followed as if it were alone."""
        m, t, k1 = self._nodes[-1]
        v, c = self._v, self._c
        dm = -m * (_STEP if m > 0.5 * RHO_CRITICAL * v else _STEP_THIN)
        k2 = _one_phase_slope(v, c, m + 0.5 * dm, t + 0.5 * dm * k1)
        k3 = _one_phase_slope(v, c, m + 0.5 * dm, t + 0.5 * dm * k2)
        k4 = _one_phase_slope(v, c, m + dm, t + dm * k3)
        new = (m + dm, max(t + dm * (k1 + 2.0 * (k2 + k3) + k4) / 6.0, T_TRIPLE))
        self._nodes.append((*new, _one_phase_slope(v, c, *new)))
        if _room(v, *new) < 0.0:
            self._end = self._crossing(m, m + dm)

    def _crossing(self, m: float, past: float) -> tuple[float, float]:
        """Mass and temperature where saturation is met in the last step."""
        v = self._v

        def room(left: float) -> float:
            return _room(v, left, self._temperature(left))

        # A stage may begin on saturation itself, leave it, and come back.
        clear = next((left for left in (m + share * (past - m) for share in _PROBES) if room(left) > 0.0), None)
        if clear is None:
            return m, self._temperature(m)
        edge = find_root(room, past, clear, tolerance=1e-9 * m)
        return edge, self._temperature(edge)

    def _temperature(self, left: float) -> float:
        """Temperature between two steps."""
        nodes = self._nodes
        if len(nodes) == 1 or left >= nodes[0][0]:
            return nodes[0][1]
        index = 1
        while index < len(nodes) - 1 and nodes[index][0] > left:
            index += 1
        (m0, t0, d0), (m1, t1, d1) = nodes[index - 1], nodes[index]
        h = m1 - m0
        x = (left - m0) / h
        rise = x * x * (3.0 - 2.0 * x) * (t1 - t0)
        curve = h * (x * (1.0 - x) ** 2 * d0 + x * x * (x - 1.0) * d1)
        return max(t0 + rise + curve, T_TRIPLE)

    def state(self, left: float) -> tuple[float, float, float, float, bool]:
        """Temperature, pressure, energy, enthalpy of what leaves, liquid or not."""
        temperature = self._temperature(left)
        pressure, energy = pressure_and_energy(self._v, left, temperature)
        liquid = left / self._v > RHO_CRITICAL
        return temperature, pressure, energy, (energy + pressure * self._v) / left, liquid


def mass_without_reach(side: Side, volume: float, below: float) -> float:
    """Mass of a bottle whose liquid stands at its dip tube's end.

    Parameters
    ----------
    side : tuple of float, saturated states [Pa, kg/m3, J/kg]
    volume : float, inside volume [m3]
    below : float, liquid that the tube's end doesn't reach; 0 to its last drop [m3]

    Returns
    -------
    float, mass of liquid and vapour [kg]

    Assumptions
    -----------
    The bottle stands still and upright, its liquid level.

    Valid for
    ---------
    Two phases.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Mass balance, any text on thermodynamics.
    """
    return side[2] * volume + below * (side[1] - side[2])


def _room(volume: float, mass: float, temperature: float) -> float:
    """How far one phase is from a second one, as a density; below nothing past saturation."""
    if temperature > T_SATURATION_MAX:
        return 1.0
    _, rho_l, rho_v, _, _ = saturated(max(temperature, T_TRIPLE))
    density = mass / volume
    return density - rho_l if 2.0 * density > rho_l + rho_v else rho_v - density


def _one_phase_slope(volume: float, wall: float, mass: float, temperature: float) -> float:
    """Kelvin a kilogram, while one phase is drawn as it is."""
    density = mass / volume
    _, heat, rise = engine().one_phase_slopes(density, max(temperature, T_TRIPLE))
    return temperature * rise / (density * (mass * heat + wall))


def gets_wet(volume: float, wall: float, mass: float, temperature: float) -> bool:
    """Say whether saturated vapour gets wet while it's drawn: it cools faster than it dries.

    Parameters
    ----------
    volume : float, inside volume [m3]
    wall : float, heat capacity of the wall [J/K]
    mass : float, vapour in it [kg]
    temperature : float, its temperature [K]

    Returns
    -------
    bool [-]

    Assumptions
    -----------
    Contents and wall at one temperature, no heat from outside.

    Valid for
    ---------
    Saturated vapour.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Energy balance, any text on thermodynamics.
    """
    colder = temperature - 1e-3
    if colder < T_TRIPLE:
        return False
    shed = (saturated(temperature)[2] - saturated(colder)[2]) * volume
    return _one_phase_slope(volume, wall, mass, temperature) * shed > temperature - colder
