"""The pressure that a bottle's own fill shows as it warms, as a curve and as a table."""

from __future__ import annotations

from typing import Any

import numpy as np
from django.utils.safestring import mark_safe

from bottles.models import Bottle
from bottles.physics.contents import one_phase_temperature
from bottles.physics.warming_curve import pressures_of_fill
from bottles.selectors.contents import Holding
from bottles.views.refill_words import RefillWords
from shop.charts.model import Axis, Chart, Mark, Series
from shop.charts.svg import to_svg
from shop.charts.table import to_rows
from shop.physics.errors import PhysicsError
from shop.physics.units import value_in

# From a freezer to 52 °C, above which no bottle may be: by 2 K, or by 4 °F.
FROM_TO = {"metric": (253_150, 325_150, 2_000), "us": (255_372, 325_372, 2_222)}  # mK
HIGHEST_PA = 25_000_000  # a safety disc has burst before: the curve ends there


def warming_chart(holding: Holding, bottle: Bottle, words: RefillWords) -> dict[str, Any] | None:
    """The curve with its table, ready to be drawn; None where there is nothing to follow."""
    if not holding.grams or not bottle.capacity_ml:
        return None
    net, capacity = holding.grams / 1000, bottle.capacity_ml / 1e6
    first, last, step = FROM_TO[words.units.name]
    millikelvin = list(range(first, last + 1, step))
    try:
        pressures = pressures_of_fill(net, capacity, np.array(millikelvin) / 1000.0)
        turns_k, becomes = one_phase_temperature(net, capacity)
    except PhysicsError:
        return None
    degrees, unit = words.units.temperature, words.units.pressure

    def celsius(mk: float) -> float:
        return round(float(value_in(round(mk), degrees)), 1)

    points = [
        (celsius(mk), float(value_in(round(float(pressure)), unit, ambient_pa=words.ambient_pa)))
        for mk, pressure in zip(millikelvin, pressures, strict=True)
        if pressure <= HIGHEST_PA
    ]
    if len(points) < 2:
        return None
    marks = []
    if first < turns_k * 1000 < last:
        marks.append(Mark("full of liquid" if becomes == "liquid-full" else "no liquid left", x=celsius(turns_k * 1000)))
    chart = Chart(
        title=f"Pressure of {bottle.code} as it is filled now, by temperature",
        x=Axis("Temperature", degrees, decimals=0),
        y=Axis("Gauge", unit, low=0, decimals=0 if unit == "psi" else 1),
        series=[Series("this fill", points)],
        marks=marks,
    )
    head, *rows = to_rows(chart)
    return {"svg": mark_safe(to_svg(chart, id="warming-chart")), "head": head, "rows": rows}
