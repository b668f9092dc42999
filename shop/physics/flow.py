"""Mass flux of nitrous oxide through an opening, by the models that bound the real one.

Liquid that passes a short opening has no time to boil: `spi_flux`. With time enough it boils
all the way in equilibrium: `hem_flux`. Dyer's blend lies between: `dyer_flux`. Measured
openings scatter from a tenth below to three tenths above any of them, so a flow is shown with
its range from equilibrium to no boiling, never as a figure alone.
"""

from __future__ import annotations

from collections.abc import Callable
from math import sqrt

from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_TRIPLE, T_SATURATION_MAX, engine
from shop.physics.fluid_entropy import entropy_of, isentropic, sound_speed
from shop.physics.states import RHO_CRITICAL

# Below this difference flow is proportional to it, as in a pipe without turbulence: the root's
# endless slope at nothing would never let two bottles come to rest (common practice).
_CALM = 100.0  # Pa
_GOLDEN = 0.6180339887498949


def calmed(difference_pa: float) -> float:
    """Square root of a pressure difference, without its endless slope at nothing.

    Parameters
    ----------
    difference_pa : float, pressure before less pressure behind [Pa]

    Returns
    -------
    float, its root; nothing where the pressure is reversed [Pa^0.5]

    Assumptions
    -----------
    Proportional below 100 Pa, the root above; a quarter of a per cent from it at 1 kPa.

    Valid for
    ---------
    Any difference.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Common practice, no source.
    """
    if not difference_pa > 0.0:
        return 0.0
    return float(difference_pa / (difference_pa * difference_pa + _CALM * _CALM) ** 0.25)


def spi_flux(density: float, upstream_pa: float, downstream_pa: float) -> float:
    """Flux of a liquid that doesn't boil on its way.

    Parameters
    ----------
    density : float, of the liquid before the opening [kg/m3]
    upstream_pa : float, absolute pressure before it [Pa]
    downstream_pa : float, absolute pressure behind it [Pa]

    Returns
    -------
    float, mass flux without discharge coefficient [kg/m2/s]

    Assumptions
    -----------
    One phase, incompressible: the most that can flow. Nothing flows backwards.

    Valid for
    ---------
    Any pressures.

    Raises
    ------
    OutOfRange, `density_range` below nothing.

    References
    ----------
    Bernoulli's equation, any text on fluid mechanics.
    """
    if not density >= 0.0:
        raise OutOfRange("density_range", "A density can't be below nothing. Check it and its unit.")
    return sqrt(2.0 * density) * calmed(upstream_pa - downstream_pa)


def hem_flux(density: float, temperature_k: float, downstream_pa: float, *, choked: bool = True) -> float:
    """Flux of nitrous oxide that stays in equilibrium on its way.

    Parameters
    ----------
    density : float, before the opening, of both phases together [kg/m3]
    temperature_k : float, before the opening [K]
    downstream_pa : float, absolute pressure behind it [Pa]
    choked : bool, hold the flux at its greatest once the pressure behind lies below that
        of the greatest flux; else the curve is followed down past it [-]

    Returns
    -------
    float, mass flux without discharge coefficient [kg/m2/s]

    Assumptions
    -----------
    Isentropic, homogeneous, in equilibrium: the least of the three models. The choke is the
    greatest flux along the isentrope.

    Valid for
    ---------
    182.33 K to 525 K before the opening; behind it the triple point's pressure stands for
    all that is lower.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    Homogeneous equilibrium model: Waxman, PhD thesis, Stanford (2014), ch. 2.
    """
    entropy, enthalpy, upstream = entropy_of(density, temperature_k)
    low = max(downstream_pa, P_TRIPLE)
    if not low < upstream:
        return 0.0

    def flux(pressure: float) -> float:
        rho, h = isentropic(entropy, pressure)
        return rho * sqrt(2.0 * max(enthalpy - h, 0.0))

    best = flux(low)
    if choked:
        best = max(best, _greatest(flux, low, upstream))
    return best * calmed(upstream - low) / sqrt(upstream - low)


def dyer_flux(density: float, temperature_k: float, downstream_pa: float) -> float:
    """Flux of liquid that boils on its way as far as its time allows.

    Parameters
    ----------
    density : float, of the liquid before the opening [kg/m3]
    temperature_k : float, before the opening [K]
    downstream_pa : float, absolute pressure behind it [Pa]

    Returns
    -------
    float, mass flux without discharge coefficient [kg/m2/s]

    Assumptions
    -----------
    Weighs `spi_flux` and `hem_flux` by k = sqrt((p1 - p2)/(pv - p2)); saturated liquid has
    k = 1. Equilibrium flow is not held at its choke, as in the published curves, so the blend
    falls a little below its own greatest value far down. Where the pressure behind isn't
    below the vapour pressure nothing boils.

    Valid for
    ---------
    Liquid between 182.33 K and 309.52 K; fluid above that takes the equilibrium flux.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    Dyer, Doran, Dunn, Lohner, Bayart, Sadhwani, Zilliac, Cantwell and Karabeyoglu,
    AIAA 2007-5702 (2007), with the k as corrected by Solomon, MS thesis, Utah State (2011)
    (from memory); curves in Waxman, PhD thesis, Stanford (2014), fig. 2.44.
    """
    if temperature_k > T_SATURATION_MAX:
        return hem_flux(density, temperature_k, downstream_pa)
    upstream = engine().pressure_energy(density, temperature_k)[0]
    if not downstream_pa < upstream:
        return 0.0
    single = spi_flux(density, upstream, downstream_pa)
    vapour = min(engine().saturation(temperature_k)[0], upstream)
    if downstream_pa >= vapour:
        return single
    k = sqrt((upstream - downstream_pa) / (vapour - downstream_pa))
    return (k * single + hem_flux(density, temperature_k, downstream_pa, choked=False)) / (1.0 + k)


def vapour_flux(density: float, temperature_k: float, downstream_pa: float) -> float:
    """Flux of vapour, choked or not.

    Parameters
    ----------
    density : float, before the opening [kg/m3]
    temperature_k : float, before the opening [K]
    downstream_pa : float, absolute pressure behind it [Pa]

    Returns
    -------
    float, mass flux without discharge coefficient [kg/m2/s]

    Assumptions
    -----------
    Real vapour through its isentropic exponent before the opening, n = rho c2 / p, constant
    on the way; nothing condenses within the opening.

    Valid for
    ---------
    One phase, 182.33 K to 525 K; within 10 % of the isentrope of the equation of state for
    vapour up to 20 °C; above that more, as its condensing within the opening costs more.

    Raises
    ------
    OutOfRange
        `density_range` for nothing at all.

    References
    ----------
    Compressible flow through a nozzle, any text on gas dynamics; the exponent of a real gas:
    ISO 9300.
    """
    if not density > 0.0:
        raise OutOfRange("density_range", "Without anything in the bottle nothing flows. Check the weight.")
    upstream = engine().one_phase_slopes(density, temperature_k)[0]
    if not downstream_pa < upstream:
        return 0.0
    n = density * sound_speed(density, temperature_k) ** 2 / upstream
    if abs(n - 1.0) < 1e-4:
        n = 1.0001  # the formula's own hole; its limit is smooth
    critical = (2.0 / (n + 1.0)) ** (n / (n - 1.0))
    ratio = max(downstream_pa / upstream, critical)
    head = 2.0 * n / (n - 1.0) * upstream * density * (ratio ** (2.0 / n) - ratio ** ((n + 1.0) / n))
    gap = upstream - downstream_pa
    return sqrt(max(head, 0.0)) * calmed(gap) / sqrt(gap)


def opening_flux(density: float, temperature_k: float, downstream_pa: float) -> float:
    """Flux of whatever stands before an opening: liquid, vapour or dense fluid.

    Parameters
    ----------
    density : float, of the phase before the opening [kg/m3]
    temperature_k : float, before the opening [K]
    downstream_pa : float, absolute pressure behind it [Pa]

    Returns
    -------
    float, mass flux without discharge coefficient [kg/m2/s]

    Assumptions
    -----------
    Liquid by `dyer_flux`; vapour, and fluid above the critical temperature, by
    `vapour_flux`, whose exponent grows with density towards a liquid's.

    Valid for
    ---------
    182.33 K to 525 K. A real opening differs by -10 to +30 %.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    See `dyer_flux` and `vapour_flux`.
    """
    if density > RHO_CRITICAL and temperature_k <= T_SATURATION_MAX:
        return dyer_flux(density, temperature_k, downstream_pa)
    return vapour_flux(density, temperature_k, downstream_pa)


def _greatest(flux: Callable[[float], float], low: float, high: float) -> float:
    """Greatest flux between two pressures, by golden section: it has one hump."""
    far = high
    one, two = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
    at_one, at_two = flux(one), flux(two)
    while high - low > 1e-4 * far:
        if at_one > at_two:
            high, two, at_two = two, one, at_one
            one = high - _GOLDEN * (high - low)
            at_one = flux(one)
        else:
            low, one, at_one = one, two, at_two
            two = low + _GOLDEN * (high - low)
            at_two = flux(two)
    return max(at_one, at_two)
