"""`manage.py transfer`: how much will go over from one bottle to another, for scripts."""

from __future__ import annotations

from typing import Any

from bottles.management import readers
from bottles.management.for_scripts import FILLING_RATIO, Option, ScriptCommand, Values, warnings_as_told
from bottles.physics.condensation import PRIOR, Condensation
from bottles.physics.contents import Contents, contents_from_reading
from bottles.physics.contents_words import SENTENCES as CONTENTS_SENTENCES
from bottles.physics.forecast import Tolerances, forecast
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED, Start
from bottles.physics.vessel import Vessel, wall_heat
from shop.physics.errors import Contradiction

LIMITS = ("mixed", "wall_condensing", "held")
TOLD = (
    "low_kg", "likely_kg", "high_kg", "line_loss_kg", "warmest_receiver_c", "least_source_kg", "full_fills",
)  # fmt: skip
STARTS = {VENTED: VENTED, "own-vapour": OWN_VAPOUR, AIR: AIR, WEIGHED: WEIGHED}
GIVEN = "given as an option"
GIVEN_SENTENCE = (
    "The condensation figure is the one given; how far it may be off is taken as for a shop that has measured "
    "nothing yet (common practice, no source). Give --condensation-deviation where it's known."
)


class Command(ScriptCommand):
    help = "How much nitrous goes over from a supply bottle to a bottle to fill; the answer is JSON."
    options = (
        Option("source-capacity", readers.volume, "water capacity of the supply bottle", required=True),
        Option("source-wall", readers.wall, "its wall: aluminium or steel", required=True),
        Option("source-wall-mass", readers.mass, "mass of its wall: the tare less the valve", required=True),
        Option("source-net", readers.mass, "its contents by weight; without, any mass that its gauge allows"),
        Option("source-temperature", readers.temperature, "its temperature", required=True),
        Option("source-pressure", readers.pressure, "its gauge reading; absolute with bara or psia"),
        Option("source-limit", readers.mass, "its own fill limit; 0.68 kg a litre without"),
        Option("below-tube", readers.volume, "liquid that its dip tube doesn't reach", default="0mL"),
        Option("receiver-capacity", readers.volume, "water capacity of the bottle to fill", required=True),
        Option("receiver-wall", readers.wall, "its wall: aluminium or steel", required=True),
        Option("receiver-wall-mass", readers.mass, "mass of its wall", required=True),
        Option("receiver-temperature", readers.temperature, "its temperature", required=True),
        Option("receiver-net", readers.mass, "its contents by weight; vented to the air without"),
        Option("receiver-start", readers.word_of(STARTS), f"how it starts where it isn't weighed: {', '.join(STARTS)}"),
        Option("limit", readers.mass, "its fill limit; 0.68 kg a litre without"),
        Option("condensation", readers.number(1.0), "condensation figure from 0 to 1; a prior without"),
        Option("condensation-deviation", readers.number(1.0), "its standard deviation; the prior's without"),
        Option("line-volume", readers.volume, "inside volume of hose and fittings", default="0mL"),
        Option("gauge-tolerance", readers.pressure_difference, "how far the gauge may be off", default="2.07bar"),
        Option("thermometer-tolerance", readers.temperature_difference, "the thermometer", default="1K"),
        Option("scale-tolerance", readers.mass, "the scale", default="50g"),
    )

    def answer(self, given: Values) -> dict[str, Any]:
        start, condensation = _start(given), _condensation(given)
        reading = _reading(given)
        net, between = given["source_net"], None
        if net is None:
            if reading is None:
                raise readers.OptionRefused(
                    "What is in the supply bottle? Give --source-net, or --source-pressure for what its gauge allows.",
                    code="source_unknown",
                )
            between = reading.least_kg, reading.most_kg
            net = reading.least_kg
        source = Vessel(
            given["source_capacity"],
            wall_heat(given["source_wall"], given["source_wall_mass"]),
            net,
            given["source_temperature"],
            below_tube_m3=given["below_tube"],
        )
        limit = given["limit"]
        told = forecast(
            source=source,
            receiver_volume_m3=given["receiver_capacity"],
            receiver_wall_j_k=wall_heat(given["receiver_wall"], given["receiver_wall_mass"]),
            receiver_temperature_k=given["receiver_temperature"],
            limit_kg=FILLING_RATIO * given["receiver_capacity"] if limit is None else limit,
            start=start,
            source_range_kg=between,
            line_volume_m3=given["line_volume"],
            condensation=condensation,
            tolerances=Tolerances(given["thermometer_tolerance"], given["scale_tolerance"]),
        )
        whole = told.as_dict()
        warnings = warnings_as_told(told.warnings, reading.warnings if reading else (), _notes(given))
        return {name: whole[name] for name in (*LIMITS, *TOLD)} | {"warnings": warnings}


def _start(given: Values) -> Start:
    """How the bottle to fill starts: weighed where its net is known, else vented unless another word was given."""
    net, kind = given["receiver_net"], given["receiver_start"]
    if net is not None and kind in (VENTED, AIR):
        raise readers.OptionRefused(
            f"--receiver-start {kind} says what is in the bottle, and so does --receiver-net. Give one of them.",
            code="options_conflict",
        )
    if net is None and kind == WEIGHED:
        raise readers.OptionRefused("--receiver-start weighed needs --receiver-net.", code="options_conflict")
    return Start(kind or (VENTED if net is None else WEIGHED), net)


def _condensation(given: Values) -> Condensation:
    """The figure that was given, or the prior."""
    figure, deviation = given["condensation"], given["condensation_deviation"]
    if figure is None:
        if deviation is not None:
            raise readers.OptionRefused("--condensation-deviation needs --condensation.", code="options_conflict")
        return PRIOR
    return Condensation(figure, PRIOR.deviation if deviation is None else deviation, GIVEN)


def _source_limit(given: Values) -> float:
    limit: float | None = given["source_limit"]
    return FILLING_RATIO * float(given["source_capacity"]) if limit is None else limit


def _reading(given: Values) -> Contents | None:
    """What the supply's gauge says of its contents, beside its weight where that is known."""
    if given["source_pressure"] is None:
        return None
    told = contents_from_reading(
        capacity_m3=given["source_capacity"],
        temperature_k=given["source_temperature"],
        pressure_pa=given["source_pressure"],
        net_kg=given["source_net"],
        limit_kg=_source_limit(given),
        gauge_tolerance_pa=given["gauge_tolerance"],
        thermometer_tolerance_k=given["thermometer_tolerance"],
        scale_tolerance_kg=given["scale_tolerance"],
    )
    if given["source_net"] is None and told.region == "contradictory":
        raise Contradiction(*told.warnings[0])
    return told


def _notes(given: Values) -> list[tuple[str, str]]:
    """What the forecast itself can't know: an overfull supply, a figure whose deviation wasn't given."""
    notes = []
    if given["source_net"] is not None and given["source_net"] > _source_limit(given):
        notes.append(("over_limit", CONTENTS_SENTENCES["over_limit"]))
    if given["condensation"] is not None and given["condensation_deviation"] is None:
        notes.append(("condensation_given", GIVEN_SENTENCE))
    return notes
