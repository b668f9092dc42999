"""End masses of a refill alone, at the least cost: for fitting figures and planning days."""

from __future__ import annotations

from bottles.physics.condensation import PRIOR, between
from bottles.physics.transfer import Transfer
from bottles.physics.vessel import Vessel


def limits_free_kg(source: Vessel, receiver: Vessel, line_volume_m3: float = 0.0) -> tuple[float, float]:
    """What goes over without a fill limit in the cautious and in the quick limit.

    Parameters
    ----------
    source : Vessel, the supply bottle at rest [-]
    receiver : Vessel, the bottle to fill at its start [-]
    line_volume_m3 : float, inside volume of hose and fittings [m3]

    Returns
    -------
    tuple of float, `wall_condensing` and `mixed` [kg]

    Assumptions
    -----------
    As the two limits say. The cautious one ends with the supply's liquid: nothing without any.
    Where vapour is drawn on purpose it is the quick one, so that no condensation figure
    changes it.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model.
    """
    transfer = Transfer(source, receiver, line_volume_m3)
    return transfer.cautious_free_kg(), transfer.mixed_free_kg()


def likely_kg(
    source: Vessel,
    receiver: Vessel,
    limit_kg: float,
    line_volume_m3: float = 0.0,
    figure: float = PRIOR.figure,
) -> float:
    """What is likely to go over, up to the fill limit.

    Parameters
    ----------
    source : Vessel, the supply bottle at rest [-]
    receiver : Vessel, the bottle to fill at its start [-]
    limit_kg : float, fill limit of the receiver [kg]
    line_volume_m3 : float, inside volume of hose and fittings [m3]
    figure : float, condensation figure; the prior's without [-]

    Returns
    -------
    float, the same as a forecast's likely mass [kg]

    Assumptions
    -----------
    As `between`; end masses without the limit, then capped.

    Valid for
    ---------
    Bottles between -40 °C and 52 °C.

    Raises
    ------
    NoSolution
        Where the supply's path can't be followed.

    References
    ----------
    This project's own model.
    """
    room = limit_kg - receiver.net_kg
    if room <= 0.0:
        return 0.0
    return min(max(between(*limits_free_kg(source, receiver, line_volume_m3), figure), 0.0), room)
