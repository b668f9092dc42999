"""How the bottle to fill starts: what is in it before a valve is opened."""

from __future__ import annotations

from dataclasses import dataclass, replace

from bottles.physics.vessel import Vessel
from shop.physics.errors import OutOfRange
from shop.physics.fluid import ATMOSPHERE, T_SATURATION_MAX, engine

VENTED = "vented"
OWN_VAPOUR = "own vapour"
AIR = "air"
WEIGHED = "weighed"
STARTS = (VENTED, OWN_VAPOUR, AIR, WEIGHED)


@dataclass(frozen=True, slots=True)
class Start:
    """How a bottle starts; `net_kg` is its weight where it's known."""

    kind: str = VENTED
    net_kg: float | None = None
    ambient_pa: float = ATMOSPHERE


def start_vessel(
    *,
    volume_m3: float,
    wall_j_k: float,
    temperature_k: float,
    start: Start,
) -> Vessel:
    """Make the bottle to fill, with what its start leaves in it.

    Parameters
    ----------
    volume_m3 : float, water capacity [m3]
    wall_j_k : float, heat capacity of the wall [J/K]
    temperature_k : float, its temperature [K]
    start : Start, how it starts [-]

    Returns
    -------
    Vessel, the bottle at rest [-]

    Assumptions
    -----------
    `vented`: vapour at the room's pressure and the bottle's temperature. `own vapour`: the
    weight where it's known, else saturated vapour, the most that a bottle without liquid
    holds. `air`: no nitrous, air at the room's pressure that was never purged; it stays in
    the vapour's space, doesn't dissolve, and is compressed at the bottle's temperature.
    `weighed`: the weight.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    OutOfRange
        `start` for a word that isn't a start, or `weighed` without a weight.

    References
    ----------
    Common practice, no source.
    """
    if start.kind not in STARTS or (start.kind == WEIGHED and start.net_kg is None):
        raise OutOfRange("start", "Say how the bottle starts: vented, own vapour, air, or weighed with its net.")
    bottle = Vessel(volume_m3, wall_j_k, 0.0, temperature_k)
    if start.kind == AIR:
        return replace(bottle, air=start.ambient_pa * volume_m3 / temperature_k)
    fluid = engine()
    if start.kind == VENTED:
        net = fluid.density(start.ambient_pa, temperature_k) * volume_m3
    elif start.net_kg is not None:
        net = start.net_kg
    else:
        saturated = min(temperature_k, T_SATURATION_MAX)
        net = fluid.saturation(saturated)[2] * volume_m3
    return replace(bottle, net_kg=net)
