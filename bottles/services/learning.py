"""Learn the condensation figure from the shop's own refills, again and again.

Always computed anew from the readings kept in their forecasts and the weighings that stand, never
from what was once worked out: a weighing that is struck changes the fit. New rows are laid only
once a figure has changed so that it shows; then each that differs at all, so that those that hold
are of one fit and no size counts more refills than its way.
"""

from __future__ import annotations

import uuid
from collections import Counter, defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from datetime import datetime

from django.db.models import prefetch_related_objects

from bottles.models import Bottle, Fit, Forecast, Refill, Tare
from bottles.physics.condensation import PRIOR
from bottles.physics.fitting import ENOUGH, Fitted, Observation, fit
from bottles.physics.observing import Refilled, observe
from bottles.physics.receiver_start import OWN_VAPOUR, VENTED, WEIGHED, Start, start_vessel
from bottles.physics.transfer import PHYSICS_VERSION
from bottles.physics.vessel import Vessel
from bottles.rules.learning import is_bound, left_out, size_of, way_of
from bottles.selectors.filling_facts import air_pressure, below_tube_m3, takes_liquid, walls_by
from bottles.selectors.history import History, Spoken, history_of
from bottles.selectors.learning import Scope, Went, closed_window, latest_figures, went
from bottles.services.forecasting import tolerance_k
from bottles.services.stations import line_volume_m3
from shop.base import acts, jobs
from shop.base.models import Job, Shop
from shop.physics.errors import PhysicsError

KIND = "learning.fit"
# What must have changed for a row to be laid down anew: the figure or its deviation by a fifth of that
# deviation, or the number of refills behind it by a quarter (this project's own choice).
SHOWS_FIFTH, SHOWS_QUARTER = 5, 4
SAY_EVERY = 50  # refills between two words to whoever watches


@dataclass(frozen=True, slots=True)
class Gathered:
    """What the refills tell, those that tell nothing counted by scope and why, and the latest of all."""

    observations: tuple[Observation, ...] = ()
    left_out: dict[Scope, Counter[str]] = field(default_factory=dict)
    through: Refill | None = None


def ask_to_learn(refill: Refill) -> None:
    """Ask for a fit within the act that closed a refill; one that waits already will see this refill too."""
    if not Job.objects.filter(kind=KIND, state="queued").exists():
        jobs.ask(KIND, f"refill {refill.pk}")


def gather(shop: Shop, said: Callable[[int, int], None] = lambda done, total: None) -> Gathered:
    """Recompute what each of the latest closed refills tells, outside any transaction."""
    refills = list(closed_window())
    found: list[Observation] = []
    out: dict[Scope, Counter[str]] = defaultdict(Counter)
    world = _World(shop)
    rows = went(refills)
    world.prepare(rows)
    for number, row in enumerate(rows):
        if number % SAY_EVERY == 0:
            said(number, len(rows))
        bottle = row.refill.bottle
        way, size = way_of(bottle.dip_tube), size_of(bottle.capacity_ml) if bottle.capacity_ml else None
        told = left_out(row.closed) or _told(row, way, size, world)
        if isinstance(told, Observation):
            found.append(told)
            continue
        for scope in {("", None), (way, None), (way, size if way else None)}:
            out[scope][told] += 1
    return Gathered(tuple(found), dict(out), refills[0] if refills else None)


def learn(*, key: uuid.UUID, shop: Shop, gathered: Gathered) -> list[Fit]:
    """Fit, and lay down what has changed so that it shows, as an act of the program's own; return the new rows."""
    known = latest_figures(shop).rows
    fitted = {(one.way, one.size): one for one in fit(gathered.observations)}
    for scope, row in known.items():  # a class that no refill is left of
        if scope not in fitted and row.informative + row.bounds:
            fitted[scope] = Fitted(row.way, row.size_ml, PRIOR.figure, PRIOR.deviation, PRIOR.deviation, 0, 0)
    if not any(_shows(known.get(scope), one) for scope, one in fitted.items()):
        return []
    changed = [one for scope, one in sorted(fitted.items(), key=str) if _differs(known.get(scope), one)]
    made: list[Fit] = []
    with acts.begin(
        key=key, person=None, code="learning.fitted", subject="shop", changes={"scopes": len(changed)}
    ) as act:
        for one in changed:
            row = Fit(
                act=act, way=one.way, size_ml=one.size, figure_milli=round(one.figure * 1000),
                deviation_milli=round(one.deviation * 1000), informative=one.informative, bounds=one.bounds,
                left_out=dict(gathered.left_out.get((one.way, one.size), {})), through=gathered.through,
                physics_version=PHYSICS_VERSION,
            )  # fmt: skip
            row.save()
            made.append(row)
    return made


def _differs(row: Fit | None, new: Fitted) -> bool:
    """Whether a row would be another one; one that would be the same stands, and holds since its own day."""
    if row is None:
        return bool(new.informative or new.bounds)
    return (row.figure_milli, row.deviation_milli, row.informative, row.bounds) != (
        round(new.figure * 1000), round(new.deviation * 1000), new.informative, new.bounds,
    )  # fmt: skip


def _shows(row: Fit | None, new: Fitted) -> bool:
    """Whether a figure differs from the one laid down last so that somebody would see it."""
    if row is None:
        return bool(new.informative or new.bounds)
    before, after = row.informative + row.bounds, new.informative + new.bounds
    return (
        abs(new.figure * 1000 - row.figure_milli) * SHOWS_FIFTH >= row.deviation_milli
        or abs(new.deviation * 1000 - row.deviation_milli) * SHOWS_FIFTH >= row.deviation_milli
        or new.tells is not (row.informative >= ENOUGH)
        or bool(new.informative) is not bool(row.informative)
        or abs(after - before) * SHOWS_QUARTER > before
    )


class _World:
    """What the refills share, read once: the shop's air, histories of supply bottles, tares."""

    def __init__(self, shop: Shop) -> None:
        self.ambient_pa = air_pressure(shop)
        self.histories: dict[int, History] = {}
        self.tares: dict[int, list[Tare]] = defaultdict(list)

    def prepare(self, rows: Sequence[Went]) -> None:
        """Read the supply bottles' histories and tares, and what the bottles' tares are made of."""
        sources = {draw.source_id: draw.source for row in rows for draw in row.course.draws}
        self.histories = {key: history_of(source) for key, source in sources.items()}
        for tare in Tare.objects.filter(bottle__in=sources).order_by("since", "id").prefetch_related("parts"):
            self.tares[tare.bottle_id].append(tare)
        own = {row.course.before.tare_id: row.course.before.tare for row in rows if row.course.before}
        prefetch_related_objects(list(own.values()), "parts")
        for row in rows:
            if row.course.before:
                row.course.before.tare = own[row.course.before.tare_id]

    def tare_at(self, source: Bottle, at: datetime) -> Tare | None:
        """The tare in force at a moment, else the first there was."""
        known = self.tares[source.pk]
        return next((tare for tare in reversed(known) if tare.since <= at), known[0] if known else None)


def _told(row: Went, way: str, size: int | None, world: _World) -> Observation | str:
    """What a refill tells, or why it tells nothing."""
    taken = _taken(row, world)
    if isinstance(taken, str):
        return taken
    try:
        told = observe(taken)
        return told.silent or Observation(
            told.figure, told.deviation, is_bound(row.refill.ended_by), way, size if way else None
        )
    except PhysicsError:
        return "not computed"


def _taken(row: Went, world: _World) -> Refilled | str:
    """A refill as the physics takes it; or why it can't be."""
    bottle, draw, before, station = row.refill.bottle, row.course.draws[0], row.course.before, row.refill.station
    forecast, source = draw.forecast, draw.source
    assert forecast is not None and before is not None  # `left_out` lets no other through
    temperatures = [_stored(forecast, name) for name in ("supply_temperature", "bottle_temperature")]
    if None in temperatures:
        return "no temperatures"
    supply_mk, bottle_mk = (value or 0 for value in temperatures)
    held = _held(world.histories[source.pk], (draw.happened_at, draw.act_id))
    if held is None:
        return "reading only"
    inverted = bool(forecast.readings.get("inverted"))
    walls = [walls_by(source, world.tare_at(source, draw.happened_at)), walls_by(bottle, before.tare)]
    if not (bottle.capacity_ml and source.capacity_ml):
        return "not computed"
    if any(len(one.heat_j_k) > 1 for one in walls):
        return "walls unknown"
    try:
        vessel = Vessel(
            source.capacity_ml / 1e6, walls[0].heat_j_k[0], held[0] / 1000, supply_mk / 1000,
            liquid_pickup=takes_liquid(source, inverted=inverted) is not False,
            below_tube_m3=below_tube_m3(source, inverted=inverted),
        )
        start = _start(forecast, row, bottle_mk / 1000, world.ambient_pa)
    except PhysicsError:
        return "not computed"
    return Refilled(
        source=vessel, receiver_volume_m3=bottle.capacity_ml / 1e6, receiver_wall_j_k=walls[1].heat_j_k[0],
        receiver_temperature_k=bottle_mk / 1000, start=start, moved_kg=row.came_g / 1000,
        moved_error_kg=max(row.error_g, 1) / 1000, line_volume_m3=line_volume_m3(station),
        source_error_kg=held[1] / 1000, start_error_kg=before.error_g / 1000,
        source_error_k=tolerance_k(station, forecast.readings.get("taken", "wall")),
        receiver_error_k=tolerance_k(station, forecast.readings.get("bottle_taken", "wall")),
    )  # fmt: skip


def _stored(forecast: Forecast, name: str) -> int | None:
    """A reading as it was kept, in its own unit."""
    reading = forecast.readings.get(name)
    return int(reading["stored"]) if isinstance(reading, dict) and reading.get("stored") is not None else None


def _held(history: History, at: tuple[datetime, int]) -> tuple[int, int] | None:
    """What a supply bottle held when a refill began, and its ±, by all that is known of it now; None: nothing is."""
    weighed = next((one for one in reversed(history.ruling) if one.key <= at), None)
    real = [change for change in history.changes if change.key <= at and not change.reversal]
    if weighed is None and not real:
        return None
    if weighed is not None and not any(change.key > weighed.key for change in real):
        return weighed.net_g, weighed.error_g
    level = history.level_at(at)
    return max(0, level), history.books_error(Spoken(at, -1, level, 0, False))


def _start(forecast: Forecast, row: Went, temperature_k: float, ambient_pa: float) -> Start:
    """How the bottle to fill started, by its weighing that stands."""
    assert row.course.before is not None
    net = max(0, row.course.before.net_g) / 1000
    kind = forecast.readings.get("start", WEIGHED)
    if kind != WEIGHED:
        return Start(kind, net if kind == OWN_VAPOUR else None, ambient_pa)
    volume = (row.refill.bottle.capacity_ml or 0) / 1e6
    vented = start_vessel(
        volume_m3=volume, wall_j_k=1.0, temperature_k=temperature_k, start=Start(VENTED, None, ambient_pa)
    )
    return Start(VENTED, None, ambient_pa) if net <= vented.net_kg else Start(WEIGHED, net, ambient_pa)
