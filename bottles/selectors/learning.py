"""What the shop has learned of condensation, and its closed refills as learning reads them."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from django.db.models import Max, QuerySet

from bottles.models import Bottle, Fit, Movement, Refill
from bottles.physics.condensation import PRIOR, Condensation
from bottles.physics.fitting import ENOUGH
from bottles.physics.fitting_words import origin
from bottles.rules.books import difference_plus_minus
from bottles.rules.learning import Closed, size_of, size_span, way_of
from bottles.selectors.refills import Course, courses_of, net_without_hose
from shop.base import clock
from shop.base.models import Shop

# Refills that are learned from, for the shop changes; and those compared on a page, which answers at once.
WINDOW, COMPARED = 1_000, 500

Scope = tuple[str, int | None]


@dataclass(frozen=True, slots=True)
class Figure:
    """The condensation figure that holds for a bottle, and the row that it comes from; None: the prior."""

    condensation: Condensation
    fit: Fit | None


class Figures:
    """The latest fitted figures, for any number of bottles."""

    def __init__(self, rows: Iterable[Fit], shop: Shop) -> None:
        self.rows: dict[Scope, Fit] = {(row.way, row.size_ml): row for row in rows}
        self._zone = clock.zone(shop)

    def of(self, bottle: Bottle) -> Figure:
        """The figure of a bottle's size and way of entering; else of its way; else of the shop; else the prior."""
        row = self.row_for(way_of(bottle.dip_tube), size_of(bottle.capacity_ml) if bottle.capacity_ml else None)
        if row is None:
            return Figure(PRIOR, None)
        told = origin(
            row.informative, row.way, size_span(row.size_ml) if row.size_ml else None,
            f"{row.act.recorded_at.astimezone(self._zone):%Y-%m}",
        )  # fmt: skip
        return Figure(Condensation(row.figure_milli / 1000, row.deviation_milli / 1000, told), row)

    def row_for(self, way: str, size_ml: int | None) -> Fit | None:
        """The row that holds for a way of entering and a class of sizes; None: the prior."""
        of_way = self.rows.get((way, None))
        if way and of_way is not None and of_way.informative >= ENOUGH:
            of_size = self.rows.get((way, size_ml))
            # A few refills of a size do: they're drawn towards their way.
            return of_size if of_size is not None and of_size.informative else of_way
        whole = self.rows.get(("", None))
        return whole if whole is not None and whole.informative >= ENOUGH else None


def latest_figures(shop: Shop) -> Figures:
    """Return the latest fitted figures of all scopes: one query."""
    last = Fit.objects.order_by().values("way", "size_ml").annotate(last=Max("pk")).values("last")
    return Figures(Fit.objects.filter(pk__in=last).select_related("act"), shop)


def closed_window(many: int = WINDOW) -> QuerySet[Refill]:
    """Return the latest closed refills, the latest first."""
    found = Refill.objects.filter(closed_at__isnull=False).order_by("-closed_at", "-id")
    # Hundreds of refills share a few stations, scales and people: those are read once.
    return found.select_related("bottle").prefetch_related("station__scale", "person")[:many]


@dataclass(frozen=True, slots=True)
class Went:
    """A closed refill: its course, what is known of how it went, what came over by the scale and its ±."""

    course: Course
    closed: Closed
    came_g: int
    error_g: int

    @property
    def refill(self) -> Refill:
        """The refill itself."""
        return self.course.refill


def went(refills: Sequence[Refill]) -> list[Went]:
    """Return how closed refills went, by the weighings that stand: five queries, however many they are."""
    if not refills:
        return []
    reversed_ones = set(
        Movement.objects.filter(refill__in=refills, kind__in=("refill", "vent"), reversal__isnull=False).values_list(
            "refill_id", flat=True
        )
    )
    return [_went(course, course.refill.pk in reversed_ones) for course in courses_of(refills)]


def _went(course: Course, reversed_by_hand: bool) -> Went:
    refill, before, last = course.refill, course.before, course.reads[-1] if course.reads else None
    forecast = course.draws[0].forecast if course.draws else None
    closed = Closed(
        ended_by=refill.ended_by, draws=len(course.draws), pumped=refill.method == "pumped",
        vented=refill.method == "vented" or _lost_weight(course), reversed_by_hand=reversed_by_hand,
        weighed_before=before is not None, weighed_after=last is not None,
        line_off=last is not None and last.step == "disconnected",
        wet=bool((before and before.wet) or (last and last.wet)), forecast=forecast is not None,
        supply_known=forecast is not None and forecast.likely_g is not None,
    )  # fmt: skip
    if before is None or last is None:
        return Went(course, closed, 0, 0)
    came = net_without_hose(refill, last) - net_without_hose(refill, before)
    return Went(course, closed, came, difference_plus_minus(before.error_g, last.error_g))


def _lost_weight(course: Course) -> bool:
    """Whether it got lighter between two weighings, beyond their ±: some was let out."""
    rows = [row for row in (course.before, *course.reads) if row is not None]
    return any(
        net_without_hose(course.refill, later) - net_without_hose(course.refill, earlier)
        < -difference_plus_minus(earlier.error_g, later.error_g)
        for earlier, later in pairwise(rows)
    )
