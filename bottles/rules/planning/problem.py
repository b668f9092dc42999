"""A day to plan: what waits, what it may be filled from, who and what there is to do it with.

Masses are in kilograms, temperatures in kelvin, times in seconds from the moment of planning. A day
holds no clock and no database: everything is given.
"""

from __future__ import annotations

from dataclasses import dataclass

from shop.physics.errors import OutOfRange

LEAST_DRAW_KG = 0.02  # less isn't worth connecting a hose for (common practice, no source)
LEAST_DRAW_S = 180  # opening, watching, closing and bleeding take as long, however little goes over (common practice, no source)
MOST_DRAWS = 3  # supply bottles that one bottle is filled from in turn


@dataclass(frozen=True, slots=True)
class Start:
    """A temperature at which a bottle can be filled, where it's chilled for that, and how long."""

    temperature_k: float
    place: int | None = None  # number of the freezer or bath; None: as it stands
    seconds: int = 0


@dataclass(frozen=True, slots=True)
class Waiting:
    """A bottle to fill; `starts` are the temperatures to be had, the first one as it stands."""

    code: str
    volume_m3: float
    wall_j_k: float
    net_kg: float
    target_kg: float
    starts: tuple[Start, ...]
    promised_s: int | None = None
    figure: float = 0.5  # condensation, between 0 and 1
    deviation: float = 0.0  # of that figure
    unsure_kg: float = 0.0  # how far what it holds may be off
    stands_in: int | None = None  # number of the freezer or bath in which it stands already
    hose: int | None = None  # where its refill is open already, and goes on

    def good_kg(self, per_mille: int) -> float:
        """What it must hold to be good enough [kg]."""
        return self.target_kg * per_mille / 1000.0


@dataclass(frozen=True, slots=True)
class Source:
    """A supply bottle on hand; `station` is the hose it hangs on, None where it's in store."""

    code: str
    volume_m3: float
    wall_j_k: float
    net_kg: float
    temperature_k: float
    station: int | None = None
    liquid: bool = True
    below_tube_m3: float = 0.0
    line_m3: float = 0.0
    unsure_kg: float = 0.0  # how far what it holds may be off


@dataclass(frozen=True, slots=True)
class Day:
    """Everything that a plan is made from."""

    bottles: tuple[Waiting, ...]
    sources: tuple[Source, ...]
    stations_free_s: tuple[int, ...]  # when each hose is free
    closes_s: int
    opens_s: int = 0
    people: int = 1
    fill_s: int = 900
    change_s: int = 300
    slots: tuple[int, ...] = ()  # bottles that each freezer or bath takes at once
    good_per_mille: int = 950
    room_k: float = 293.15

    def __post_init__(self) -> None:
        """Refuse what no day can be."""
        if self.people < 1 or self.fill_s < 1 or self.change_s < 0:
            raise OutOfRange("day", "A plan needs at least one person, and a fill takes some minutes. Check both.")
        if not 1 <= self.good_per_mille <= 1000:
            raise OutOfRange("good_enough", "Good enough is a share of the target, up to 100 %. Check the figure.")
        if any(start.place is not None and not 0 <= start.place < len(self.slots) for one in self.bottles for start in one.starts):
            raise OutOfRange("slots", "A bottle is chilled in a place that isn't there. Check the freezers and baths.")
        if any(one.stands_in is not None and not 0 <= one.stands_in < len(self.slots) for one in self.bottles):
            raise OutOfRange("slots", "A bottle stands in a freezer or bath that isn't there. Check the freezers and baths.")
        if any(self.standing_in(place) > takes for place, takes in enumerate(self.slots)):
            raise OutOfRange("slots", "More bottles stand in a freezer or bath than it takes. Check what it takes at once.")

    def draw_s(self, moved_kg: float, room_kg: float, *, spent_s: int, last: bool) -> int:
        """How long a draw takes [s]: the minutes of a fill are split over its draws (common practice, no source).

        Each takes its share of the mass that the bottle had room for, and the last what is left of the minutes,
        `spent_s` being those of the draws before; none takes less than its least.
        """
        least = min(LEAST_DRAW_S, self.fill_s)
        return max(least, self.fill_s - spent_s if last else round(self.fill_s * moved_kg / room_kg))

    def standing_in(self, place: int) -> int:
        """How many of the bottles stand in a freezer or bath already."""
        return sum(one.stands_in == place for one in self.bottles)


@dataclass(frozen=True, slots=True)
class Choice:
    """What is decided of one bottle: at which start it's filled, and from which supply bottles in turn."""

    bottle: int
    start: int
    sources: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Drawn:
    """One draw of a plan; the supply bottle's net and temperature are those after it."""

    source: int
    station: int
    from_s: int
    until_s: int
    moved_kg: float
    line_kg: float
    left_kg: float
    left_k: float
    changed: bool  # another supply bottle had to be connected
    source_k: float  # its temperature before


@dataclass(frozen=True, slots=True)
class Filled:
    """A bottle as the plan fills it."""

    choice: Choice
    draws: tuple[Drawn, ...]
    final_kg: float
    chill_from_s: int | None = None
    chill_until_s: int | None = None

    @property
    def until_s(self) -> int:
        """When it's done."""
        return self.draws[-1].until_s


# Compared as tuples, the least is best: promises broken, minutes late squared, minus how many are good
# enough, hectograms that the others lack, half kilograms left behind as vapour, changes of supply,
# supply bottles broached, minutes at which the bottles are done, added up.
Score = tuple[int, int, int, int, int, int, int, int]


@dataclass(frozen=True, slots=True)
class Bound:
    """What no plan of this day can do better than."""

    broken: int
    good: int


@dataclass(frozen=True, slots=True)
class Plan:
    """A plan, how good it is, what no plan can beat, and whether it's proven the best."""

    fills: tuple[Filled, ...]
    score: Score
    bound: Bound
    exact: bool
    looked_at: int  # partial plans

    @property
    def good(self) -> int:
        """How many bottles are good enough."""
        return -self.score[2]
