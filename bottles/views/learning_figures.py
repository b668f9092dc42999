"""The condensation figures in words: what each came to, from how many refills, priors said as such."""

from __future__ import annotations

from collections import Counter
from typing import Any

from bottles.models import Fit
from bottles.physics.condensation import PRIOR
from bottles.physics.fitting_words import WAYS, litres, why_untold
from bottles.rules.learning import WHY, size_span
from bottles.selectors.learning import Figures, Scope
from bottles.views.learning_words import others_words
from shop.base import clock
from shop.base.models import Shop


def fitted_rows(known: Figures, shop: Shop) -> list[dict[str, Any]]:
    """The condensation figures: the ways, their sizes, then where the way isn't known; priors said as such."""
    wanted: list[Scope] = [("dip", None), ("spray", None), ("", None)]
    wanted += [scope for scope in known.rows if scope not in wanted and scope[0]]
    order = {"dip": 0, "spray": 1, "": 2}
    wanted.sort(key=lambda scope: (order[scope[0]], scope[1] or 0))
    return [_fitted(scope[0], scope[1], known.rows.get(scope), known, shop) for scope in wanted]


def left_out_words(row: Fit | None) -> list[tuple[int, str]]:
    """Why refills tell nothing of condensation, counted."""
    return others_words(Counter(row.left_out), dict(WHY)) if row else []


def _fitted(way: str, size: int | None, row: Fit | None, known: Figures, shop: Shop) -> dict[str, Any]:
    """One line of the figures."""
    informative, bounds = (row.informative, row.bounds) if row else (0, 0)
    holds = known.row_for(way, size)
    own = row is not None and holds is row
    figure = (row.figure_milli / 1000, row.deviation_milli / 1000) if row and own else _of(holds)
    if own and row is not None:
        since = f"{row.act.recorded_at.astimezone(clock.zone(shop)):%Y-%m-%d}"
        said = ""
    else:
        since, said = "", why_untold(informative, bounds)
        if holds is not None:
            said = f"Too few of its own: that of {'all its sizes' if size else 'the whole shop'} holds."
    return {
        "name": litres(size_span(size)) if size else WAYS[way].capitalize(), "inner": bool(size),
        "figure": f"{figure[0]:.2f} ±{2 * figure[1]:.2f}",
        "origin": "fitted" if own else "taken over" if holds is not None else f"prior, {PRIOR.origin}",
        "since": since, "informative": informative, "bounds": bounds, "said": said,
    }  # fmt: skip


def _of(row: Fit | None) -> tuple[float, float]:
    return (row.figure_milli / 1000, row.deviation_milli / 1000) if row else (PRIOR.figure, PRIOR.deviation)
