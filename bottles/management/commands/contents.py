"""`manage.py contents`: what a gauge, a thermometer and perhaps a scale tell about a bottle, for scripts."""

from __future__ import annotations

from typing import Any

from bottles.management import readers
from bottles.management.for_scripts import FILLING_RATIO, Option, ScriptCommand, Values, warnings_as_told
from bottles.physics.contents import contents_from_reading


class Command(ScriptCommand):
    help = "What can be in a bottle by its pressure, its temperature and perhaps its weight; the answer is JSON."
    options = (
        Option("capacity", readers.volume, "water capacity of the bottle", required=True),
        Option("temperature", readers.temperature, "temperature of its contents", required=True),
        Option("pressure", readers.pressure, "gauge reading; absolute with bara or psia", required=True),
        Option("net", readers.mass, "contents by weight"),
        Option("limit", readers.mass, "fill limit; 0.68 kg a litre without"),
        Option("gauge-tolerance", readers.pressure_difference, "how far the gauge may be off", default="2.07bar"),
        Option("thermometer-tolerance", readers.temperature_difference, "the thermometer", default="1K"),
        Option("scale-tolerance", readers.mass, "the scale", default="50g"),
    )

    def answer(self, given: Values) -> dict[str, Any]:
        limit = given["limit"]
        reading: dict[str, Any] = {
            "capacity_m3": given["capacity"],
            "temperature_k": given["temperature"],
            "pressure_pa": given["pressure"],
            "limit_kg": FILLING_RATIO * given["capacity"] if limit is None else limit,
            "gauge_tolerance_pa": given["gauge_tolerance"],
            "thermometer_tolerance_k": given["thermometer_tolerance"],
        }
        alone = contents_from_reading(**reading)
        # A weight says whether the reading agrees and how much of it is liquid; the range stays the reading's own.
        told = alone
        if given["net"] is not None:
            told = contents_from_reading(**reading, net_kg=given["net"], scale_tolerance_kg=given["scale_tolerance"])
        answer = {
            "region": told.region,
            "least_kg": alone.least_kg,
            "most_kg": alone.most_kg,
            "most_if_overfilled_kg": alone.most_if_overfilled_kg,
            "saturation_bar": _bar(told.saturation_pa),
            "liquid_kg": told.liquid_kg,
            "vapour_kg": told.vapour_kg,
            "warnings": warnings_as_told(told.warnings),
        }
        # Only a weight says which pressure to expect.
        return answer if told.expected_pa is None else answer | {"expected_bar": _bar(told.expected_pa)}


def _bar(pascal: float | None) -> float | None:
    return None if pascal is None else pascal / 1e5
