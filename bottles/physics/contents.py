"""What a gauge, a thermometer and perhaps a scale tell about a bottle's contents."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.contents_words import SENTENCES
from shop.physics.errors import OutOfRange
from shop.physics.fluid import (
    ATMOSPHERE,
    P_MAX,
    T_MAX,
    T_SATURATION_MAX,
    T_TRIPLE,
    engine,
    saturation_pressure,
    state_by_density_temperature,
)
from shop.physics.roots import find_root
from shop.physics.states import RHO_CRITICAL, T_CRITICAL

GAUGE_TOLERANCE = 2.07e5  # Pa: 30 psi, two needles' width of a common gauge (common practice)
THERMOMETER_TOLERANCE = 1.0  # K (common practice)
SCALE_TOLERANCE = 0.05  # kg (common practice)
COLDEST_BOTTLE = 233.15  # K: liquid filled at -40 °C is the densest that a shop can fill
HOTTEST_ALLOWED = 325.15  # K: 52 °C, no bottle is warmed above it
NEAR_CRITICAL = 307.65  # K: above 34.5 °C digits of any equation of state fade
HOT = (325.15, 328.15, 338.15)  # K: 52, 55 and 65 °C, where rules ask for pressures


@dataclass(frozen=True, slots=True)
class Contents:
    """What a reading allows; masses are None where nothing consistent is left."""

    region: str
    least_kg: float
    most_kg: float
    most_if_overfilled_kg: float
    saturation_pa: float | None
    liquid_kg: float | None
    vapour_kg: float | None
    expected_pa: float | None
    agrees: bool | None
    warnings: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Split:
    """A known net mass at a temperature."""

    pressure_pa: float
    liquid_kg: float
    vapour_kg: float
    phase: str


def contents_from_reading(
    *,
    capacity_m3: float,
    temperature_k: float,
    pressure_pa: float,
    net_kg: float | None = None,
    limit_kg: float | None = None,
    gauge_tolerance_pa: float = GAUGE_TOLERANCE,
    thermometer_tolerance_k: float = THERMOMETER_TOLERANCE,
    scale_tolerance_kg: float = SCALE_TOLERANCE,
) -> Contents:
    """Tell what can be in a bottle from its pressure, its temperature and perhaps its weight.

    Parameters
    ----------
    capacity_m3 : float, water capacity [m3]
    temperature_k : float, temperature of the contents [K]
    pressure_pa : float, absolute pressure [Pa]
    net_kg : float or None, contents by weight [kg]
    limit_kg : float or None, fill limit [kg]
    gauge_tolerance_pa : float, of the pressure [Pa]
    thermometer_tolerance_k : float, of the temperature [K]
    scale_tolerance_kg : float, of the weight [kg]

    Returns
    -------
    Contents, the region, masses [kg], pressures [Pa] and warnings (code, sentence) [-]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium at the temperature read. Saturated where the pressure
    read and the vapour pressure meet within their tolerances: then the least is vapour alone at
    that temperature, the most is the limit. Elsewhere least and most are the worst corners
    of the tolerances.

    Valid for
    ---------
    182.33 K to 525 K, up to 500 bar. Above 34.5 °C warned rather than exact.

    Raises
    ------
    OutOfRange
        `temperature_range`, `pressure_range`, `capacity`, `tolerance`, `net`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850, for the states; tolerances are
    common practice, no source.
    """
    _check(capacity_m3, temperature_k, pressure_pa, net_kg)
    if not min(gauge_tolerance_pa, thermometer_tolerance_k, scale_tolerance_kg) >= 0.0:
        raise OutOfRange("tolerance", "A tolerance can't be below nothing. Check the tolerances.")
    low_p, high_p = max(pressure_pa - gauge_tolerance_pa, 1.0), pressure_pa + gauge_tolerance_pa
    low_t = max(temperature_k - thermometer_tolerance_k, T_TRIPLE)
    high_t = min(temperature_k + thermometer_tolerance_k, T_MAX)
    saturation = saturation_pressure(temperature_k) if temperature_k <= T_SATURATION_MAX else None
    codes: list[str] = []
    overfull: float | None = None
    liquid = vapour = None
    region = _region(temperature_k, low_p, high_p, low_t, high_t)
    if region == "saturated":
        _, rho_l, rho_v, _, _ = engine().saturation(temperature_k)
        least, overfull = rho_v * capacity_m3, rho_l * capacity_m3
        most = overfull if limit_kg is None else max(least, min(overfull, limit_kg))
        codes.append("liquid_unknown")
    else:
        least = _density(low_p, high_t, rising=False) * capacity_m3
        most = overfull = _density(high_p, low_t, rising=True) * capacity_m3
        if limit_kg is not None and region != "vapour":
            most = max(least, min(most, limit_kg))
        if region == "vapour":
            liquid, vapour = 0.0, _density(pressure_pa, temperature_k, rising=False) * capacity_m3
            codes.append("no_liquid")
        elif region == "liquid-full":
            liquid, vapour = _density(pressure_pa, temperature_k, rising=True) * capacity_m3, 0.0
            codes.append("above_vapour_pressure")
        else:
            codes.append("supercritical")
        # Denser than anything that a shop could have filled: the reading can't be right.
        if least / capacity_m3 > engine().saturation(COLDEST_BOTTLE)[1] or low_p > P_MAX:
            region = "contradictory"
            codes = ["beyond_any_fill"]
    # A weight says more than a gauge about what is inside.
    held = least if net_kg is None else net_kg
    if limit_kg is not None and held > limit_kg:
        codes.append("over_limit")
    expected: float | None = None
    agrees: bool | None = None
    if net_kg is not None:
        expected, low, high = _expected_band(net_kg, scale_tolerance_kg, capacity_m3, temperature_k, low_t, high_t)
        agrees = low <= high_p and high >= low_p
        least, most = max(0.0, net_kg - scale_tolerance_kg), net_kg + scale_tolerance_kg
        overfull = most
        codes = [code for code in codes if code != "liquid_unknown"]
        if agrees:
            split = split_of(net_kg, capacity_m3, temperature_k)
            liquid, vapour = split.liquid_kg, split.vapour_kg
            if net_kg > 0.0 and split.phase == "liquid":
                codes.append("full_of_liquid")
        else:
            region = "contradictory"
            liquid = vapour = None
            codes.append("reads_below_weight" if low > high_p else "reads_above_weight")
    if temperature_k >= NEAR_CRITICAL and temperature_k < T_CRITICAL + 3.0:
        codes.append("near_critical")
    if temperature_k > HOTTEST_ALLOWED:
        codes.append("too_hot")
    return Contents(
        region, least, most, overfull, saturation, liquid, vapour, expected, agrees,
        tuple((code, SENTENCES[code]) for code in codes),
    )  # fmt: skip


def split_of(net_kg: float, capacity_m3: float, temperature_k: float) -> Split:
    """Pressure, liquid and vapour of a known net mass at a temperature.

    Parameters
    ----------
    net_kg : float, nitrous oxide in the bottle [kg]
    capacity_m3 : float, water capacity [m3]
    temperature_k : float, temperature [K]

    Returns
    -------
    Split, absolute pressure [Pa], masses [kg] and a word for the phase [-]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium; the bottle doesn't stretch. One phase of a density
    above the critical one counts as liquid, below it as vapour.

    Valid for
    ---------
    182.33 K to 525 K, up to 500 bar.

    Raises
    ------
    OutOfRange
        `temperature_range`, `pressure_range`, `density_range`, `capacity`, `net`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    _check(capacity_m3, temperature_k, ATMOSPHERE, net_kg)
    if net_kg == 0.0:
        return Split(0.0, 0.0, 0.0, "vapour")
    state = state_by_density_temperature(net_kg / capacity_m3, temperature_k)
    if state.quality is not None:
        vapour = state.quality * net_kg
        return Split(state.pressure_pa, net_kg - vapour, vapour, state.phase)
    if state.density > RHO_CRITICAL:
        return Split(state.pressure_pa, net_kg, 0.0, state.phase)
    return Split(state.pressure_pa, 0.0, net_kg, state.phase)


def one_phase_temperature(net_kg: float, capacity_m3: float) -> tuple[float, str]:
    """Temperature at which a fill becomes one phase, and which.

    Parameters
    ----------
    net_kg : float, nitrous oxide in the bottle [kg]
    capacity_m3 : float, water capacity [m3]

    Returns
    -------
    tuple of float and str, temperature [K] and `liquid-full` or `dry` [-]

    Assumptions
    -----------
    Warmed as a whole. A fill denser than the critical density swells until no vapour is
    left; a lighter one boils until no liquid is left.

    Valid for
    ---------
    Fills between saturated vapour and saturated liquid at the triple point.

    Raises
    ------
    OutOfRange
        `density_range` where it's one phase at any temperature; `capacity`, `net`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    _check(capacity_m3, COLDEST_BOTTLE, ATMOSPHERE, net_kg)
    density = net_kg / capacity_m3
    fluid = engine()
    _, triple_l, triple_v, _, _ = fluid.saturation(T_TRIPLE)
    if not triple_v <= density <= triple_l:
        raise OutOfRange("density_range")
    _, top_l, top_v, _, _ = fluid.saturation(T_SATURATION_MAX)
    if top_v <= density <= top_l:
        return T_SATURATION_MAX, "liquid-full" if density >= RHO_CRITICAL else "dry"
    which, word = (1, "liquid-full") if density > top_l else (2, "dry")
    return (
        find_root(
            lambda t: fluid.saturation(t)[which] - density,
            T_TRIPLE,
            T_SATURATION_MAX,
            tolerance=1e-5,
        ),
        word,
    )


def pressures_when_hot(
    net_kg: float, capacity_m3: float, temperatures_k: tuple[float, ...] = HOT
) -> tuple[float | None, ...]:
    """Pressure of a fill at 52, 55 and 65 °C.

    Parameters
    ----------
    net_kg : float, nitrous oxide in the bottle [kg]
    capacity_m3 : float, water capacity [m3]
    temperatures_k : tuple of float, where to look [K]

    Returns
    -------
    tuple of float or None, absolute pressures [Pa]; None above 500 bar

    Assumptions
    -----------
    By the equation of state at the fill's own density: above 36.4 °C there is no vapour
    pressure. The bottle doesn't stretch and its safety disc holds.

    Valid for
    ---------
    182.33 K to 525 K.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `capacity`, `net`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850; ADR 2025 4.1.4.1 P200 asks for
    the pressure at 65 °C.
    """
    answers: list[float | None] = []
    for temperature in temperatures_k:
        try:
            answers.append(split_of(net_kg, capacity_m3, temperature).pressure_pa)
        except OutOfRange as refusal:
            if refusal.code != "pressure_range":
                raise
            answers.append(None)
    return tuple(answers)


def _check(capacity_m3: float, temperature_k: float, pressure_pa: float, net_kg: float | None) -> None:
    """Refuse what no bottle can be."""
    if not 0.0 < capacity_m3 < 1e3:
        raise OutOfRange("capacity", "A bottle's capacity is above nothing. Check it and its unit.")
    if not T_TRIPLE <= temperature_k <= T_MAX:
        raise OutOfRange(
            "temperature_range",
            "Nitrous oxide can be computed between -90.8 °C and 252 °C. Check the temperature.",
        )
    if not 0.0 < pressure_pa <= P_MAX:
        raise OutOfRange(
            "pressure_range",
            "A pressure between nothing and 500 bar absolute is needed. Check it and its unit.",
        )
    if net_kg is not None and not 0.0 <= net_kg < 1e6:
        raise OutOfRange("net", "Contents can't be below nothing. Weigh again, check the tare.")


def _vapour_pressure(temperature_k: float) -> float:
    """Vapour pressure; above the critical point that of the critical density, its continuation."""
    if temperature_k <= T_SATURATION_MAX:
        return engine().saturation(temperature_k)[0]
    return engine().pressure_energy(RHO_CRITICAL, temperature_k)[0]


def _region(temperature_k: float, low_p: float, high_p: float, low_t: float, high_t: float) -> str:
    """Region by the pressure's and the vapour pressure's intervals."""
    if temperature_k >= T_SATURATION_MAX:
        return "supercritical"
    if high_p < _vapour_pressure(low_t):
        return "vapour"
    if low_p > _vapour_pressure(high_t):
        return "liquid-full"
    return "saturated"


def _density(pressure_pa: float, temperature_k: float, *, rising: bool) -> float:
    """Density of one phase; on saturation itself the liquid's when `rising`, else the vapour's."""
    pressure_pa = min(pressure_pa, P_MAX)
    fluid = engine()
    if temperature_k <= T_SATURATION_MAX:
        saturated, rho_l, rho_v, _, _ = fluid.saturation(temperature_k)
        if abs(pressure_pa - saturated) <= 2e-6 * saturated:
            return rho_l if rising else rho_v
    return fluid.density(pressure_pa, temperature_k)


def _expected_band(
    net_kg: float,
    scale_tolerance_kg: float,
    capacity_m3: float,
    temperature_k: float,
    low_t: float,
    high_t: float,
) -> tuple[float, float, float]:
    """Pressure that a weight should show, and its span over the tolerances."""
    fluid = engine()
    expected = fluid.pressure_energy(net_kg / capacity_m3, temperature_k)[0] if net_kg else 0.0
    lightest = max(0.0, net_kg - scale_tolerance_kg) / capacity_m3
    low = fluid.pressure_energy(lightest, low_t)[0]
    high = fluid.pressure_energy((net_kg + scale_tolerance_kg) / capacity_m3, high_t)[0]
    return expected, low, high
