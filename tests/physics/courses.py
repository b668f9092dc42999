"""Pairs of bottles whose courses are followed, and the settings of the limits."""

from __future__ import annotations

from math import inf

from bottles.physics.receiver_start import Start, start_vessel
from bottles.physics.transient import Setting
from bottles.physics.vessel import Vessel, wall_heat

LIMIT = 0.68 * 6.8  # kg
ABOVE = 5.5  # kg: a limit that most transfers don't reach


def supply(net=19.72, celsius=20.0, **other):
    return Vessel(0.029, wall_heat("steel", 32.0), net, celsius + 273.15, **other)


def bottle(celsius=0.0, net=None, kind=None):
    return start_vessel(
        volume_m3=0.0068, wall_j_k=wall_heat("aluminium", 5.9), temperature_k=celsius + 273.15,
        start=Start(kind or ("vented" if net is None else "weighed"), net),
    )  # fmt: skip


CASES = {
    "chilled": (supply(), bottle(-20)),
    "level": (supply(), bottle(20)),
    "liquid runs out": (supply(6.9), bottle(0)),
    "vapour alone": (supply(3.0), bottle(-10)),
    "through the critical point": (supply(19.72, 44.0), bottle(10)),
    "full of liquid at the start": (supply(19.72, 33.0), bottle(15)),
    "no dip tube": (supply(12.0, liquid_pickup=False), bottle(-20)),
    "part filled": (supply(8.0, 10.0), bottle(5, net=1.4)),
    "warmer": (supply(19.0, 0.0), bottle(20)),
    "air": (supply(), bottle(10, kind="air")),
}
QUICK = Setting(exchange_w_k=inf)
SLOW = Setting(exchange_w_k=0.0)
