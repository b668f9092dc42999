"""The condensation figure: where between two limits a shop's own refills lie.

What goes over is ``wall + c (mixed - wall)``, both limits without the fill limit; c is 0
where the receiver's vapour condenses on its wall alone, 1 where everything in it mixes.
"""

from __future__ import annotations

from dataclasses import dataclass

from shop.physics.errors import OutOfRange

PRIOR_ORIGIN = "common practice"
_COVER = 2.0  # deviations that a band takes in: about 19 of 20


@dataclass(frozen=True, slots=True)
class Condensation:
    """A condensation figure, its standard deviation, and where it comes from."""

    figure: float = 0.5
    deviation: float = 0.25
    origin: str = PRIOR_ORIGIN

    def __post_init__(self) -> None:
        """Refuse what lies outside of the limits."""
        if not (0.0 <= self.figure <= 1.0 and 0.0 <= self.deviation <= 1.0):
            raise OutOfRange("condensation", "A condensation figure lies between 0 and 1. Check the figure.")

    @property
    def is_prior(self) -> bool:
        """Say whether no refill of the shop's own stands behind it."""
        return self.origin == PRIOR_ORIGIN


# Midway, its band reaching both limits: nobody has measured this shop yet (common practice,
# no source).
PRIOR = Condensation()


def between(wall_kg: float, mixed_kg: float, figure: float) -> float:
    """Mass that goes over for a condensation figure.

    Parameters
    ----------
    wall_kg : float, the wall-condensing limit without the fill limit [kg]
    mixed_kg : float, the mixed limit without the fill limit [kg]
    figure : float, condensation figure [-]

    Returns
    -------
    float, mass [kg]

    Assumptions
    -----------
    Linear between the limits.

    Valid for
    ---------
    Figures between 0 and 1.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    This project's own model.
    """
    return wall_kg + figure * (mixed_kg - wall_kg)


def band(wall_kg: float, mixed_kg: float, condensation: Condensation) -> tuple[float, float]:
    """How far below and above the likely mass the condensation figure alone may lead.

    Parameters
    ----------
    wall_kg : float, the wall-condensing limit without the fill limit [kg]
    mixed_kg : float, the mixed limit without the fill limit [kg]
    condensation : Condensation, the figure and its deviation [-]

    Returns
    -------
    tuple of float, below and above, neither negative [kg]

    Assumptions
    -----------
    Two deviations either way, kept between the limits.

    Valid for
    ---------
    Any condensation figure.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    This project's own model.
    """
    likely = between(wall_kg, mixed_kg, condensation.figure)
    reach = _COVER * condensation.deviation
    ends = [between(wall_kg, mixed_kg, min(max(condensation.figure + sign * reach, 0.0), 1.0)) for sign in (-1.0, 1.0)]
    return likely - min(ends), max(ends) - likely
