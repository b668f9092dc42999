"""Learning: the forecasts of the latest refills against the scale, and what the shop learned from them."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.utils.safestring import mark_safe

from bottles.physics.fitting_words import WAYS, litres
from bottles.rules.agreement import agreement
from bottles.rules.learning import size_of, size_span, way_of
from bottles.selectors.learning import COMPARED, WINDOW, closed_window, latest_figures, went
from bottles.views.learning_far import odd
from bottles.views.learning_figures import fitted_rows, left_out_words
from bottles.views.learning_words import (
    GROUP_HEAD,
    ROW_HEAD,
    Placed,
    figures,
    groups,
    others_words,
    placed,
    row_words,
)
from bottles.views.refill_words import RefillWords, refill_words
from shop.base import clock
from shop.base.models import Shop
from shop.base.paging import page_of
from shop.base.permissions import EVERYONE, MANAGERS, allow
from shop.charts.model import Axis, Chart, Mark, Series
from shop.charts.svg import to_svg
from shop.people.models import full_name
from shop.physics.units import value_in

MOST_ODD = 20  # refills far outside that are told with their causes; more are only counted
NOBODY = "Tarebook"  # a refill that nobody signed in for


@allow(EVERYONE, room="office")
def learning(request: HttpRequest) -> HttpResponse:
    """Forecast against the scale for the latest refills, by what matters; the fitted figure; what is far outside."""
    shop = Shop.objects.get()
    words = refill_words(request, shop)
    rows = went(list(closed_window(COMPARED)))
    compared, others = placed(rows)
    known = latest_figures(shop)
    whole = known.rows.get(("", None))
    manager = bool(MANAGERS & request.user.roles)  # type: ignore[union-attr]
    page = page_of(request, compared)
    far = [row for row in compared if row.span.far]
    same_side = Counter((row.refill.bottle_id, row.span.off_g > 0) for row in compared if not row.span.inside)
    overall = figures(agreement([row.compared for row in compared]), words)
    context: dict[str, Any] = {
        "window": WINDOW, "most": COMPARED, "at_most": len(rows) >= COMPARED, "count": len(rows), "compared": len(compared),
        "figures": fitted_rows(known, shop), "left_out": left_out_words(whole),
        "through": whole.act.recorded_at if whole else None,
        "others": others_words(others), "others_count": sum(others.values()),
        "overall": dict(zip(("count", "bias", "spread", "inside"), overall, strict=True)),
        "groups": _groups(compared, words, manager=manager),
        "far": [
            odd(row, same_side[row.refill.bottle_id, row.span.off_g > 0] - 1, words, shop) for row in far[:MOST_ODD]
        ],
        "more_far": max(0, len(far) - MOST_ODD),
        "page": page, "head": ROW_HEAD, "rows": [row_words(row, words, shop) for row in page],
        "chart": mark_safe(to_svg(_chart(list(page), words, shop), id="learning-chart")) if compared else "",
    }  # fmt: skip
    return render(request, "bottles/learning.html", context)


def _groups(rows: Sequence[Placed], words: RefillWords, *, manager: bool) -> list[dict[str, Any]]:
    """The tables of groups; that of people is the manager's alone."""
    told = [
        ("By supply bottle", "Supply bottle", groups(rows, lambda row: row.source, str, words)),
        ("By size of the bottle to fill", "Size", groups(rows, _size, lambda size: litres(size_span(size)), words)),
        ("By way of entering", "Way", groups(rows, lambda row: way_of(row.refill.bottle.dip_tube), _way, words)),
    ]
    if manager:
        told.append(("By person who opened it", "Person", groups(rows, _person, str, words)))
    return [{"name": name, "head": (head, *GROUP_HEAD[1:]), "rows": found} for name, head, found in told if found]


def _size(row: Placed) -> int:
    return size_of(row.refill.bottle.capacity_ml or 0)


def _way(way: str) -> str:
    return WAYS[way].capitalize()


def _person(row: Placed) -> str:
    return full_name(row.refill.person) if row.refill.person else NOBODY


def _chart(rows: Sequence[Placed], words: RefillWords, shop: Shop) -> Chart:
    """What came less what was likely, over time, for the refills of this page of the table."""
    unit = "lb" if words.units.name == "us" else "kg"
    zone = clock.zone(shop)

    def points(*, inside: bool) -> list[tuple[float, float | None]]:
        return [
            (row.refill.closed_at.astimezone(zone).toordinal(), round(float(value_in(row.span.off_g, unit)), 3))
            for row in reversed(rows)
            if row.span.inside is inside and row.refill.closed_at
        ]

    named = (("within its band", points(inside=True)), ("outside its band", points(inside=False)))
    series = [Series(name, found, kind="dots") for name, found in named if found]
    outside = len(named[1][1])
    return Chart(
        title="What came less what was likely", x=Axis("Closed", kind="day"), y=Axis("Difference", unit), series=series,
        marks=[Mark("as likely", y=0.0)],
        summary=f"{len(rows)} refills, {outside} of them outside their band: what came by the scale less what was likely, "
        "over the days. The table below has the same figures.",
    )  # fmt: skip
