"""Forecast a refill from what was read: assembling alone, the physics does the rest.

Computed outside any transaction. When a refill starts the server computes anew from what was
submitted and keeps readings and answer as one row (`keep_forecast`).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import product
from typing import Any

from bottles.models import Bottle, Fit, Forecast, Station, Supply
from bottles.physics.condensation import PRIOR, Condensation
from bottles.physics.contents import Contents, contents_from_reading
from bottles.physics.forecast import Forecast as Transferred
from bottles.physics.forecast import Tolerances, forecast
from bottles.physics.pumped import PumpedRefill
from bottles.physics.receiver_start import OWN_VAPOUR, VENTED, WEIGHED, Start, start_vessel
from bottles.physics.transfer import PHYSICS_VERSION
from bottles.physics.vessel import Vessel
from bottles.selectors.filling_facts import (
    Known,
    Walls,
    air_pressure,
    below_tube_m3,
    known_contents,
    takes_liquid,
    walls_by,
)
from bottles.selectors.learning import latest_figures
from bottles.services.stations import line_volume_m3
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act, Shop
from shop.physics.units import Entry

# How a temperature was taken, and by how much more it may then be wrong (common practice, no source).
TAKEN = (
    ("wall", "on its wall", 0),
    ("bath", "in its bath or freezer, long enough", 0),
    ("air", "in the air beside it", 3_000),
)
ABOVE = frozenset({"above_vapour_pressure", "beyond_any_fill"})


class ReadingMissing(Refusal):
    """Nothing tells what is in the supply bottle: read its gauge, or weigh it."""

    code = "reading missing"


class DangerSign(NotReady):
    """The gauge stands above what nitrous shows at this temperature. Don't warm it, don't add to it, weigh it now."""

    code = "danger sign"


@dataclass(frozen=True, slots=True)
class Readings:
    """What was read, each with what was typed; a temperature with how it was taken."""

    supply_temperature: Entry
    bottle_temperature: Entry
    gauge: Entry | None = None
    supply_weight: Entry | None = None  # gross, on the station's supply scale
    bottle_weight: Entry | None = None  # gross, before filling
    hose_pull_g: int = 0  # of that weight, where the line was on
    taken: str = "wall"
    bottle_taken: str = "wall"
    start: str = WEIGHED
    target: Entry | None = None

    def plain(self) -> dict[str, Any]:
        """The readings as they're kept: typed and stored."""
        kept: dict[str, Any] = {}
        for name in self.__dataclass_fields__:
            value = getattr(self, name)
            kept[name] = {"typed": value.typed, "stored": value.stored, "unit": value.unit} if isinstance(value, Entry) else value
        return kept


@dataclass(frozen=True, slots=True)
class Held:
    """What a bottle is taken to hold, its ± and the word for where that comes from."""

    grams: int
    error_g: int
    origin: str  # weighed now, weighed before, by the books
    tare_error_g: int = 0  # of that ±, what no finer scale betters


@dataclass(frozen=True, slots=True)
class Pair:
    """The two bottles as the physics takes them, by their likeliest walls, and how well they were read."""

    source: Vessel
    receiver_volume_m3: float
    receiver_wall_j_k: float
    receiver_temperature_k: float
    limit_kg: float  # what it's filled to: the target
    start: Start
    source_range_kg: tuple[float, float] | None
    line_volume_m3: float
    condensation: Condensation
    tolerances: Tolerances

    def worked_out(self) -> Transferred:
        """The forecast of these two."""
        return forecast(**{name: getattr(self, name) for name in self.__dataclass_fields__})

    @property
    def receiver(self) -> Vessel:
        """The bottle to fill, with what its start leaves in it."""
        return start_vessel(
            volume_m3=self.receiver_volume_m3, wall_j_k=self.receiver_wall_j_k, temperature_k=self.receiver_temperature_k,
            start=self.start,
        )  # fmt: skip


@dataclass(frozen=True, slots=True)
class Answer:
    """Everything that the page says of a refill to come; masses in grams."""

    readings: Readings
    pair: Pair
    transferred: Transferred
    contents: Contents | None  # what the gauge allows; None where it wasn't read
    source: Held | None
    start_g: int
    target_g: int
    low_g: int
    likely_g: int | None
    high_g: int
    line_g: int
    source_left_g: int | None
    danger: bool
    blocked: bool
    notes: tuple[tuple[str, str], ...]
    own: Held | None = None  # the bottle to fill, where it was weighed
    fit: Fit | None = None  # whence the condensation figure; None: the prior
    pumped: PumpedRefill | None = None  # what a pump moves, where one does

    def result(self) -> dict[str, Any]:
        """The answer as it's kept."""
        contents = None
        if self.contents is not None:
            contents = {"region": self.contents.region, "warnings": [code for code, _ in self.contents.warnings]}
        return self.transferred.as_dict() | {
            "start_g": self.start_g,
            "target_g": self.target_g,
            "line_g": self.line_g,
            "source_g": self.source.grams if self.source else None,
            "source_error_g": self.source.error_g if self.source else None,
            "source_origin": self.source.origin if self.source else None,
            "contents": contents,
            "pumped": self.pumped.as_dict() if self.pumped else None,
            "notes": [code for code, _ in self.notes],
        }


@dataclass(frozen=True, slots=True)
class Asked:
    """What a forecast is asked for: the two bottles, their limits, the shop."""

    bottle: Bottle
    supply: Supply
    limit_g: int
    source_limit_g: int | None
    shop: Shop


def work_out(asked: Asked, readings: Readings) -> Answer:
    """Work out the forecast.

    Raises ReadingMissing where nothing tells what the supply bottle holds; PhysicsError, with its
    sentence, for readings that no bottle can show.
    """
    bottle, station = asked.bottle, asked.supply.station
    if bottle.capacity_ml is None:
        raise NotReady(f"{bottle.code} has no water capacity written down, so it has no fill limit.", code="no capacity")
    notes: list[tuple[str, str]] = []
    source, own = known_contents(asked.supply.bottle), known_contents(bottle)
    held = _source_held(asked, readings, source)
    contents = _contents(asked, readings, held, notes)
    if held is None and contents is None:
        raise ReadingMissing(field="gauge")
    target_g = min(asked.limit_g, readings.target.stored if readings.target else asked.limit_g)
    if target_g <= 0:
        raise Refusal("A target must be above nothing. Leave it empty for the fill limit.", code="target", field="target")
    weighed = _own_held(asked, readings, own)
    start = _start(asked, readings, weighed, notes)
    spread = _spread(contents, held, _contents(asked, readings, None, []) if held and held.origin == BOOKS else None)
    figure = latest_figures(asked.shop).of(bottle)
    # Where it wasn't weighed for its start, this is what the station's scale could tell of it.
    own_g = weighed.error_g if weighed and start.net_kg is not None else own.error_on(station.scale)
    tolerances = _tolerances(station, readings, held.error_g if held else 0, own_g)
    pairs = [
        replace(pair, condensation=figure.condensation, tolerances=tolerances)
        for pair in _each_wall(asked, readings, (source, own), start, held, spread, target_g, notes)
    ]
    answers = [pair.worked_out() for pair in pairs]
    main = answers[0]
    likely = [one.likely_kg for one in answers if one.likely_kg is not None]
    danger = contents is not None and _dangerous(contents, held)
    resolved = contents is not None and contents.agrees is True and held is not None and held.origin != BOOKS
    left = [one.source_left_kg for one in answers if one.source_left_kg is not None]
    return Answer(
        readings=readings, pair=pairs[0], transferred=main, contents=contents, source=held,
        start_g=round((target_g / 1000 - main.room_kg) * 1000) if main.room_kg else target_g,
        target_g=target_g,
        low_g=int(min(one.low_kg for one in answers) * 1000),
        likely_g=round(sum(likely) / len(likely) * 1000) if likely else None,
        high_g=round(max(one.high_kg for one in answers) * 1000 + 0.5),
        line_g=station.line_loss_g if station.line_loss_g is not None else round(main.line_loss_kg * 1000),
        source_left_g=max(0, round(min(left) * 1000)) if left else None,
        danger=danger, blocked=danger and not resolved, notes=tuple(notes), own=weighed, fit=figure.fit,
    )  # fmt: skip


def keep_forecast(*, act: Act, asked: Asked, answer: Answer) -> Forecast:
    """Insert the forecast within an act's transaction."""
    row = Forecast(
        act=act, receiver=asked.bottle, source=asked.supply.bottle, station=asked.supply.station,
        readings=answer.readings.plain() | {"inverted": asked.supply.inverted}, physics_version=PHYSICS_VERSION, fit=answer.fit,
        low_g=answer.low_g, likely_g=answer.likely_g, high_g=answer.high_g, result=answer.result(),
    )  # fmt: skip
    row.save()
    return row


BOOKS = "by the books"


def _source_held(asked: Asked, readings: Readings, known: Known) -> Held | None:
    """What the supply bottle holds: by its weight now, else by its last weighing and the books."""
    if readings.supply_weight is not None:
        tare = known.tare
        if tare is None:
            raise NotReady(
                f"{asked.supply.bottle.code} has no tare written down: its weight says nothing yet.", code="no tare",
                field="supply_weight",
            )  # fmt: skip
        scale = asked.supply.station.supply_scale
        error = known.error_on(scale)
        net = readings.supply_weight.stored - tare.total_g
        if net < -error:
            raise Refusal(
                "The supply bottle weighs less than its tare. Read the scale again, and check its tare list.",
                code="tare above gross", field="supply_weight",
            )  # fmt: skip
        return Held(max(0, net), error, "weighed now")
    if known.grams is None:
        return None
    return Held(known.grams, known.error_g, "weighed before" if known.still_as_weighed else BOOKS)


def _contents(asked: Asked, readings: Readings, held: Held | None, notes: list[tuple[str, str]]) -> Contents | None:
    """What the gauge allows, and which reading contradicts which."""
    source, station = asked.supply.bottle, asked.supply.station
    if readings.gauge is None:
        notes.append(("no_gauge", "The supply bottle's gauge wasn't read: nothing checks its weight."))
        return None
    if source.capacity_ml is None:
        notes.append(("no_source_capacity", "The supply bottle's capacity isn't known: its gauge says little."))
        return None
    common: dict[str, Any] = {
        "capacity_m3": source.capacity_ml / 1e6,
        "temperature_k": readings.supply_temperature.stored / 1000,
        "pressure_pa": float(readings.gauge.stored),
        "limit_kg": asked.source_limit_g / 1000 if asked.source_limit_g else None,
        "gauge_tolerance_pa": float(station.gauge_tolerance_pa),
        "thermometer_tolerance_k": tolerance_k(station, readings.taken),
    }
    if held is None:
        return contents_from_reading(**common)
    return contents_from_reading(**common, net_kg=held.grams / 1000, scale_tolerance_kg=max(held.error_g, 1) / 1000)


def _dangerous(contents: Contents, held: Held | None) -> bool:
    """Whether a gauge above what nitrous shows is a danger sign.

    Above the vapour pressure it always is. At it, with less inside than would show it, only a scale
    makes it one: books alone may well be what is wrong.
    """
    codes = {code for code, _ in contents.warnings}
    return bool(codes & ABOVE) or ("reads_above_weight" in codes and held is not None and held.origin != BOOKS)


def _spread(
    contents: Contents | None, held: Held | None, by_reading: Contents | None
) -> tuple[float, float] | None:  # fmt: skip
    """The span of what the supply bottle may hold, where no one figure is to be trusted."""
    if held is None:
        return (contents.least_kg, contents.most_kg) if contents else None
    if contents is None or contents.agrees is not False:
        return None
    # The weight counts where it was read on a scale; books alone don't outweigh a gauge.
    if held.origin != BOOKS:
        return None
    if any(code == "reads_below_weight" for code, _ in contents.warnings):
        return (0.0, held.grams / 1000)
    return (by_reading.least_kg, by_reading.most_kg) if by_reading else None


def _own_held(asked: Asked, readings: Readings, known: Known) -> Held | None:
    """What the bottle to fill holds by a scale: now, else since nothing moved; None where none says."""
    tare_g = known.tare.error_g if known.tare else 0
    if readings.bottle_weight is not None and known.tare is not None:
        net = readings.bottle_weight.stored - readings.hose_pull_g - known.tare.total_g
        error = known.error_on(asked.supply.station.scale)
        if net < -error:
            raise Refusal(
                "The bottle to fill weighs less than its tare. Read the scale again, and check that what its tare list names "
                "is on it.",
                code="tare above gross", field="bottle_weight",
            )  # fmt: skip
        return Held(max(0, net), error, "weighed now", tare_g)
    if known.grams is None or not known.still_as_weighed:
        return None
    return Held(known.grams, known.error_g, "weighed before", tare_g)


def _start(asked: Asked, readings: Readings, own: Held | None, notes: list[tuple[str, str]]) -> Start:
    """How the bottle to fill starts, and what the scale has to say about that."""
    net, ambient = own.grams if own else None, air_pressure(asked.shop)
    if readings.start != WEIGHED:
        start = Start(readings.start, net / 1000 if net is not None and readings.start == OWN_VAPOUR else None, ambient)
        if own is not None and readings.start == VENTED and own.grams > own.error_g + _vented_g(asked, readings, ambient):
            notes.append(("not_vented", "By its weight the bottle isn't vented: say that it's weighed, or look again."))
        return start
    if net is None:
        raise Refusal(
            "Weigh the bottle to fill before the forecast, or say how it starts.", code="start unknown", field="bottle_weight"
        )
    if net <= _vented_g(asked, readings, ambient):
        return Start(VENTED, None, ambient)
    return Start(WEIGHED, net / 1000, ambient)


def _vented_g(asked: Asked, readings: Readings, ambient_pa: float) -> int:
    capacity = asked.bottle.capacity_ml or 0
    vessel = start_vessel(
        volume_m3=capacity / 1e6, wall_j_k=1.0, temperature_k=readings.bottle_temperature.stored / 1000,
        start=Start(VENTED, None, ambient_pa),
    )  # fmt: skip
    return round(vessel.net_kg * 1000)


def _each_wall(
    asked: Asked, readings: Readings, known: tuple[Known, Known], start: Start, held: Held | None,
    spread: tuple[float, float] | None, target_g: int, notes: list[tuple[str, str]],
) -> list[Pair]:  # fmt: skip
    """The two bottles with each wall that they may have; the first pair is shown in full."""
    bottle, source, station = asked.bottle, asked.supply.bottle, asked.supply.station
    source_walls, own_walls = walls_by(source, known[0].tare), walls_by(bottle, known[1].tare)
    notes.extend(_wall_notes(source, source_walls) + _wall_notes(bottle, own_walls))
    liquid = takes_liquid(source, inverted=asked.supply.inverted)
    if liquid is None:
        notes.append(("tube_unknown", f"Whether {source.code} has a dip (siphon) tube isn't known: it's taken to give liquid."))
    if source.capacity_ml is None:
        raise NotReady(f"{source.code} has no water capacity written down. Complete its record first.", code="no source capacity")
    found = []
    for source_wall, own_wall in product(source_walls.heat_j_k, own_walls.heat_j_k):
        supply = Vessel(
            source.capacity_ml / 1e6, source_wall, spread[1] if spread else (held.grams / 1000 if held else 0.0),
            readings.supply_temperature.stored / 1000, liquid_pickup=liquid is not False,
            below_tube_m3=below_tube_m3(source, inverted=asked.supply.inverted),
        )  # fmt: skip
        found.append(
            Pair(
                source=supply, receiver_volume_m3=(bottle.capacity_ml or 0) / 1e6, receiver_wall_j_k=own_wall,
                receiver_temperature_k=readings.bottle_temperature.stored / 1000, limit_kg=target_g / 1000, start=start,
                source_range_kg=spread, line_volume_m3=line_volume_m3(station), condensation=PRIOR,
                tolerances=Tolerances(),
            )
        )  # fmt: skip
    return found


def _tolerances(station: Station, readings: Readings, supply_g: int, own_g: int) -> Tolerances:
    """How well temperatures were taken, and the ± of what is in either bottle."""
    degrees = max(tolerance_k(station, readings.taken), tolerance_k(station, readings.bottle_taken))
    return Tolerances(degrees, max(supply_g, 1) / 1000, max(own_g, 1) / 1000)


def _wall_notes(bottle: Bottle, walls: Walls) -> list[tuple[str, str]]:
    notes = []
    if len(walls.heat_j_k) > 1:
        sentence = f"What {bottle.code} is made of isn't known: aluminium and steel were both tried, so the span is wider."
        notes.append(("wall_unknown", sentence))
    if walls.assumed:
        notes.append(("wall_mass", f"The mass of the wall of {bottle.code}: {walls.assumed} (common practice, no source)."))
    return notes


def tolerance_k(station: Station, taken: str) -> float:
    """Return the tolerance of a temperature at a station, by how it was taken [K]."""
    more = next((extra for code, _, extra in TAKEN if code == taken), 0)
    return (station.thermometer_tolerance_mk + more) / 1000
