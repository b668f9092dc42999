"""What goes over in each fill of a plan: the likely mass, quickly enough to try thousands of plans.

The likely mass without the fill limit is ``wall + c (mixed - wall)``. For a bottle's first draw it is
read off a lattice over the supply bottle's contents and temperature, whose points are worked out
when they are first needed and shared by supply bottles that are alike; between the points it's
linear. Where the liquid may run out, where the supply is the colder one, and for every further draw
of a bottle, the answer bends too sharply for that: there the transfer itself is worked out.
"""

from __future__ import annotations

from math import exp, floor

from bottles.physics.condensation import between
from bottles.physics.heating import room_loss
from bottles.physics.transfer import Transfer, line_loss
from bottles.physics.vessel import Vessel, pressure_and_energy
from bottles.physics.withdrawal import Adiabatic
from bottles.rules.planning.problem import Day, Source
from shop.physics.errors import PhysicsError

_FULL = 680.0  # kg/m3: a supply bottle's usual charge, by which the lattice is measured
_NET_STEP = 0.05  # of that charge
_KELVIN_STEP = 2.0
_DIRECT_BELOW = 0.30  # of that charge, left after a full fill: the liquid may then run out

Receiver = tuple[int, float, float]  # number of the bottle, what it holds [kg], its temperature [K]
_Key = tuple[float, ...]
_Point = tuple[int, int]


class Fills:
    """Answers for one day, kept; `calls` counts the transfers that were worked out."""

    def __init__(self, day: Day) -> None:
        """Sort the supply bottles into kinds."""
        self.day = day
        self.calls = 0
        self._kinds: list[_Key] = [
            (one.volume_m3, one.wall_j_k, float(one.liquid), one.below_tube_m3, one.line_m3) for one in day.sources
        ]
        self._lattices: dict[_Key, dict[_Point, float | None]] = {}
        self._direct: dict[_Key, float] = {}
        self._after: dict[_Key, tuple[float, float]] = {}
        self._pace: dict[_Key, float] = {}

    def alike(self, source: int, other: int) -> bool:
        """Whether two supply bottles are of one kind and as warm."""
        return self._kinds[source] == self._kinds[other] and (
            self.day.sources[source].temperature_k == self.day.sources[other].temperature_k
        )

    def free_kg(self, receiver: Receiver, source: int, net_kg: float, temperature_k: float) -> float:
        """Likely mass without the fill limit; where it's above the bottle's room it may be any figure above."""
        bottle, held, warm = receiver
        one, kind = self.day.bottles[bottle], self._kinds[source]
        charge = _FULL * kind[0]
        room = one.target_kg - held
        if held != one.net_kg or net_kg - room < _DIRECT_BELOW * charge or temperature_k < warm or not kind[2]:
            return self._memo(receiver, source, net_kg, temperature_k)
        key = (one.volume_m3, one.wall_j_k, held, warm, one.figure, *kind)
        lattice = self._lattices.setdefault(key, {})
        across, up = net_kg / (_NET_STEP * charge), (temperature_k - warm) / _KELVIN_STEP
        i, j = floor(across), floor(up)
        low = self._point(lattice, receiver, source, (i, j))
        if low is not None and low >= 1.02 * room:
            return low  # more in the supply bottle, or a warmer one, gives no less
        corners = [low, *(self._point(lattice, receiver, source, place) for place in ((i + 1, j), (i, j + 1), (i + 1, j + 1)))]
        a, b, c, d = corners
        if a is None or b is None or c is None or d is None:
            return self._memo(receiver, source, net_kg, temperature_k)
        x, y = across - i, up - j
        return (a * (1 - x) + b * x) * (1 - y) + (c * (1 - x) + d * x) * y

    def line_kg(self, source: int, net_kg: float, temperature_k: float) -> float:
        """What a draw loses with its line [kg]."""
        one = self.day.sources[source]
        if one.line_m3 <= 0.0:
            return 0.0
        key = (float(source), round(net_kg, 3), round(temperature_k, 2), -1.0)
        found = self._direct.get(key)
        if found is None:
            try:
                found = line_loss(self.vessel(source, net_kg, temperature_k), one.line_m3)
            except PhysicsError:
                found = 0.0
            self._direct[key] = found
        return found

    def source_after(self, source: int, net_kg: float, temperature_k: float, given_kg: float) -> float:
        """Temperature of a supply bottle just after giving a mass [K]."""
        key = (float(source), net_kg, temperature_k, given_kg)
        found = self._after.get(key)
        if found is None:
            try:
                given = Adiabatic(self.vessel(source, net_kg, temperature_k)).after(given_kg)
                found = (given.temperature_k, given.pressure_pa)
            except PhysicsError:
                found = (temperature_k, 0.0)
            self._after[key] = found
        return found[0]

    def receiver_after(self, receiver: Receiver, source: int, net_kg: float, temperature_k: float, moved_kg: float) -> float:
        """Temperature of a bottle just after a draw that didn't fill it [K]."""
        key = (receiver[0], receiver[1], receiver[2], float(source), net_kg, temperature_k, moved_kg)
        found = self._direct.get(key)
        if found is None:
            try:
                found = self.transfer(receiver, source, net_kg, temperature_k).mixed_receiver(moved_kg)[0]
            except PhysicsError:
                found = receiver[2]
            self._direct[key] = found
        return found

    def warmed(self, source: int, net_kg: float, temperature_k: float, seconds: float) -> float:
        """Temperature of a supply bottle after standing in the room for a while [K]."""
        room = self.day.room_k
        if seconds <= 0.0 or temperature_k == room:
            return temperature_k
        return room + (temperature_k - room) * exp(-seconds / self.pace_s(source, net_kg))

    def pace_s(self, source: int, net_kg: float) -> float:
        """Time constant at which a supply bottle takes on the room's temperature [s]."""
        key = (float(source), round(net_kg, 1))
        found = self._pace.get(key)
        if found is None:
            one = self.day.sources[source]
            found = self._pace[key] = warming_time(one, key[1], self.day.room_k)
        return found

    def vessel(self, source: int, net_kg: float, temperature_k: float) -> Vessel:
        """Return a supply bottle as the physics takes it."""
        one = self.day.sources[source]
        return Vessel(
            one.volume_m3, one.wall_j_k, net_kg, temperature_k, liquid_pickup=one.liquid, below_tube_m3=one.below_tube_m3
        )

    def _point(self, lattice: dict[_Point, float | None], receiver: Receiver, source: int, place: _Point) -> float | None:
        if place not in lattice:
            net = place[0] * _NET_STEP * _FULL * self._kinds[source][0]
            try:
                lattice[place] = self._likely(receiver, source, net, receiver[2] + place[1] * _KELVIN_STEP)
            except PhysicsError:
                lattice[place] = None
        return lattice[place]

    def _memo(self, receiver: Receiver, source: int, net_kg: float, temperature_k: float) -> float:
        # To grams and hundredths of a kelvin: finer than any reading, so that one state met by
        # two ways is asked for once.
        held, warm, net, t = round(receiver[1], 3), round(receiver[2], 2), round(net_kg, 3), round(temperature_k, 2)
        key = (float(receiver[0]), held, warm, *self._kinds[source], net, t)
        found = self._direct.get(key)
        if found is None:
            try:
                found = self._likely((receiver[0], held, warm), source, net, t)
            except PhysicsError:
                found = 0.0  # a state that no bottle should be in isn't counted on
            self._direct[key] = found
        return found

    def _likely(self, receiver: Receiver, source: int, net_kg: float, temperature_k: float) -> float:
        self.calls += 1
        transfer = self.transfer(receiver, source, net_kg, temperature_k)
        quick = transfer.mixed_free_kg()
        if quick <= 0.0:
            return 0.0
        if not transfer.source.liquid_pickup:
            return quick  # as the forecast takes it where vapour is drawn on purpose
        return max(0.0, between(transfer.cautious_free_kg(), quick, self.day.bottles[receiver[0]].figure))

    def transfer(self, receiver: Receiver, source: int, net_kg: float, temperature_k: float) -> Transfer:
        """Return a draw as the physics takes it."""
        bottle, held, warm = receiver
        one = self.day.bottles[bottle]
        return Transfer(
            self.vessel(source, net_kg, temperature_k), Vessel(one.volume_m3, one.wall_j_k, held, warm),
            self.day.sources[source].line_m3,
        )  # fmt: skip


def warming_time(source: Source, net_kg: float, room_k: float) -> float:
    """Time constant at which a standing supply bottle takes on the room's temperature [s].

    Heat that wall and contents take for a kelvin near the room's temperature, over what still air
    passes a kelvin of difference; wall and contents at one temperature.
    """
    loss = room_loss(source.volume_m3)
    colder = room_k - 5.0
    heat = pressure_and_energy(source.volume_m3, net_kg, room_k)[1] - pressure_and_energy(source.volume_m3, net_kg, colder)[1]
    return (source.wall_j_k + heat / 5.0) / loss
