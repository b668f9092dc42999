"""How many full fills a supply bottle still has, warmed up between them or not."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from bottles.physics.condensation import PRIOR, Condensation, between
from bottles.physics.contents import NEAR_CRITICAL
from bottles.physics.fills_left_words import SENTENCES
from bottles.physics.joining import Transfer, line_loss
from bottles.physics.vessel import COLDEST, Vessel
from bottles.physics.withdrawal import Adiabatic
from shop.physics.errors import OutOfRange

_EMPTY = 1e-9  # kg: as good as nothing inside
_MOST = 10_000  # fills that are counted
_EVEN = 100.0  # Pa, as the forecast's: some hundredths of a gram


@dataclass(frozen=True, slots=True)
class Fills:
    """One count: the supply bottle before each full fill, and what is left after the last.

    `then_kg` is what the next bottle would still get; `left_kg` is left behind (heel)
    before that one.
    """

    count: int
    before_kg: tuple[float, ...]
    before_k: tuple[float, ...]
    left_kg: float
    left_k: float
    then_kg: float

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        return {
            "count": self.count,
            "before": [
                {"source_kg": kilograms, "source_c": kelvin - 273.15}
                for kilograms, kelvin in zip(self.before_kg, self.before_k, strict=True)
            ],
            "left_kg": self.left_kg,
            "left_c": self.left_k - 273.15,
            "then_kg": self.then_kg,
        }


@dataclass(frozen=True, slots=True)
class FillsLeft:
    """Counts for quick condensation and for the likely one, warmed between fills and not."""

    warmed_quick: Fills
    warmed_likely: Fills
    straight_quick: Fills
    straight_likely: Fills
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON."""
        return {
            "warmed_quick": self.warmed_quick.as_dict(),
            "warmed_likely": self.warmed_likely.as_dict(),
            "straight_quick": self.straight_quick.as_dict(),
            "straight_likely": self.straight_likely.as_dict(),
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def fills_left(
    source: Vessel,
    receiver: Vessel,
    limit_kg: float,
    *,
    line_volume_m3: float = 0.0,
    condensation: Condensation = PRIOR,
) -> FillsLeft:
    """Count the full fills that a supply bottle has left for one kind of bottle.

    Parameters
    ----------
    source : Vessel, the supply bottle at rest [-]
    receiver : Vessel, each bottle to fill at its start [-]
    limit_kg : float, its fill limit [kg]
    line_volume_m3 : float, inside volume of hose and fittings, lost at each fill [m3]
    condensation : Condensation, the figure behind the likely counts [-]

    Returns
    -------
    FillsLeft, counts [-], masses [kg] and temperatures [K] before each fill

    Assumptions
    -----------
    Each fill starts from a bottle as given. Warmed: the supply is at its first temperature
    before each. Straight: no heat comes from outside, each fill starting from the state in
    which the last one left the supply. A supply that can't give a full fill doesn't give one
    later either.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `limit`, `line`.
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
    room = limit_kg - receiver.net_kg
    codes = []
    if max(source.temperature_k, receiver.temperature_k) >= NEAR_CRITICAL:
        codes.append("near_critical")
    if room <= 0.0:
        none = Fills(0, (), (), source.net_kg, source.temperature_k, 0.0)
        return FillsLeft(none, none, none, none, _told(["receiver_full", *codes]))

    def quick(transfer: Transfer) -> float:
        if transfer.capacity_kg >= room and transfer.surplus(0.0) > 0.0 and transfer.surplus(room) >= -_EVEN:
            return room
        return min(transfer.mixed_free_kg(), room)

    def likely(transfer: Transfer) -> float:
        free = transfer.mixed_free_kg()
        return min(between(transfer.cautious_free_kg(), free, condensation.figure), room)

    warmed, straight = _Row(source, room, line_volume_m3), _Straight(source, room, line_volume_m3)

    def count(row: _Row, moved: Callable[[Transfer], float]) -> Fills:
        return _count(row, receiver, room, line_volume_m3, moved)

    counts = count(warmed, quick), count(warmed, likely), count(straight, quick), count(straight, likely)
    if counts[0].count == 0:
        codes.insert(0, "no_full_fill")
    if counts[2].count < counts[0].count or counts[3].count < counts[1].count:
        codes.append("cools_itself")
    if straight.too_cold:
        codes.append("too_cold")
    if condensation.is_prior:
        codes.append("condensation_prior")
    return FillsLeft(*counts, _told(codes))


class _Row:
    """The supply bottle before each of a row of full fills, warmed up between them."""

    def __init__(self, source: Vessel, room: float, line_volume: float) -> None:
        self.too_cold = False
        self._source, self._room, self._line_volume = source, room, line_volume
        self._states: list[Vessel | None] = [source]

    def before(self, index: int) -> Vessel | None:
        """Supply bottle after so many full fills; None where it hasn't as much."""
        states = self._states
        while len(states) <= index and states[-1] is not None:
            states.append(self._next(states[-1]))
        return states[min(index, len(states) - 1)]

    def _next(self, before: Vessel) -> Vessel | None:
        """One fill further."""
        left = before.net_kg - self._room - line_loss(before, self._line_volume)
        return replace(before, net_kg=left) if left > 0.0 else None


class _Straight(_Row):
    """The same without letting it warm: one path, drawn further at each fill."""

    def __init__(self, source: Vessel, room: float, line_volume: float) -> None:
        super().__init__(source, room, line_volume)
        self._path = Adiabatic(source) if source.net_kg > _EMPTY else None

    def _next(self, before: Vessel) -> Vessel | None:
        after = super()._next(before)
        if after is None or self._path is None:
            return None
        temperature = self._path.after(self._source.net_kg - after.net_kg).temperature_k
        if temperature < COLDEST:
            self.too_cold = True
            return None
        return replace(after, temperature_k=temperature)


def _count(
    row: _Row, receiver: Vessel, room: float, line_volume: float, moved: Callable[[Transfer], float]
) -> Fills:
    """Count by doubling and halving: a supply too weak for one fill is too weak for the next."""

    def fill(index: int) -> float:
        source = row.before(index)
        return 0.0 if source is None else moved(Transfer(source, receiver, line_volume))

    def full(index: int) -> bool:
        return fill(index) >= room * (1.0 - 1e-9) and row.before(index + 1) is not None

    count, step = 0, 1
    while count < _MOST and full(count + step - 1):
        count, step = count + step, 2 * step
    while step > 1:
        step //= 2
        if full(count + step - 1):
            count += step
    states = [state for state in (row.before(index) for index in range(count + 1)) if state is not None]
    last = states[-1]
    before = states[:count]
    return Fills(
        count, tuple(state.net_kg for state in before), tuple(state.temperature_k for state in before),
        last.net_kg, last.temperature_k, fill(count),
    )  # fmt: skip


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)
