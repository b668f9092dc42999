"""A bottle as a volume with a wall: its energy, and the state that mass and energy leave."""

from __future__ import annotations

from dataclasses import dataclass

from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_MAX, T_MAX, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.roots import find_root
from shop.physics.saturation_table import saturated, saturation_table, to_s, to_t
from shop.physics.states import RHO_CRITICAL

WALL_HEAT = {"aluminium": 896.0, "steel": 470.0}  # J/kg/K
COLDEST = 233.15  # K: -40 °C
HOTTEST = 325.15  # K: 52 °C
HEAT = 1500.0  # J/kg/K: a first guess at the heat capacity of contents at constant volume
LEAST_SPACE = 0.01  # of a bottle, that air takes up however full: squeezed further it dissolves (common practice)
_DENSE = 0.2  # beyond the critical density by this share a fluid leaves air no room of its own
_BELOW_500_BAR = 900.0  # kg/m3: so much stands below 500 bar at any temperature that is taken


@dataclass(frozen=True, slots=True)
class Vessel:
    """A bottle at rest: contents and wall at one temperature.

    `air` is the amount of air inside as pressure times volume over temperature [J/K];
    `liquid_pickup` says that liquid leaves first (dip tube upright, or no dip tube and
    lying upside down); `below_tube_m3` is the liquid that the tube's end doesn't reach.
    """

    volume_m3: float
    wall_j_k: float
    net_kg: float
    temperature_k: float
    air: float = 0.0
    liquid_pickup: bool = True
    below_tube_m3: float = 0.0

    def __post_init__(self) -> None:
        """Refuse what no bottle can be."""
        if not 0.0 < self.volume_m3 < 1e3:
            raise OutOfRange("capacity", "A bottle's capacity is above nothing. Check it and its unit.")
        if not 0.0 <= self.wall_j_k < 1e9:
            raise OutOfRange("wall", "A wall's mass can't be below nothing. Check it and its unit.")
        if not 0.0 <= self.below_tube_m3 < 0.5 * self.volume_m3:
            raise OutOfRange(
                "below_tube", "A dip tube reaches into the lower half of its bottle. Check what it leaves."
            )
        if not 0.0 <= self.net_kg < 1e6:
            raise OutOfRange("net", "Contents can't be below nothing. Weigh again, check the tare.")
        if not COLDEST - 1e-9 <= self.temperature_k <= HOTTEST + 1e-9:
            raise OutOfRange(
                "bottle_temperature",
                "Transfers are computed for bottles between -40 °C and 52 °C; above that no "
                "bottle may be. Check the temperature and its unit.",
            )
        if self.net_kg > _BELOW_500_BAR * self.volume_m3 and not _pressure(self) <= P_MAX:
            raise OutOfRange(
                "pressure_range",
                "So much in so small a bottle would stand above 500 bar at this temperature. "
                "Check the weight, the tare and the capacity.",
            )

    def changed(self, *, net_kg: float | None = None, temperature_k: float | None = None) -> Vessel:
        """The same bottle with other contents, or at another temperature."""
        return Vessel(
            self.volume_m3, self.wall_j_k,
            self.net_kg if net_kg is None else net_kg,
            self.temperature_k if temperature_k is None else temperature_k,
            self.air, self.liquid_pickup, self.below_tube_m3,
        )  # fmt: skip


def wall_heat(wall: str, mass_kg: float) -> float:
    """Heat capacity of a bottle's wall.

    Parameters
    ----------
    wall : str, aluminium or steel [-]
    mass_kg : float, tare less the valve and what hangs on it [kg]

    Returns
    -------
    float, heat capacity [J/K]

    Assumptions
    -----------
    The same at all temperatures; the whole wall takes part.

    Valid for
    ---------
    -40 °C to 52 °C.

    Raises
    ------
    OutOfRange
        `wall` for a material without a figure, or a mass below nothing.

    References
    ----------
    896 J/kg/K, 6061 aluminium, and 470 J/kg/K, chromium-molybdenum steel: usual handbook
    figures at room temperature (from memory).
    """
    if wall not in WALL_HEAT or not mass_kg >= 0.0:
        raise OutOfRange("wall", "A wall is aluminium or steel and weighs something. Check both.")
    return WALL_HEAT[wall] * mass_kg


def pressure_and_energy(volume: float, mass: float, temperature: float, air: float = 0.0) -> tuple[float, float]:
    """Pressure and energy of a bottle's contents.

    Parameters
    ----------
    volume : float, inside volume [m3]
    mass : float, nitrous oxide [kg]
    temperature : float, temperature [K]
    air : float, amount of air as pressure times volume over temperature [J/K]

    Returns
    -------
    tuple of float, absolute pressure [Pa], energy of the nitrous oxide [J]

    Assumptions
    -----------
    Equilibrium. Air stays in the vapour's space, or a hundredth of the bottle where that is
    less, and adds its pressure by Dalton's law.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if mass <= 0.0:
        return air * temperature / volume, 0.0
    fluid = engine()
    pressure, energy = fluid.pressure_energy(mass / volume, temperature)
    if air:
        quality = fluid.quality()
        if quality is not None:
            space = quality * mass / saturated(min(temperature, T_SATURATION_MAX))[2]
        else:
            # A dense fluid takes the room away bit by bit, so that pressure doesn't jump.
            space = volume * (1.0 - (mass / volume / RHO_CRITICAL - 1.0) / _DENSE)
        pressure += air * temperature / min(max(space, LEAST_SPACE * volume), volume)
    return pressure, mass * energy


def settle(
    volume: float, wall: float, mass: float, energy: float, guess: float, air: float = 0.0, heat: float = HEAT
) -> tuple[float, float, float]:
    """Temperature and pressure at which contents and wall settle.

    Parameters
    ----------
    volume : float, inside volume [m3]
    wall : float, heat capacity of wall and air together [J/K]
    mass : float, nitrous oxide [kg]
    energy : float, of contents and wall, the wall's counted from 0 K [J]
    guess : float, temperature to start from [K]
    air : float, amount of air as pressure times volume over temperature [J/K]
    heat : float, heat capacity of the contents to begin with: a guess alone [J/kg/K]

    Returns
    -------
    tuple of float, temperature [K], absolute pressure [Pa], heat capacity of the contents as
    the last step met it: a guess for the next question [J/kg/K]

    Assumptions
    -----------
    Contents and wall at one temperature. What would settle below the triple point is
    answered with the triple point: solid nitrous isn't computed.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `density_range`.

    References
    ----------
    Energy balance, any text on thermodynamics.
    """
    if mass <= 0.0:
        temperature = energy / wall if wall > 0.0 else guess
        return temperature, air * temperature / volume, heat
    density, fluid = mass / volume, engine()
    if guess <= T_SATURATION_MAX:
        table = saturation_table()
        s = to_s(guess)
        side = table.side(s)
        if side[2] < density < side[1]:
            found = table.settled(volume, wall, mass, energy, s)
            if found is not None:
                pressure, liquid, vapour, _, _ = table.side(found)
                if vapour < density < liquid:
                    new = to_t(found)
                    if air:
                        space = (liquid * volume - mass) / (liquid - vapour)
                        pressure += air * new / max(space, LEAST_SPACE * volume)
                    return new, pressure, heat
    pair = fluid.pressure_energy

    def surplus(t: float) -> float:
        return mass * pair(density, t)[1] + wall * t - energy

    # Secant steps from the guess; the bracket of the whole range where they stray.
    old, f_old = guess, surplus(guess)
    new = old - f_old / (wall + heat * mass)
    for _ in range(16):
        if not T_TRIPLE < new < T_MAX:
            break
        f_new = surplus(new)
        if new == old or f_new == f_old:
            step = 0.0
            if f_new != 0.0 and new != old:
                break
        else:
            slope = (f_new - f_old) / (new - old)
            step = f_new / slope
            heat = max((slope - wall) / mass, 0.1 * HEAT)
        if abs(step) < 3e-7:
            # The state just asked for is this one; only air needs its share of the space.
            return new, pressure_and_energy(volume, mass, new, air)[0] if air else fluid.pressure(), heat
        old, f_old, new = new, f_new, new - step
    cold, hot = surplus(T_TRIPLE), surplus(T_MAX)
    if cold >= 0.0:
        new = T_TRIPLE
    elif hot <= 0.0:
        new = T_MAX
    else:
        new = find_root(surplus, T_TRIPLE, T_MAX, tolerance=1e-8, at_low=cold, at_high=hot)
    return new, pressure_and_energy(volume, mass, new, air)[0], HEAT


def _pressure(vessel: Vessel) -> float:
    """Pressure at rest."""
    return pressure_and_energy(vessel.volume_m3, vessel.net_kg, vessel.temperature_k, vessel.air)[0]
