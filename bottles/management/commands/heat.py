"""`manage.py heat`: what it takes to warm a bottle to a pressure, for scripts."""

from __future__ import annotations

from typing import Any

from bottles.management import readers
from bottles.management.for_scripts import Option, ScriptCommand, Values
from bottles.physics.heating import heat_to_pressure
from bottles.physics.vessel import Vessel, wall_heat


class Command(ScriptCommand):
    help = "Temperature, energy and minutes that bring a bottle to a pressure; the answer is JSON."
    options = (
        Option("capacity", readers.volume, "water capacity of the bottle", required=True),
        Option("net", readers.mass, "contents by weight", required=True),
        Option("wall", readers.wall, "aluminium or steel", required=True),
        Option("wall-mass", readers.mass, "mass of the wall: the tare less the valve", required=True),
        Option("temperature", readers.temperature, "its temperature now", required=True),
        Option("to-pressure", readers.pressure, "gauge pressure wanted; absolute with bara or psia", required=True),
        Option("watts", readers.number(1e6, "w", "watt", "watts"), "heat put into the bottle, in W", required=True),
        Option("ambient", readers.temperature, "temperature of the room", required=True),
        Option(
            "loss",
            readers.number(1e6, "w/k"),
            "heat lost a kelvin above the room, in W/K; by the bottle's size without",
        ),
    )

    def answer(self, given: Values) -> dict[str, Any]:
        vessel = Vessel(
            given["capacity"], wall_heat(given["wall"], given["wall_mass"]), given["net"], given["temperature"]
        )
        told = heat_to_pressure(
            vessel, given["to_pressure"], watts=given["watts"], ambient_k=given["ambient"], loss_w_k=given["loss"]
        )
        return told.as_dict()
