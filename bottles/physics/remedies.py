"""What would help where a refill would end short of its limit.

Three cases stand beside each other: *quick*, *likely* by the condensation figure, and *every
case*, which is that of vapour slow to condense. What a remedy gains is what it adds to the
same case as it stands.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial

from bottles.physics.condensation import PRIOR, Condensation, between
from bottles.physics.contents import one_phase_temperature
from bottles.physics.filling_edge import edge_by_mass, edge_by_pressure
from bottles.physics.joining import Transfer, line_loss
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED, Start, start_vessel
from bottles.physics.remedies_words import SENTENCES
from bottles.physics.transfer import held
from bottles.physics.venting_filling import vent_while_filling
from bottles.physics.vessel import COLDEST, HOTTEST, Vessel
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import T_SATURATION_MAX, engine

QUICK, LIKELY, EVERY = "quick", "likely", "every case"
# By effort: what costs the least trouble and nitrous first (common practice, no source).
CHILL, VENT_FIRST, PURGE, WAIT = "chill", "vent_first", "purge", "wait"
VENT_FILLING, FULLER, WARM = "vent_filling", "fuller_supply", "warm_supply"
EFFORT = (CHILL, VENT_FIRST, PURGE, WAIT, VENT_FILLING, FULLER, WARM)
_FINE_K = 0.05  # how near to the edge a temperature is looked for
_MARGIN = 2.0  # K that a warmed supply stays below the end of its two phases
_WORTH = 1e-3  # share of the fill below which a gain is no help


@dataclass(frozen=True, slots=True)
class Remedy:
    """One thing that would help: to which temperature or mass, and what it gives and costs."""

    kind: str
    case: str
    temperature_k: float | None
    mass_kg: float | None
    fills: bool
    gain_kg: float
    cost_kg: float

    @property
    def caution(self) -> str:
        """Sentence that goes with it."""
        return SENTENCES[self.kind]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        return {
            "kind": self.kind,
            "case": self.case,
            "temperature_c": None if self.temperature_k is None else self.temperature_k - 273.15,
            "mass_kg": self.mass_kg,
            "fills": self.fills,
            "gain_kg": self.gain_kg,
            "cost_kg": self.cost_kg,
            "caution": self.caution,
        }


@dataclass(frozen=True, slots=True)
class Remedies:
    """How short the fill is in each case, and what would help, by effort."""

    room_kg: float
    short_kg: tuple[tuple[str, float], ...]
    remedies: tuple[Remedy, ...]
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        return {
            "room_kg": self.room_kg,
            "short_kg": dict(self.short_kg),
            "remedies": [remedy.as_dict() for remedy in self.remedies],
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def remedies(
    *,
    source: Vessel,
    receiver_volume_m3: float,
    receiver_wall_j_k: float,
    receiver_temperature_k: float,
    limit_kg: float,
    start: Start | None = None,
    source_range_kg: tuple[float, float] | None = None,
    line_volume_m3: float = 0.0,
    condensation: Condensation = PRIOR,
    coldest_k: float = COLDEST,
) -> Remedies:
    """Say what would help a short fill, from the inputs of its forecast.

    Parameters
    ----------
    source : Vessel, the supply bottle [-]
    receiver_volume_m3 : float, water capacity of the bottle to fill [m3]
    receiver_wall_j_k : float, heat capacity of its wall [J/K]
    receiver_temperature_k : float, its temperature [K]
    limit_kg : float, its fill limit [kg]
    start : Start or None, how it starts; vented without [-]
    source_range_kg : tuple of float or None, where only a reading is known nothing is
        computed [kg]
    line_volume_m3 : float, inside volume of hose and fittings [m3]
    condensation : Condensation, the figure [-]
    coldest_k : float, how cold the shop can chill it [K]

    Returns
    -------
    Remedies, by effort: temperatures [K], masses, gains and costs in nitrous [kg]

    Assumptions
    -----------
    One thing is changed, the rest stays as it is. A chilled bottle that starts vented is
    vented cold; any other keeps what it holds. A supply is warmed no further than 52 °C, and
    not so far that it's full of liquid or dry. What venting or purging first gains is what the
    bottle holds more in the end, at its temperature again; a bottle weighed to hold no more than
    its own vapour can be vented too. Fuller and warmer supplies are judged as quick, or as
    likely where it's full in the quick case anyway.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `limit`, `line`, `start`, `coldest`, or a bottle out of range.
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model on Lemmon and Span, J. Chem. Eng. Data 51 (2006) 785-850.
    """
    if not 0.0 < limit_kg < 1e6:
        raise OutOfRange("limit", "A fill limit is above nothing. Check it and its unit.")
    if not 0.0 <= line_volume_m3 < 1.0:
        raise OutOfRange("line", "A line's volume can't be below nothing. Check it and its unit.")
    if not COLDEST - 1e-9 <= coldest_k <= HOTTEST:
        raise OutOfRange("coldest", "Bottles are chilled between -40 °C and 52 °C. Check how cold it gets.")
    begins = start or Start()

    def receiver_at(temperature_k: float, kind: Start | None = None) -> Vessel:
        return start_vessel(
            volume_m3=receiver_volume_m3, wall_j_k=receiver_wall_j_k, temperature_k=temperature_k,
            start=kind or begins,
        )  # fmt: skip

    receiver = receiver_at(receiver_temperature_k)
    purge = receiver_at(receiver_temperature_k, Start(VENTED, ambient_pa=begins.ambient_pa))
    vents = {AIR: PURGE, OWN_VAPOUR: VENT_FIRST}.get(begins.kind)
    # By its weight, too, a bottle may hold no more than its own vapour: the usual empty one.
    if begins.kind == WEIGHED and receiver.net_kg <= receiver_at(receiver_temperature_k, Start(OWN_VAPOUR)).net_kg:
        vents = VENT_FIRST
    if begins.kind != VENTED and begins.net_kg is None:
        begins = replace(begins, net_kg=receiver.net_kg)
    room = limit_kg - receiver.net_kg
    if room <= 0.0:
        return Remedies(0.0, (), (), _told("receiver_full"))
    if source_range_kg is not None:
        return Remedies(room, (), (), _told("source_unknown"))
    asked = _Asked(Transfer(source, receiver, line_volume_m3), receiver_at, limit_kg, condensation.figure, coldest_k)
    short = {case: max(-asked.beyond(case), 0.0) for case in (QUICK, LIKELY, EVERY)}
    told_short = tuple(short.items())
    if not any(short.values()):
        return Remedies(room, told_short, (), _told("full_anyway"))
    found = _chilled(asked, short)
    if vents and purge.net_kg < limit_kg:
        found += _purged(asked, short, vents, purge)
    found += _waited(asked, short) + _vented(asked, short) + _supplied(asked, short)
    worth = [each for each in found if each.fills or each.gain_kg > _WORTH * room]
    worth.sort(key=lambda each: (EFFORT.index(each.kind), (QUICK, LIKELY, EVERY).index(each.case)))
    helps = any(each.fills and each.kind != FULLER for each in worth)
    return Remedies(room, told_short, tuple(worth), () if helps else _told("nothing_helps"))


class _Asked:
    """The refill as it stands, and what has been computed about it."""

    def __init__(
        self, transfer: Transfer, receiver_at: Callable[[float], Vessel], limit: float, figure: float, coldest: float
    ) -> None:
        self.transfer, self.receiver_at, self.limit = transfer, receiver_at, limit
        self.figure, self.coldest = figure, coldest
        self.now = transfer.receiver.temperature_k
        self._at: dict[float, Transfer | None] = {self.now: transfer}
        self._slow: dict[float, None] = {}

    @property
    def starts(self) -> list[float]:
        """Temperatures of the bottle to fill for which slow filling was followed."""
        return list(self._slow)

    def at(self, temperature: float) -> Transfer | None:
        """The pair with the bottle to fill at another temperature; None where that can't be."""
        if temperature not in self._at:
            now = self.transfer
            try:
                receiver = self.receiver_at(temperature)
            except PhysicsError:
                self._at[temperature] = None
            else:
                self._at[temperature] = Transfer(
                    now.source, receiver, now.line_volume_m3, path=now.path, like=now
                )  # fmt: skip
        return self._at[temperature]

    def beyond(self, case: str, transfer: Transfer | None = None) -> float:
        """By how much more than a full fill would go in [kg]."""
        pair = transfer or self.transfer
        quick = pair.mixed_free_kg()
        free = quick
        if case != QUICK:
            slow = pair.cautious_free_kg()
            free = min(slow, quick) if case == EVERY else between(slow, quick, self.figure)
        beyond = free - (self.limit - pair.receiver.net_kg)
        return 0.0 if abs(beyond) < 1e-9 else beyond

    def beyond_at(self, case: str, temperature: float) -> float:
        """The same at another start of the bottle to fill."""
        pair = self.at(temperature)
        if pair is None:
            return -self.limit
        if case != QUICK:
            self._slow[temperature] = None
        return self.beyond(case, pair)

    def spare_pa(self, transfer: Transfer) -> float:
        """Pressure that drives the last gram of a quick full fill; below nothing where there's none."""
        room = self.limit - transfer.receiver.net_kg
        if room <= 0.0 or room > transfer.capacity_kg:
            return -1e9
        return min(transfer.surplus(room), transfer.surplus(0.0))


def _chilled(asked: _Asked, short: dict[str, float]) -> list[Remedy]:
    """Warmest starts that give a full fill; what the coldest gives where none does."""
    found: list[Remedy] = []
    coldest = asked.coldest
    if coldest >= asked.now or asked.at(coldest) is None:
        return found
    for case in (QUICK, EVERY, LIKELY):  # by what has been looked at before, the last costs least
        if short[case] <= 0.0:
            continue
        at_cold = asked.beyond_at(case, coldest)
        if at_cold < 0.0:
            found.append(Remedy(CHILL, case, coldest, None, False, max(at_cold + short[case], 0.0), 0.0))
        elif case == QUICK:
            edge = edge_by_pressure(lambda t: _spare(asked, asked.at(t)), coldest, asked.now, 0.02)
            found.append(Remedy(CHILL, case, edge, None, True, short[case], 0.0))
        else:
            known = [(t, asked.beyond_at(case, t)) for t in {*asked.starts, asked.now}]
            edge = edge_by_mass(partial(asked.beyond_at, case), known, 1e-3 * asked.limit, _FINE_K)
            found.append(Remedy(CHILL, case, edge, None, True, short[case], 0.0))
    return found


def _spare(asked: _Asked, pair: Transfer | None) -> float:
    """Pressure to spare; far below nothing where such a pair can't be."""
    return -1e9 if pair is None else asked.spare_pa(pair)


def _purged(asked: _Asked, short: dict[str, float], kind: str, purged: Vessel) -> list[Remedy]:
    """What venting, or purging, the bottle to fill first would give; for the cautious case alone nothing is let out."""
    now = asked.transfer
    vented = Transfer(now.source, purged, now.line_volume_m3, path=now.path, like=now)
    cost = max(now.receiver.net_kg - purged.net_kg, 0.0)
    found = []
    for case in (QUICK, LIKELY):
        if short[case] <= 0.0:
            continue
        after = asked.beyond(case, vented)
        gain = min(after, 0.0) + short[case]
        if gain > 0.0:
            found.append(Remedy(kind, case, None, None, after >= 0.0, gain, cost))
    return found


def _waited(asked: _Asked, short: dict[str, float]) -> list[Remedy]:
    """What time would give, both kept at their temperatures."""
    moved = held(asked.transfer, asked.limit).moved_kg
    room = asked.limit - asked.transfer.receiver.net_kg
    fills = moved >= room * (1.0 - 1e-9)
    return [
        Remedy(WAIT, case, None, None, fills, max(moved - (room - short[case]), 0.0), 0.0)
        for case in (LIKELY,)
        if short[case] > 0.0
    ]


def _vented(asked: _Asked, short: dict[str, float]) -> list[Remedy]:
    """What letting vapour out while filling would give and cost."""
    answer = vent_while_filling(asked.transfer, asked.limit)
    found = []
    if short[QUICK] > 0.0 and answer.vented_kg > 0.0:
        found.append(
            Remedy(VENT_FILLING, QUICK, None, answer.vented_kg, answer.fills, answer.gain_kg, answer.vented_kg)
        )
    slow = answer.slow_vented_kg
    if answer.fills and short[EVERY] > 0.0 and slow is not None and slow > 0.0:
        found.append(Remedy(VENT_FILLING, EVERY, None, slow, True, short[EVERY], slow))
    return found


def _supplied(asked: _Asked, short: dict[str, float]) -> list[Remedy]:
    """A fuller supply bottle, and this one warmed."""
    case = QUICK if short[QUICK] > 0.0 else LIKELY
    if short[case] <= 0.0:
        return []
    now, source = asked.transfer, asked.transfer.source
    t = source.temperature_k

    room = asked.limit - now.receiver.net_kg

    def pair(*, net_kg: float | None = None, temperature_k: float | None = None) -> Transfer | None:
        try:
            new = replace(
                source, net_kg=source.net_kg if net_kg is None else net_kg,
                temperature_k=t if temperature_k is None else temperature_k,
            )  # fmt: skip
            if new.net_kg - line_loss(new, now.line_volume_m3) <= room:
                return None
            return Transfer(new, now.receiver, now.line_volume_m3, like=now)
        except PhysicsError:
            return None

    def edge(name: str, full: float, at_full: float, short_at: float, fine: float) -> float:
        if case == QUICK:
            return edge_by_pressure(lambda x: _spare(asked, pair(**{name: x})), full, short_at, fine)

        def beyond(x: float) -> float:
            other = pair(**{name: x})
            return -asked.limit if other is None else asked.beyond(case, other)

        return edge_by_mass(beyond, [(full, at_full), (short_at, -short[case])], 1e-3 * asked.limit, fine)

    found = []
    full = engine().saturation(t)[1] if t <= T_SATURATION_MAX else 750.0
    most = 0.999 * full * source.volume_m3
    fullest = pair(net_kg=most) if most > source.net_kg else None
    if fullest is not None and (at_full := asked.beyond(case, fullest)) >= 0.0:
        least = edge("net_kg", most, at_full, source.net_kg, 1e-4 * most)
        found.append(Remedy(FULLER, case, None, least, True, short[case], 0.0))
    hottest = _warmest_supply(source)
    tries = []
    # Warmer isn't always better: near the end of two phases little liquid is left to draw.
    for kelvin in (hottest, 0.5 * (hottest + t)) if hottest > t + 1.0 else ():
        warmed = pair(temperature_k=kelvin)
        if warmed is not None:
            tries.append((asked.beyond(case, warmed), kelvin))
            if tries[-1][0] >= 0.0:
                break
    if tries:
        at_hot, to = max(tries)
        if at_hot >= 0.0:
            to = edge("temperature_k", to, at_hot, t, _FINE_K)
        gain = short[case] + min(at_hot, 0.0)
        found.append(Remedy(WARM, case, to, None, at_hot >= 0.0, max(gain, 0.0), 0.0))
    return found


def _warmest_supply(source: Vessel) -> float:
    """How far a supply bottle may be warmed at all."""
    try:
        temperature, word = one_phase_temperature(source.net_kg, source.volume_m3)
    except OutOfRange:  # one phase at any temperature: a trace of vapour, or all liquid
        return HOTTEST if source.net_kg < 100.0 * source.volume_m3 else COLDEST
    if word == "dry" and temperature <= source.temperature_k:
        return HOTTEST  # vapour alone
    return min(HOTTEST, temperature - _MARGIN)


def _told(code: str) -> tuple[tuple[str, str], ...]:
    """One code with its sentence."""
    return ((code, SENTENCES[code]),)
