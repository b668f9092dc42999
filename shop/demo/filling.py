"""Refills of the invented past: readings, what really goes over, weighings, the end."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date

from bottles.physics.weighing import stop_reading
from bottles.rules.edition_files import edition_on
from bottles.rules.facts import Facts
from bottles.rules.limit import fill_limit
from bottles.rules.marks import read_mark
from bottles.rules.policy import Policy
from shop.demo.cylinders import Spec
from shop.demo.kit import Kit
from shop.demo.past import Past
from shop.demo.pouring import Vessels, pour, pressure_of, vapour_alone_g
from shop.physics.units import ambient_pressure, parse_length, parse_mass

DEGREE_C = 273.15
FREEZER_C = -16.0
SETTLED = "line losses of the fills before were more or less than computed"


@dataclass(frozen=True, slots=True)
class Fill:
    """How a refill is to go."""

    code: str
    station: str
    supply: str
    method: str = "pressure"
    room_c: float = 21.0
    line_on: bool = False  # weighed once with the line on, before it's taken off
    star_checks: bool = True
    spilt_g: float = 0.0  # beyond what the line takes, and nobody writes it down
    by: str = ""


def limit_of(spec: Spec, kit: Kit, on: date) -> int | None:
    """Return the fill limit of a bottle by the rules in force on a day."""
    edition = edition_on(kit.country, on)
    if edition is None:
        return None
    mark = read_mark(spec.mark_in(kit))
    label = spec.label(kit)
    wall = spec.wall if spec.wall in ("aluminium", "steel") else "composite"
    facts = Facts(
        mark=mark, wall=wall, capacity_ml=spec.capacity_ml,  # type: ignore[arg-type]
        charge_g=parse_mass(label, default_unit="kg").stored if label else None,
    )  # fmt: skip
    return fill_limit(facts, edition.row_for(mark, facts.wall), edition, Policy()).grams


def open_fill(past: Past, fill: Fill) -> tuple[Vessels, Vessels, int]:
    """Write that a refill was opened; return both bottles as they are, and the reading to stop at."""
    station = past.stations[fill.station]
    scale = past.scales[station.scale]
    receiver_c = {"chilled": FREEZER_C + past.rng.uniform(0, 8), "pressure": fill.room_c + past.rng.uniform(-2, 1)}[fill.method]
    supply_c = fill.room_c + past.rng.uniform(-1.5, 1.0)
    source = _vessels(past, fill.supply, supply_c)
    receiver = _vessels(past, fill.code, receiver_c)
    spec = past.specs[fill.code]
    limit_g = limit_of(spec, past.kit, past.now.date()) or 0
    # Near its end a supply bottle's gauge and its books may contradict each other: read only while
    # there's liquid enough for both to agree.
    with_gauge = source.net_g > 1.5 * vapour_alone_g(source.capacity_ml, source.temperature_k)
    past.write(
        "refill.open", by=fill.by, bottle=fill.code, station=fill.station, supply=fill.supply, method=fill.method,
        gross=past.reading(fill.code, station.scale), supply_temperature=past.kit.temperature(source.temperature_k),
        bottle_temperature=past.kit.temperature(receiver.temperature_k),
        bottle_taken="bath" if fill.method == "chilled" else "wall",
        gauge=past.kit.gauge(pressure_of(source), ambient_pressure(float(past.kit.height_m))) if with_gauge else "",
        supply_gross=past.reading(fill.supply, station.supply_scale) if station.supply_scale else "",
        star_checks=fill.star_checks, if_asked=SETTLED,
    )  # fmt: skip
    stop_g = stop_reading(
        past.tare_g(fill.code), limit_g, scale_pm_g=scale.uncertainty_g, resolution_g=scale.resolution_g,
        style=scale.style, hose_pull_g=station.hose_pull_g,  # type: ignore[arg-type]
    )  # fmt: skip
    return source, receiver, stop_g


def fill_bottle(past: Past, fill: Fill) -> bool:
    """Write a whole refill, closed; return whether the supply bottle's liquid is (nearly) out."""
    source, receiver, stop_g = open_fill(past, fill)
    station = past.stations[fill.station]
    scale = past.scales[station.scale]
    # Who closes the valve by hand stops a step or two early, never late.
    early_g = past.rng.choice((0, 0, 1, 2)) * scale.resolution_g + past.rng.uniform(0, 0.4) * scale.resolution_g
    room_g = stop_g - station.hose_pull_g - early_g - past.gross_g(fill.code)
    volume = math.pi / 4 * (_um(station.hose_bore) * 1e-6) ** 2 * _um(station.hose_length) * 1e-6
    poured = pour(source=source, receiver=receiver, room_g=max(room_g, 0.0), line_volume_m3=volume, rng=past.rng)
    past.net_g[fill.code] += poured.moved_g
    past.net_g[fill.supply] -= poured.moved_g + poured.line_g + fill.spilt_g
    if fill.line_on:
        past.later(6)
        past.write(
            "refill.weigh", by=fill.by, bottle=fill.code, gross=past.reading(fill.code, station.scale, station.hose_pull_g),
            line_off=False, supply_gross="", ended_by="",
        )
    past.later(7)
    past.write(
        "refill.weigh", by=fill.by, bottle=fill.code, gross=past.reading(fill.code, station.scale), line_off=True,
        supply_gross=past.reading(fill.supply, station.supply_scale) if station.supply_scale else "",
        ended_by="limit" if poured.at_limit else "flow ceased",
    )
    heel_g = vapour_alone_g(source.capacity_ml, source.temperature_k)
    return past.net_g[fill.supply] < 1.12 * heel_g or (not poured.at_limit and past.net_g[fill.supply] < 1.5 * heel_g)


def _vessels(past: Past, code: str, celsius: float) -> Vessels:
    spec = past.specs[code]
    wall_g = parse_mass(spec.parts(past.kit)[0][1], default_unit="kg").stored
    return Vessels(
        spec.capacity_ml, spec.wall if spec.wall in ("aluminium", "steel") else "aluminium", wall_g, past.net_g[code],
        celsius + DEGREE_C, spec.dip,
    )  # fmt: skip


def _um(text: str) -> int:
    return parse_length(text, default_unit="mm").stored
