"""Records of nitrous oxide's states, and the sentences for what lies outside of their range."""

from __future__ import annotations

from dataclasses import dataclass

# CoolProp's own critical point: where its two saturated densities meet numerically.
T_CRITICAL = 309.520678  # K
RHO_CRITICAL = 452.9  # kg/m3

NO_SATURATION = (
    "Liquid and vapour stand together only between -90.8 °C and 36.4 °C (0.88 to 72.4 bar "
    "absolute). Check the temperature or the pressure and its unit."
)
TEMPERATURE_RANGE = "Nitrous oxide can be computed between -90.8 °C and 252 °C. Check the temperature and its unit."
PRESSURE_RANGE = (
    "Nitrous oxide can be computed up to 500 bar. Such a pressure would have burst a safety "
    "disc: check the figures and their units."
)
DENSITY_RANGE = "That much nitrous oxide doesn't go into this volume. Check the weight and the capacity."


@dataclass(frozen=True, slots=True)
class Saturation:
    """Liquid and vapour side by side at one temperature."""

    temperature_k: float
    pressure_pa: float
    liquid_density: float
    vapour_density: float
    liquid_enthalpy: float
    vapour_enthalpy: float

    @property
    def liquid_energy(self) -> float:
        """Internal energy of the liquid [J/kg]."""
        return self.liquid_enthalpy - self.pressure_pa / self.liquid_density

    @property
    def vapour_energy(self) -> float:
        """Internal energy of the vapour [J/kg]."""
        return self.vapour_enthalpy - self.pressure_pa / self.vapour_density

    @property
    def latent_heat(self) -> float:
        """Heat that evaporates a kilogram [J/kg]."""
        return self.vapour_enthalpy - self.liquid_enthalpy


@dataclass(frozen=True, slots=True)
class State:
    """One state of equilibrium; `quality` is None where there is one phase only."""

    temperature_k: float
    pressure_pa: float
    density: float
    energy: float
    enthalpy: float
    quality: float | None

    @property
    def phase(self) -> str:
        """Word for the state: two-phase, liquid, vapour or supercritical."""
        if self.quality is not None:
            return "two-phase"
        if self.temperature_k >= T_CRITICAL:
            return "supercritical"
        return "liquid" if self.density > RHO_CRITICAL else "vapour"
