"""The bottle to fill while it fills: a pool of liquid, and the vapour with the wall above it.

Without exchange the pool keeps the heat that it came with (*slow to condense*); with endless
exchange the bottle is uniform (*quick*). In between heat passes as conductance times the
difference in temperature, and each zone goes as far towards the state in which the bottle
would be uniform as that heat allows: mass, energy and room pass in the same proportion, so
that all three are conserved whatever the step.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import exp, inf

from bottles.physics.vessel import HEAT, Vessel, pressure_and_energy, settle
from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_CRITICAL, P_TRIPLE, T_SATURATION_MAX, T_TRIPLE, engine
from shop.physics.states import RHO_CRITICAL

COLDEST_AROUND, HOTTEST_AROUND = 193.15, 353.15  # K: -80 °C, dry ice, to +80 °C
_HELD = 1e9  # J/K: a leak that passes so much in a step keeps the wall at its surroundings
_LIQUID_HEAT = 2500.0  # J/kg/K, liquid near room temperature: it sets a pace, not a balance
_SUPERHEAT = 0.5  # K: a pool so much above boiling boils as fast as it can
_DENSEST_ABOVE = 1000.0  # kg/m3: what is above is no vapour any more
_FULL, _NEARLY_FULL = 0.005, 0.02  # share of room left to vapour: full of liquid, and almost


@dataclass(frozen=True, slots=True)
class Around:
    """What a bottle stands in, and the heat that passes a kelvin of difference."""

    temperature_k: float
    leak_w_k: float = 0.0

    def __post_init__(self) -> None:
        """Refuse what no bottle stands in."""
        if not self.leak_w_k >= 0.0:
            raise OutOfRange("leak", "Heat can't pass backwards. Check the W/K that pass into the bottle.")
        if not COLDEST_AROUND <= self.temperature_k <= HOTTEST_AROUND:
            raise OutOfRange(
                "surroundings",
                "Room, bath and freezer are computed between -80 °C and 80 °C. Check the temperature and its unit.",
            )


@dataclass(frozen=True, slots=True)
class Zones:
    """A moment: pool and what is above it with the wall; a uniform bottle is all above."""

    pool_kg: float
    pool_j: float
    pool_m3: float
    above_kg: float
    above_j: float
    above_m3: float
    temperature_k: float
    pressure_pa: float
    pool_k: float
    full: bool = False

    @property
    def energy_j(self) -> float:
        """Energy of contents and wall."""
        return self.pool_j + self.above_j


class Filling:
    """How zones change while nitrous arrives and time passes."""

    def __init__(self, receiver: Vessel, around: Around | None, exchange_w_k: float) -> None:
        """Fix the bottle, what it stands in, and what its zones exchange."""
        if not exchange_w_k >= 0.0:
            raise OutOfRange("exchange", "Zones can't exchange less than nothing. Check the W/K between them.")
        self._receiver, self._around, self._exchange = receiver, around, exchange_w_k
        self._wall = receiver.wall_j_k + 2.5 * receiver.air  # air's own heat, 5/2 R a mole
        self._heat = HEAT
        t, m = receiver.temperature_k, receiver.net_kg
        pressure, energy = pressure_and_energy(receiver.volume_m3, m, t, receiver.air)
        whole = Zones(0.0, 0.0, 0.0, m, energy + self._wall * t, receiver.volume_m3, t, pressure, t)
        self.start = self._parted_off(whole)

    def after(self, zones: Zones, arrived_kg: float, arrived_j: float, seconds: float, pressure_pa: float) -> Zones:
        """Zones after an arrival of so much mass and enthalpy, at the pressure met on the way."""
        if self._exchange == inf:
            return self._uniform(zones, arrived_kg, arrived_j, seconds)
        new = _joined(zones, arrived_kg, arrived_j, pressure_pa) if arrived_kg > 0.0 else zones
        room = self._receiver.volume_m3
        if zones.full or new.above_m3 <= _FULL * room or new.above_kg > _DENSEST_ABOVE * new.above_m3:
            return self._split(self._uniform(zones, arrived_kg, arrived_j, seconds))
        share = max(self._boiling(zones), (_NEARLY_FULL * room - new.above_m3) / ((_NEARLY_FULL - _FULL) * room), 0.0)
        if share < 1.0 and (share > 0.0 or self._exchange > 0.0) and new.pool_kg > 0.0:
            new = self._exchanged(zones, new, share, seconds)
        elif share >= 1.0:
            return self._split(self._uniform(zones, arrived_kg, arrived_j, seconds))
        t, p, energy = self._settled(new.above_m3, new.above_kg, new.above_j, zones.temperature_k, seconds)
        return self._parted_off(replace(new, above_j=energy, temperature_k=t, pressure_pa=p))

    def _settled(
        self, volume: float, mass: float, energy: float, guess: float, seconds: float
    ) -> tuple[float, float, float]:
        """Temperature, pressure and energy once heat has come in; taken at the step's end, so stable."""
        air, around = self._receiver.air, self._around
        passes = around.leak_w_k * seconds if around is not None and around.leak_w_k > 0.0 and seconds > 0.0 else 0.0
        if around is None or passes == 0.0:
            t, p, self._heat = settle(volume, self._wall, mass, energy, guess, air, self._heat)
            return t, p, energy
        if passes >= _HELD:
            t = around.temperature_k
            p, inside = pressure_and_energy(volume, mass, t, air)
            return t, p, inside + self._wall * t
        t, p, _ = settle(volume, self._wall + passes, mass, energy + passes * around.temperature_k, guess, air)
        return t, p, energy + passes * (around.temperature_k - t)

    def _uniform(self, zones: Zones, arrived_kg: float, arrived_j: float, seconds: float) -> Zones:
        """All of the bottle at one temperature."""
        room = self._receiver.volume_m3
        mass = zones.pool_kg + zones.above_kg + arrived_kg
        t, p, energy = self._settled(room, mass, zones.energy_j + arrived_j, zones.temperature_k, seconds)
        return Zones(0.0, 0.0, 0.0, mass, energy, room, t, p, t)

    def _split(self, zones: Zones) -> Zones:
        """A uniform bottle's zones; without room for vapour it stays one."""
        split = self._parted_off(zones)
        nearly = split.above_m3 < _NEARLY_FULL * self._receiver.volume_m3
        full = nearly or (zones.above_kg > RHO_CRITICAL * zones.above_m3 and split.pool_kg == 0.0)
        return replace(zones, full=True) if full else split

    def _exchanged(self, before: Zones, zones: Zones, share: float, seconds: float) -> Zones:
        """Zones moved towards the uniform bottle, by a share at least."""
        room, mass, air = self._receiver.volume_m3, zones.pool_kg + zones.above_kg, self._receiver.air
        guess = before.temperature_k
        above, _, _ = settle(zones.above_m3, self._wall, zones.above_kg, zones.above_j, guess, air)
        t, _, _ = settle(room, self._wall, mass, zones.energy_j, above, air)
        pool_kg, pool_j, pool_m3 = _saturated_pool(room, mass, t)
        # The pool's own heat and that of what is above act in series: the difference dies away
        # as fast as both ends' ways to the common temperature say.
        apart = above - _liquid_temperature(zones.pool_j / zones.pool_kg, before.pool_k)
        reach = min(max((above - t) / apart, 0.05), 1.0) if abs(apart) > 1e-6 else 1.0
        pace = self._exchange * seconds / (_LIQUID_HEAT * zones.pool_kg * reach)
        share = max(share, 1.0 - exp(-min(pace, 700.0)))
        kg, j, m3 = (
            share * (uniform - now)
            for uniform, now in ((pool_kg, zones.pool_kg), (pool_j, zones.pool_j), (pool_m3, zones.pool_m3))
        )
        return replace(
            zones,
            pool_kg=zones.pool_kg + kg, pool_j=zones.pool_j + j, pool_m3=zones.pool_m3 + m3,
            above_kg=zones.above_kg - kg, above_j=zones.above_j - j, above_m3=zones.above_m3 - m3,
        )  # fmt: skip

    def _boiling(self, zones: Zones) -> float:
        """How violently the pool boils, from nothing to as fast as it can."""
        if zones.pool_kg <= 0.0 or zones.pressure_pa >= P_CRITICAL:
            return 0.0
        boils = engine().boiling_temperature(max(zones.pressure_pa, P_TRIPLE))
        return min(max((zones.pool_k - boils - 0.01) / _SUPERHEAT, 0.0), 1.0)

    def _parted_off(self, zones: Zones) -> Zones:
        """What has condensed above drips into the pool."""
        t = zones.temperature_k
        pool_kg, pool_j, pool_m3 = zones.pool_kg, zones.pool_j, zones.pool_m3
        if self._exchange == inf:
            return zones
        if T_TRIPLE <= t <= T_SATURATION_MAX and zones.above_kg > 0.0:
            p, rho_l, rho_v, h_l, _ = engine().saturation(t)
            if rho_v < zones.above_kg / zones.above_m3 < rho_l:
                drip = (zones.above_kg - rho_v * zones.above_m3) / (1.0 - rho_v / rho_l)
                heat = drip * (h_l - p / rho_l)
                pool_kg, pool_j, pool_m3 = pool_kg + drip, pool_j + heat, pool_m3 + drip / rho_l
                zones = replace(
                    zones,
                    above_kg=zones.above_kg - drip,
                    above_j=zones.above_j - heat,
                    above_m3=zones.above_m3 - drip / rho_l,
                )
        pool_k = _liquid_temperature(pool_j / pool_kg, zones.pool_k) if pool_kg > 0.0 else t
        return replace(zones, pool_kg=pool_kg, pool_j=pool_j, pool_m3=pool_m3, pool_k=pool_k)


def _joined(zones: Zones, kg: float, joules: float, pressure: float) -> Zones:
    """Zones with an arrival parted at a pressure: its liquid to the pool, its vapour above."""
    fluid = engine()
    t = T_SATURATION_MAX if pressure >= P_CRITICAL else fluid.boiling_temperature(max(pressure, P_TRIPLE))
    _, rho_l, _, h_l, h_v = fluid.saturation(t)
    enthalpy = joules / kg
    share = min(max((h_v - enthalpy) / (h_v - h_l), 0.0), 1.0)
    liquid = share * kg
    heat = liquid * min(h_l, enthalpy) if share > 0.0 else 0.0
    grown = liquid / rho_l
    work = pressure * grown
    return replace(
        zones,
        pool_kg=zones.pool_kg + liquid, pool_j=zones.pool_j + heat - work, pool_m3=zones.pool_m3 + grown,
        above_kg=zones.above_kg + kg - liquid, above_j=zones.above_j + joules - heat + work,
        above_m3=zones.above_m3 - grown,
    )  # fmt: skip


def _saturated_pool(room: float, mass: float, temperature: float) -> tuple[float, float, float]:
    """Mass, energy and room of the liquid in a uniform bottle; nothing with one phase."""
    if not T_TRIPLE <= temperature <= T_SATURATION_MAX:
        return 0.0, 0.0, 0.0
    p, rho_l, rho_v, h_l, _ = engine().saturation(temperature)
    if mass <= rho_v * room:
        return 0.0, 0.0, 0.0
    liquid = min((mass - rho_v * room) / (1.0 - rho_v / rho_l), mass)
    return liquid, liquid * (h_l - p / rho_l), min(liquid / rho_l, room * (1.0 - 1e-6))


def _liquid_temperature(energy: float, guess: float) -> float:
    """Temperature at which saturated liquid has an energy [K]."""
    saturation = engine().saturation

    def surplus(t: float) -> float:
        p, rho_l, _, h_l, _ = saturation(t)
        return h_l - p / rho_l - energy

    old = min(max(guess, T_TRIPLE), T_SATURATION_MAX)
    f_old, slope = surplus(old), _LIQUID_HEAT
    for _ in range(12):
        new = min(max(old - f_old / slope, T_TRIPLE), T_SATURATION_MAX)
        if abs(new - old) < 1e-4:
            return new
        f_new = surplus(new)
        slope = max((f_new - f_old) / (new - old), 0.3 * _LIQUID_HEAT)
        old, f_old = new, f_new
    return old
