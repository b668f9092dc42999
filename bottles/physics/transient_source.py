"""The supply bottle while it gives: by its closed path, or with heat passing into it."""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.transient_zones import Around
from bottles.physics.vessel import Vessel, pressure_and_energy, settle
from bottles.physics.withdrawal import Adiabatic
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.states import RHO_CRITICAL

_HELD = 1e9  # J/K: a leak that passes so much in a step keeps the bottle at its surroundings


@dataclass(frozen=True, slots=True)
class Supply:
    """A moment: what is left, its state, and what stands before the line."""

    left_kg: float
    temperature_k: float
    pressure_pa: float
    energy_j: float
    liquid: bool
    outlet_density: float
    outlet_j_kg: float
    liquid_m3: float


class ClosedSupply:
    """No heat from outside: its path is known in closed form."""

    coupled = False

    def __init__(self, path: Adiabatic, net_kg: float, volume_m3: float, given_kg: float) -> None:
        """Begin where the line has been filled."""
        self._path, self._net, self._volume = path, net_kg, volume_m3
        self._first = path.after(given_kg).energy_given_j
        self.start = self._at(net_kg - given_kg)

    def after(self, supply: Supply, given_kg: float, seconds: float) -> tuple[Supply, float]:
        """What is left after giving a mass, and the enthalpy that went with it."""
        new = self._at(supply.left_kg - given_kg)
        return new, supply.energy_j - new.energy_j

    def liquid_kg(self, supply: Supply) -> float | None:
        """What can still go before the liquid is out; None where there is none."""
        if not supply.liquid:
            return None
        return supply.left_kg - (self._net - self._path.dry_out())

    def _at(self, left: float) -> Supply:
        """Moment with a mass left; energy counted from the start."""
        given = self._path.after(self._net - left)
        density = _before_line(left / self._volume, given.temperature_k, given.liquid)
        energy = self._first - given.energy_given_j
        return Supply(
            left, given.temperature_k, given.pressure_pa, energy, given.liquid, density, given.outlet_j_kg, 0.0
        )


class LeakingSupply:
    """Heat passes from room or bath into contents and wall, which share one temperature."""

    coupled = True

    def __init__(self, vessel: Vessel, around: Around, left_kg: float, temperature_k: float) -> None:
        """Begin where the line has been filled."""
        self._vessel, self._around = vessel, around
        _, energy = pressure_and_energy(vessel.volume_m3, left_kg, temperature_k)
        self.start = self._seen(left_kg, temperature_k, energy + vessel.wall_j_k * temperature_k, dry=False)

    def after(self, supply: Supply, given_kg: float, seconds: float) -> tuple[Supply, float]:
        """What is left after giving a mass in a time, and the enthalpy that went with it."""
        dry = not supply.liquid and supply.outlet_density < RHO_CRITICAL
        if given_kg <= 0.0:
            return self._passed(supply.left_kg, supply.energy_j, supply, seconds, dry=dry), 0.0
        half = self._passed(
            supply.left_kg - 0.5 * given_kg,
            supply.energy_j - 0.5 * given_kg * supply.outlet_j_kg,
            supply,
            0.5 * seconds,
            dry=dry,
        )
        # The last drop of liquid leaves as such, though vapour is what follows it.
        outlet = half.outlet_j_kg if half.liquid == supply.liquid else supply.outlet_j_kg
        given = given_kg * outlet
        left = supply.left_kg - given_kg
        return self._passed(left, supply.energy_j - given, supply, seconds, dry=dry), given

    def liquid_kg(self, supply: Supply) -> float | None:
        """What can still go before the liquid is out, about; None where there is none."""
        if not supply.liquid or supply.liquid_m3 <= 0.0:
            return None
        return supply.liquid_m3 * supply.outlet_density

    def _passed(self, left: float, energy: float, before: Supply, seconds: float, *, dry: bool) -> Supply:
        """Moment once heat has come in, taken at the step's end."""
        vessel, around = self._vessel, self._around
        passes = around.leak_w_k * seconds if seconds > 0.0 else 0.0
        if passes >= _HELD:
            t = around.temperature_k
            energy = pressure_and_energy(vessel.volume_m3, left, t)[1] + vessel.wall_j_k * t
        else:
            with_heat = energy + passes * around.temperature_k
            t, _, _ = settle(vessel.volume_m3, vessel.wall_j_k + passes, left, with_heat, before.temperature_k)
            energy += passes * (around.temperature_k - t)
        return self._seen(left, t, energy, dry=dry)

    def _seen(self, left: float, t: float, energy: float, *, dry: bool) -> Supply:
        """Moment with its phases; once out of liquid, mist stays and vapour leaves."""
        vessel = self._vessel
        density = left / vessel.volume_m3
        pressure, inside = pressure_and_energy(vessel.volume_m3, left, t)
        if T_TRIPLE <= t <= T_SATURATION_MAX:
            p, rho_l, rho_v, h_l, h_v = engine().saturation(t)
            if rho_v < density < rho_l * (1.0 + 1e-9):
                pool = vessel.volume_m3 * (density - rho_v) / (rho_l - rho_v) - vessel.below_tube_m3
                liquid = vessel.liquid_pickup and not dry and pool > 0.0
                return Supply(left, t, p, energy, liquid, rho_l if liquid else rho_v, h_l if liquid else h_v, pool)
        outlet = (inside + pressure * vessel.volume_m3) / left if left > 0.0 else 0.0
        return Supply(left, t, pressure, energy, density > RHO_CRITICAL, density, outlet, 0.0)


def _before_line(density: float, temperature: float, liquid: bool) -> float:
    """Density of what enters the line, from that of all that is in the bottle."""
    if temperature <= T_SATURATION_MAX:
        _, rho_l, rho_v, _, _ = engine().saturation(max(temperature, T_TRIPLE))
        if rho_v < density < rho_l:
            return rho_l if liquid else rho_v
    return density
