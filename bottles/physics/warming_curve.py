"""The pressure of one fill over many temperatures: the curve that a closed bottle follows as it warms."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shop.physics.errors import OutOfRange
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_curves import saturated_states


def pressures_of_fill(net_kg: float, capacity_m3: float, temperatures_k: ArrayLike) -> NDArray[np.float64]:
    """Pressure of a closed bottle at each of many temperatures.

    Parameters
    ----------
    net_kg : float, nitrous oxide in the bottle, above nothing [kg]
    capacity_m3 : float, water capacity [m3]
    temperatures_k : array of float, of one dimension [K]

    Returns
    -------
    array of float, absolute pressures, of the same length [Pa]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium; the bottle doesn't stretch and its safety disc holds.
    Where there are two phases the vapour pressure comes from the table of saturated states,
    all temperatures at once; where there is one, from the equation of state.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `capacity`, `net`, `temperature_range`, `density_range`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not 0.0 < capacity_m3 < 1e3:
        raise OutOfRange("capacity", "A bottle's capacity is above nothing. Check it and its unit.")
    if not 0.0 < net_kg < 1e6:
        raise OutOfRange("net", "An empty bottle has no pressure to follow. Weigh it.")
    kelvin = np.asarray(temperatures_k, dtype=np.float64)
    density = net_kg / capacity_m3
    pressures = np.empty_like(kelvin)
    single = np.ones(kelvin.shape, dtype=bool)
    splits = (kelvin >= T_TRIPLE) & (kelvin <= T_SATURATION_MAX)
    if splits.any():
        states = saturated_states(kelvin[splits])
        two = (states.vapour_density < density) & (density < states.liquid_density)
        where = np.flatnonzero(splits)[two]
        pressures[where] = states.pressure_pa[two]
        single[where] = False
    fluid = engine()
    for place in np.flatnonzero(single):
        pressures[place] = fluid.pressure_energy(density, float(kelvin[place]))[0]
    return pressures
