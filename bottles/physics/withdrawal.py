"""What a supply bottle shows after giving a mass: the paths that it takes.

`Adiabatic`: contents and wall uniform, no heat from outside. Stages follow each other:
one phase (full of liquid, or above the critical point), two phases giving liquid, two phases
giving vapour where liquid lies below the dip tube's end, and vapour when the liquid is out.
`Held`: kept at its temperature.
"""

from __future__ import annotations

from dataclasses import dataclass

from bottles.physics.vessel import Vessel, pressure_and_energy
from bottles.physics.withdrawal_stages import OnePhase, TwoPhase, gets_wet, mass_without_reach
from bottles.physics.withdrawal_table import Drain, withdrawal_table
from shop.physics.errors import NoSolution
from shop.physics.fluid import T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.saturation_table import saturated, to_s
from shop.physics.states import RHO_CRITICAL

_STAGES = 12  # more than any path has


@dataclass(frozen=True, slots=True)
class Given:
    """A supply bottle after giving a mass, and what leaves it next: liquid, or else vapour."""

    temperature_k: float
    pressure_pa: float
    energy_given_j: float
    outlet_j_kg: float
    liquid: bool


class Held:
    """A supply bottle kept at its temperature, whatever heat that takes."""

    def __init__(self, vessel: Vessel) -> None:
        """Fix the start."""
        self._vessel = vessel
        t = vessel.temperature_k
        self._out_of_reach = RHO_CRITICAL * vessel.volume_m3
        if t <= T_SATURATION_MAX:
            self._out_of_reach = mass_without_reach(engine().saturation(t), vessel.volume_m3, vessel.below_tube_m3)

    def pressure(self, given_kg: float) -> float:
        """Pressure after giving a mass [Pa]."""
        vessel = self._vessel
        left = max(vessel.net_kg - given_kg, 0.0)
        return pressure_and_energy(vessel.volume_m3, left, vessel.temperature_k)[0]

    def has_liquid(self, given_kg: float) -> bool:
        """Say whether there is liquid that can be drawn, or a fluid as dense, after giving a mass."""
        return self._vessel.net_kg - given_kg > self._out_of_reach * (1.0 + 1e-9)


class Adiabatic:
    """A supply bottle giving nitrous without heat from outside."""

    def __init__(self, vessel: Vessel) -> None:
        """Start at rest; stages are found as far as they are asked for."""
        self._vessel = vessel
        self._v, self._c = vessel.volume_m3, vessel.wall_j_k
        self.start_j = (
            pressure_and_energy(self._v, vessel.net_kg, vessel.temperature_k)[1] + self._c * vessel.temperature_k
        )
        self._stages: list[TwoPhase | OnePhase] = []
        self._dry: float | None = None
        self._last = (-1.0, Given(0.0, 0.0, 0.0, 0.0, False))
        self._open(vessel.net_kg, vessel.temperature_k, None)

    def after(self, given_kg: float) -> Given:
        """State after giving a mass."""
        if self._last[0] == given_kg:
            return self._last[1]
        left = max(self._vessel.net_kg - given_kg, self._vessel.net_kg * 1e-6)
        for _ in range(_STAGES):
            stage = self._stages[-1]
            if stage.reaches(left):
                break
            self._open_next(stage)
        else:
            raise NoSolution("supply_path")
        for stage in self._stages:
            if stage.reaches(left):
                break
        temperature, pressure, energy, outlet, liquid = stage.state(left)
        given = self.start_j - energy - self._c * temperature
        answer = Given(temperature, pressure, given, outlet, liquid)
        self._last = (given_kg, answer)
        return answer

    def dry_out(self) -> float:
        """Mass given when no liquid can be drawn any more; nothing where none ever can [kg]."""
        if self._dry is None:
            self._dry = self._find_dry()
        return self._dry

    @property
    def gives_liquid(self) -> bool:
        """Say whether liquid is what it gives, now or, as a dense fluid that cools, before long."""
        return self._vessel.liquid_pickup and self.dry_out() > 0.0

    def _find_dry(self) -> float:
        """Follow the stages to the end of the one that gives liquid, or a fluid as dense."""
        vessel, given = self._vessel, 0.0
        for index in range(_STAGES):
            stage = self._stages[index]
            if isinstance(stage, TwoPhase):
                if stage.liquid:
                    return vessel.net_kg - stage.end[0]
                if not stage.rises:
                    break
            elif not stage.thin:
                given = vessel.net_kg - max(stage.end[0], RHO_CRITICAL * vessel.volume_m3)
            elif index or vessel.temperature_k < T_SATURATION_MAX - 1.0:
                break
            if stage.end[0] <= 0.0:
                break
            if index + 1 == len(self._stages):
                self._open_next(stage)
        return given

    def given_at(self, temperature_k: float) -> float | None:
        """Mass given when two phases have cooled to a temperature; None where there's no such moment [kg]."""
        s = to_s(temperature_k)
        for index in range(_STAGES):
            stage = self._stages[index]
            if isinstance(stage, TwoPhase):
                left = stage.left_at(s)
                if left is not None:
                    return self._vessel.net_kg - left
            elif stage.thin:
                return None
            if stage.end[0] <= 0.0:
                return None
            if index + 1 == len(self._stages):
                self._open_next(stage)
        return None

    def _open_next(self, stage: TwoPhase | OnePhase) -> None:
        """Begin what follows the last stage."""
        self._open(*stage.end, stage)

    def _open(self, mass: float, temperature: float, before: TwoPhase | OnePhase | None) -> None:
        """Begin the stage that follows from a state and from how it was reached."""
        v, c = self._v, self._c
        below = self._vessel.below_tube_m3
        if isinstance(before, OnePhase):  # the crossing may be found a hair above the dome
            temperature = min(temperature, T_SATURATION_MAX)
        if temperature <= T_SATURATION_MAX:
            side = saturated(temperature)
            _, rho_l, rho_v, _, _ = side
            edge = 1e-6 * rho_v
            if isinstance(before, TwoPhase) and before.dries:
                mass = min(mass, rho_v * v)
            if rho_v + edge < mass / v < rho_l * (1.0 + 1e-6):
                draws = self._vessel.liquid_pickup
                if isinstance(before, TwoPhase):
                    # Either liquid has come up to the tube's end, or it has sunk to it for good.
                    draws = before.rises
                elif below and mass <= mass_without_reach(side, v, below):
                    draws = False
                self._stages.append(TwoPhase(v, c, mass, temperature, side, liquid=draws, below=below))
                return
            wet = isinstance(before, OnePhase)
            at_dew = mass / v <= rho_v + edge and (wet or mass / v >= rho_v - edge)
            if at_dew and (wet or gets_wet(v, c, mass, temperature)):
                # Mist after the liquid is out stays in the bottle: it's vapour that leaves.
                # Where vapour turns wet by itself, enough liquid may gather to be drawn.
                draws = self._vessel.liquid_pickup and wet and self._gathers(mass, temperature)
                new = TwoPhase(v, c, mass, temperature, side, liquid=draws and not below, below=below)
                if draws and below:
                    new.rise_to_tube()
                self._stages.append(new)
                return
        self._stages.append(OnePhase(v, c, mass, temperature))

    def _gathers(self, mass: float, temperature: float) -> bool:
        """Say whether liquid that appears in vapour outlasts its being drawn."""
        drain = Drain(withdrawal_table(liquid=True), self._v, self._c, mass, temperature)
        colder = max(temperature - 1e-3, T_TRIPLE)
        return drain.mass_at(colder) > saturated(colder)[2] * self._v
