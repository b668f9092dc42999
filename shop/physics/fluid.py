"""States of nitrous oxide by the equation of state of Lemmon and Span (2006).

The only place that imports CoolProp, and only inside functions: loading it costs
seconds, and most processes never need it. Every number is checked against the range of the
equation before the call, because CoolProp answers quietly outside of it.

There are two ways in: public functions with frozen records that name what they refuse, and
`engine`, the thread's own low-level state for what balances ask thousands of times.
"""

from __future__ import annotations

import threading
from typing import Any

from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.states import (
    DENSITY_RANGE,
    NO_SATURATION,
    PRESSURE_RANGE,
    T_CRITICAL,
    TEMPERATURE_RANGE,
    Saturation,
    State,
)

MOLAR_MASS = 0.0440128  # kg/mol
P_CRITICAL = 7.244816e6  # Pa
T_TRIPLE = 182.33  # K
P_TRIPLE = 87837.44  # Pa
# The range of the equation of state as published.
T_MAX = 525.0  # K
P_MAX = 50.0e6  # Pa
ATMOSPHERE = 101325.0  # Pa
# Saturation is asked for up to here: the last ten-thousandth of a kelvin has no split.
T_SATURATION_MAX = T_CRITICAL - 1e-4  # K
_DENSITY_MIN = 1e-6  # kg/m3, as good as evacuated
_DENSITY_MAX = 1400.0  # kg/m3, beyond any state in range


class _Engine:
    """The thread's low-level state and its constants, looked up once."""

    __slots__ = ("_d", "_dt", "_du", "_gas", "_p", "_pq", "_pt", "_qt", "_t", "raw")

    def __init__(self) -> None:
        from CoolProp import CoolProp

        self.raw: Any = CoolProp.AbstractState("HEOS", "NitrousOxide")
        self._dt: Any = CoolProp.DmassT_INPUTS
        self._du: Any = CoolProp.DmassUmass_INPUTS
        self._pq: Any = CoolProp.PQ_INPUTS
        self._pt: Any = CoolProp.PT_INPUTS
        self._qt: Any = CoolProp.QT_INPUTS
        self._gas: Any = CoolProp.iphase_gas
        self._d: Any = CoolProp.iDmass
        self._p: Any = CoolProp.iP
        self._t: Any = CoolProp.iT

    def saturation(self, temperature: float) -> tuple[float, float, float, float, float]:
        """Pressure, densities and enthalpies (liquid, vapour) at saturation."""
        if not T_TRIPLE <= temperature <= T_SATURATION_MAX:
            raise OutOfRange("no_saturation", NO_SATURATION)
        raw = self.raw
        raw.update(self._qt, 0.0, temperature)
        pressure, liquid, h_liquid = raw.p(), raw.rhomass(), raw.hmass()
        raw.update(self._qt, 1.0, temperature)
        return pressure, liquid, raw.rhomass(), h_liquid, raw.hmass()

    def boiling_temperature(self, pressure: float) -> float:
        """Temperature of saturation at a pressure."""
        if not P_TRIPLE <= pressure < P_CRITICAL:
            raise OutOfRange("no_saturation", NO_SATURATION)
        self.raw.update(self._pq, pressure, 0.0)
        return min(float(self.raw.T()), T_SATURATION_MAX)

    def pressure_energy(self, density: float, temperature: float) -> tuple[float, float]:
        """Pressure and internal energy, of a mixture in equilibrium where there are two phases."""
        if not T_TRIPLE <= temperature <= T_MAX:
            raise OutOfRange("temperature_range", TEMPERATURE_RANGE)
        if not density <= _DENSITY_MAX:
            raise OutOfRange("density_range", DENSITY_RANGE)
        raw = self.raw
        raw.update(self._dt, density if density > _DENSITY_MIN else _DENSITY_MIN, temperature)
        return raw.p(), raw.umass()

    def pressure(self) -> float:
        """Pressure of the state last asked for."""
        return float(self.raw.p())

    def quality(self) -> float | None:
        """Share of vapour of the state last asked for; None with one phase."""
        quality = float(self.raw.Q())
        return quality if 0.0 <= quality <= 1.0 else None

    def one_phase_slopes(self, density: float, temperature: float) -> tuple[float, float, float]:
        """Pressure, cv and dp/dT at constant density, of one phase, even just past saturation."""
        raw = self.raw
        raw.specify_phase(self._gas)
        try:
            raw.update(self._dt, density, temperature)
            return raw.p(), raw.cvmass(), raw.first_partial_deriv(self._p, self._t, self._d)
        finally:
            raw.unspecify_phase()

    def state(self) -> State:
        """Record of the state last asked for."""
        raw = self.raw
        return State(raw.T(), raw.p(), raw.rhomass(), raw.umass(), raw.hmass(), self.quality())

    def density(self, pressure: float, temperature: float) -> float:
        """Density of one phase, away from saturation by more than the solver can tell."""
        self.raw.update(self._pt, pressure, temperature)
        return float(self.raw.rhomass())

    def flash_energy(self, density: float, energy: float) -> None:
        """Set the state by density and energy."""
        self.raw.update(self._du, density, energy)


_local = threading.local()


def engine() -> _Engine:
    """Hand out this thread's own low-level state.

    Parameters
    ----------
    none

    Returns
    -------
    _Engine, one a thread, made at the first call [-]

    Assumptions
    -----------
    A low-level state isn't safe between threads.

    Valid for
    ---------
    Any thread.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850; CoolProp, coolprop.org.
    """
    found: _Engine | None = getattr(_local, "engine", None)
    if found is None:
        found = _local.engine = _Engine()
    return found


def load() -> None:
    """Load CoolProp and make one state, so that the first question isn't slow.

    Parameters
    ----------
    none

    Returns
    -------
    None

    Assumptions
    -----------
    The first flash by energy builds tables of its own.

    Valid for
    ---------
    Any thread.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    CoolProp, coolprop.org.
    """
    state_by_density_energy(400.0, state_by_density_temperature(400.0, 290.0).energy)


def saturation_pressure(temperature_k: float) -> float:
    """Vapour pressure of nitrous oxide.

    Parameters
    ----------
    temperature_k : float, temperature [K]

    Returns
    -------
    float, absolute pressure [Pa]

    Assumptions
    -----------
    Pure nitrous oxide.

    Valid for
    ---------
    182.33 K to 309.5206 K.

    Raises
    ------
    OutOfRange, `no_saturation` outside of that.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    return engine().saturation(temperature_k)[0]


def saturation_at_temperature(temperature_k: float) -> Saturation:
    """Liquid and vapour in equilibrium at a temperature.

    Parameters
    ----------
    temperature_k : float, temperature [K]

    Returns
    -------
    Saturation, pressure [Pa], densities [kg/m3], enthalpies [J/kg]

    Assumptions
    -----------
    Pure nitrous oxide.

    Valid for
    ---------
    182.33 K to 309.5206 K.

    Raises
    ------
    OutOfRange, `no_saturation` outside of that.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    return Saturation(temperature_k, *engine().saturation(temperature_k))


def saturation_at_pressure(pressure_pa: float) -> Saturation:
    """Liquid and vapour in equilibrium at a pressure.

    Parameters
    ----------
    pressure_pa : float, absolute pressure [Pa]

    Returns
    -------
    Saturation, temperature [K], densities [kg/m3], enthalpies [J/kg]

    Assumptions
    -----------
    Pure nitrous oxide.

    Valid for
    ---------
    0.878 bar to 72.448 bar absolute.

    Raises
    ------
    OutOfRange, `no_saturation` outside of that.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    return saturation_at_temperature(engine().boiling_temperature(pressure_pa))


def state_by_density_temperature(density: float, temperature_k: float) -> State:
    """State of equilibrium by density and temperature.

    Parameters
    ----------
    density : float, mass over volume, of both phases together [kg/m3]
    temperature_k : float, temperature [K]

    Returns
    -------
    State, with its share of vapour where there are two phases [-]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium.

    Valid for
    ---------
    182.33 K to 525 K, up to 500 bar.

    Raises
    ------
    OutOfRange
        `temperature_range`, `density_range`, `pressure_range`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not density > 0.0:
        raise OutOfRange("density_range", DENSITY_RANGE)
    fluid = engine()
    if fluid.pressure_energy(density, temperature_k)[0] > P_MAX:
        raise OutOfRange("pressure_range", PRESSURE_RANGE)
    return fluid.state()


def state_by_density_energy(density: float, energy: float) -> State:
    """State of equilibrium by density and internal energy.

    Parameters
    ----------
    density : float, mass over volume, of both phases together [kg/m3]
    energy : float, internal energy [J/kg]

    Returns
    -------
    State, with its share of vapour where there are two phases [-]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium.

    Valid for
    ---------
    182.33 K to 525 K, up to 500 bar.

    Raises
    ------
    OutOfRange
        `density_range`, `pressure_range`, `temperature_range`.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not 0.0 < density <= _DENSITY_MAX:
        raise OutOfRange("density_range", DENSITY_RANGE)
    fluid = engine()
    # The ends first: outside of them the solver would answer with a state out of range.
    if not (fluid.pressure_energy(density, T_TRIPLE)[1] <= energy <= fluid.pressure_energy(density, T_MAX)[1]):
        raise OutOfRange("temperature_range", TEMPERATURE_RANGE)
    fluid.flash_energy(density, energy)
    state = fluid.state()
    if state.pressure_pa > P_MAX:
        raise OutOfRange("pressure_range", PRESSURE_RANGE)
    return state


def state_by_pressure_temperature(pressure_pa: float, temperature_k: float) -> State:
    """State of one phase by pressure and temperature.

    Parameters
    ----------
    pressure_pa : float, absolute pressure [Pa]
    temperature_k : float, temperature [K]

    Returns
    -------
    State, of one phase [-]

    Assumptions
    -----------
    Pure nitrous oxide in equilibrium.

    Valid for
    ---------
    182.33 K to 525 K, above nothing and up to 500 bar.

    Raises
    ------
    OutOfRange, `temperature_range`, `pressure_range`.
    NoSolution
        `on_saturation`: there pressure and temperature don't tell the share of vapour.

    References
    ----------
    Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not T_TRIPLE <= temperature_k <= T_MAX:
        raise OutOfRange("temperature_range", TEMPERATURE_RANGE)
    if not 0.0 < pressure_pa <= P_MAX:
        raise OutOfRange("pressure_range", PRESSURE_RANGE)
    fluid = engine()
    if temperature_k <= T_SATURATION_MAX:
        saturated = fluid.saturation(temperature_k)[0]
        if abs(pressure_pa - saturated) <= 2e-6 * saturated:
            raise NoSolution(
                "on_saturation",
                "At its vapour pressure nitrous oxide can be any mixture of liquid and vapour. "
                "Weigh the bottle to know how much is in it.",
            )
    fluid.density(pressure_pa, temperature_k)
    return fluid.state()
