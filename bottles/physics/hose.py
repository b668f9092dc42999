"""What a hose and its valves let through, as one opening of equal effect."""

from __future__ import annotations

from math import pi, sqrt

from shop.physics.errors import OutOfRange
from shop.physics.flow import hem_flux, opening_flux, spi_flux
from shop.physics.fluid import T_SATURATION_MAX, engine
from shop.physics.states import RHO_CRITICAL

FRICTION = 0.025  # Darcy's factor, rough hose and fittings in turbulent flow (common practice)
ENTRY = 1.5  # velocity heads lost on entering and leaving (common practice)
SEAT_M = 0.003  # m: free way through an open bottle valve (common practice, no source)
SEAT_COEFFICIENT = 0.6  # sharp-edged opening (common practice)
VALVES = 2  # the supply's and the other bottle's
# Two metres of 4.8 mm hose with both valves half open: 1.4 mm2 (common practice, no source).
HALF_OPEN = 0.5
LEAST_FLOW, MOST_FLOW = 0.9, 1.3  # of the model's flow: how measured openings scatter (common practice)
COMMON_LENGTH_M, COMMON_BORE_M = 2.0, 0.0048


def effective_area(
    length_m: float = COMMON_LENGTH_M, bore_m: float = COMMON_BORE_M, opening: float = HALF_OPEN
) -> float:
    """Opening that lets through as much as a hose with a valve at each end.

    Parameters
    ----------
    length_m : float, of the hose [m]
    bore_m : float, its inside diameter [m]
    opening : float, how far both valves are open, 1 being fully [-]

    Returns
    -------
    float, discharge coefficient times area [m2]

    Assumptions
    -----------
    Losses follow the square of the flow and stand in series; the hose by Darcy's factor, both
    valves alike, their free way proportional to the opening. Boiling within the hose costs
    flow besides, so it's an upper figure for a long hose. All figures are common practice, no
    source: the time that a shop measures is worth more.

    Valid for
    ---------
    Hoses to 50 m, bores of 0.5 to 50 mm.

    Raises
    ------
    OutOfRange
        `hose` for a hose or an opening that can't be.

    References
    ----------
    Darcy and Weisbach's law, any text on fluid mechanics; figures common practice, no source.
    """
    if not (0.0 <= length_m <= 50.0 and 5e-4 <= bore_m <= 0.05 and 0.0 < opening <= 1.0):
        raise OutOfRange(
            "hose",
            "A hose is up to 50 m long, 0.5 to 50 mm wide, and its valves are open by more than nothing. "
            "Check length, bore and opening, and their units.",
        )
    hose = 0.25 * pi * bore_m * bore_m / sqrt(ENTRY + FRICTION * length_m / bore_m)
    valve = SEAT_COEFFICIENT * opening * 0.25 * pi * SEAT_M * SEAT_M
    return 1.0 / sqrt(1.0 / (hose * hose) + VALVES / (valve * valve))


def line_flow(cd_area_m2: float, density: float, temperature_k: float, behind_pa: float) -> float:
    """Flow through a line of a given effective area.

    Parameters
    ----------
    cd_area_m2 : float, discharge coefficient times area [m2]
    density : float, of what enters the line [kg/m3]
    temperature_k : float, of what enters it [K]
    behind_pa : float, absolute pressure in the bottle to fill [Pa]

    Returns
    -------
    float, mass flow, never backwards [kg/s]

    Assumptions
    -----------
    As `opening_flux`. What was reversed is nothing: a check valve, or a hand on the valve.

    Valid for
    ---------
    182.33 K to 525 K; -10 to +30 % of a real opening, wider for a long hose.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    See `opening_flux`.
    """
    return cd_area_m2 * opening_flux(density, temperature_k, behind_pa) if density > 0.0 else 0.0


def flow_between(density: float, temperature_k: float, behind_pa: float) -> tuple[float, float]:
    """How much less and how much more than `line_flow` says may flow, as shares of it.

    Parameters
    ----------
    density : float, of what enters the line [kg/m3]
    temperature_k : float, of what enters it [K]
    behind_pa : float, absolute pressure in the bottle to fill [Pa]

    Returns
    -------
    tuple of float, the least and the most [-]

    Assumptions
    -----------
    Liquid lies between boiling in equilibrium, choked, and not boiling at all; never closer
    than measured openings scatter, -10 to +30 %, which stands for vapour alone too. How far a
    valve is open isn't counted.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    See `hem_flux`, `spi_flux`; the scatter is common practice, no source.
    """
    if density <= RHO_CRITICAL or temperature_k > T_SATURATION_MAX:
        return LEAST_FLOW, MOST_FLOW
    flux = opening_flux(density, temperature_k, behind_pa)
    if flux <= 0.0:
        return LEAST_FLOW, MOST_FLOW
    upstream = engine().pressure_energy(density, temperature_k)[0]
    least = hem_flux(density, temperature_k, behind_pa) / flux
    most = spi_flux(density, upstream, behind_pa) / flux
    return min(least, LEAST_FLOW), max(most, MOST_FLOW)
