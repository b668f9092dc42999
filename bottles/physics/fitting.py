"""Fit the condensation figure from refills: of the shop, of each way of entering, of each size.

A refill's own figure scatters about that of its class (one way of entering, one size); classes
scatter about their way, ways about the shop, the shop about the prior. A class with few refills
is thereby drawn towards its way, a way with few towards the shop. All is summed on a grid, by
messages up and down that tree, which is exact but for the grid's step.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from math import erfc, sqrt
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from bottles.physics.condensation import PRIOR
from shop.physics.errors import OutOfRange

ENOUGH = 5  # refills whose flow ceased, until which the figure stays the prior (this project's own choice)

_Array: TypeAlias = NDArray[np.float64]
_Class: TypeAlias = tuple[str, int | None]
_GRID: _Array = np.linspace(0.0, 1.0, 201)
# How far refills of one class, classes of one way, ways of the shop may scatter; and how likely
# each is held before any refill: half a normal bell of that width (this project's own choice).
_BETWEEN_REFILLS: _Array = np.geomspace(0.01, 0.5, 14)
_BETWEEN_SIZES: _Array = np.array([0.01, 0.03, 0.07, 0.15])
_BETWEEN_WAYS: _Array = np.array([0.02, 0.06, 0.12, 0.25])
_REFILLS_BELL, _SIZES_BELL, _WAYS_BELL = 0.2, 0.1, 0.15
# A refill in so many is something else (a weight typed wrong): anywhere within such a span.
_ODD_SHARE, _ODD_SPAN = 0.02, 4.0
_FLOOR = 1e-290


@dataclass(frozen=True, slots=True)
class Observation:
    """What one refill tells: its own figure or, censored, the least that it can have been."""

    figure: float
    deviation: float  # of the measurement alone
    censored: bool = False
    way: str = ""  # empty: not known
    size: int | None = None

    def __post_init__(self) -> None:
        """Refuse what no refill tells."""
        if not (abs(self.figure) < 1e6 and 0.0 < self.deviation < 1e6):
            raise OutOfRange("observation", "A refill tells a figure with a deviation above nothing. Leave it out.")


@dataclass(frozen=True, slots=True)
class Fitted:
    """The figure for the next refill of one class; no size: any other size; no way: it isn't known."""

    way: str
    size: int | None
    figure: float
    deviation: float  # of one refill to come
    uncertainty: float  # standard deviation of the figure itself
    informative: int
    bounds: int

    @property
    def tells(self) -> bool:
        """Whether enough refills stand behind it; else the prior holds."""
        return self.informative >= ENOUGH


def fit(observations: Sequence[Observation], *, ways: Sequence[str] = ("dip", "spray")) -> tuple[Fitted, ...]:
    """Fit the condensation figure of the shop, of each way of entering and of each size.

    Parameters
    ----------
    observations : Sequence of Observation, one a refill, in any order [-]
    ways : Sequence of str, ways of entering that are answered for in any case [-]

    Returns
    -------
    tuple of Fitted, first where the way isn't known, then each way, then each of its sizes;
    figures are posterior means, deviations those of one refill to come [-]

    Assumptions
    -----------
    Normal scatter on each level; measurement errors normal and independent. A refill stopped
    before its flow ceased tells that its figure is not below what came over. One in fifty
    refills is taken to tell nothing. The counts of a way are those of all its sizes, those of
    the first answer all refills.

    Valid for
    ---------
    Any number of refills, none included: then the prior comes out, rather wider.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    A. Gelman et al., Bayesian Data Analysis, 3rd ed. (2013), chapter 5, hierarchical models
    (from memory); messages on a tree: J. Pearl, Probabilistic Reasoning in Intelligent
    Systems (1988), chapter 4 (from memory).
    """
    # Sums of floating numbers depend on their order: sorted, the answer doesn't.
    ordered = sorted(observations, key=lambda one: (one.way, one.size or 0, one.censored, one.figure, one.deviation))
    of_class: dict[_Class, list[Observation]] = {("", None): []}
    of_class |= {(way, None): [] for way in sorted({*ways, *(one.way for one in ordered if one.way)})}
    for one in ordered:
        of_class.setdefault((one.way, one.size if one.way else None), []).append(one)
    tree = _Tree({key: _likelihood(rows) for key, rows in of_class.items()})
    found = [_fitted(key, ordered, tree) for key in of_class]
    return tuple(sorted(found, key=lambda one: (one.way, one.size is not None, one.size or 0)))


def _fitted(key: _Class, observations: Sequence[Observation], tree: _Tree) -> Fitted:
    """One class's answer."""
    way, size = key
    mine = [
        one for one in observations
        if not way or (one.way == way and (size is None or one.size == size))
    ]  # fmt: skip
    figure, variance, scatter = tree.answer(key)
    bounds = sum(one.censored for one in mine)
    deviation = min(sqrt(variance + scatter), 1.0)
    return Fitted(way, size, figure, deviation, sqrt(variance), len(mine) - bounds, bounds)


def _likelihood(observations: Sequence[Observation]) -> _Array:
    """Likelihood of a class's refills for each scatter and figure, its largest one; (scatter, figure)."""
    total = np.zeros((len(_BETWEEN_REFILLS), len(_GRID)))
    for censored in (False, True):
        mine = [one for one in observations if one.censored is censored]
        if not mine:
            continue
        figures = np.array([one.figure for one in mine])
        errors = np.array([one.deviation for one in mine])
        odd = 0.5 if censored else 1.0 / _ODD_SPAN
        for number, between in enumerate(_BETWEEN_REFILLS):
            spread = np.sqrt(errors * errors + between * between)[:, None]
            away = (_GRID[None, :] - figures[:, None]) / spread
            sound = _below(away) if censored else np.exp(-0.5 * away * away) / (spread * sqrt(2.0 * np.pi))
            total[number] += np.log((1.0 - _ODD_SHARE) * sound + _ODD_SHARE * odd).sum(axis=0)
    return np.asarray(np.exp(total - total.max()))


class _Tree:
    """Shop, ways, classes: what is likely of each once all refills have spoken.

    Axes of the arrays: scatter between refills, between sizes, between ways, figure.
    """

    def __init__(self, likelihood: dict[_Class, _Array]) -> None:
        sizes, ways = _kernels(_SIZES), _kernels(_WAYS)
        # Upwards: what the refills of a class say of its way, those of a way of the shop.
        up = {key: _flat(np.einsum("spc,rc->rsp", sizes, one)) for key, one in likelihood.items()}
        of_way: dict[str, _Array] = {}
        for (way, _), one in up.items():
            of_way[way] = of_way[way] * one if way in of_way else one
        to_shop = {way: _flat(np.einsum("wpc,rsc->rswp", ways, one)) for way, one in of_way.items()}
        prior = np.exp(-0.5 * ((_GRID - PRIOR.figure) / PRIOR.deviation) ** 2)
        shop = np.log(prior) + sum(np.log(one) for one in to_shop.values()) + _hyper()
        shop = np.exp(shop - shop.max())
        self._answers: dict[_Class, tuple[float, float, float]] = {}
        for key, one in likelihood.items():
            # Downwards: what all the others say, then the class's own refills.
            above = np.einsum("wpc,rswp->rsc", ways, shop / to_shop[key[0]])
            others = above * of_way[key[0]] / up[key]
            joint = np.einsum("spc,rsp->rc", sizes, others) * one
            self._answers[key] = _moments(joint)

    def answer(self, key: _Class) -> tuple[float, float, float]:
        """Mean and variance of a class's figure, and the mean square of the scatter about it."""
        return self._answers[key]


_SIZES, _WAYS = "sizes", "ways"


def _flat(message: _Array) -> _Array:
    """A message kept from falling to nothing, by which nothing could be divided any more.

    Scaled as a whole: its size tells one scatter from another.
    """
    return np.asarray(np.maximum(message / message.max(), _FLOOR))


def _moments(joint: _Array) -> tuple[float, float, float]:
    """Mean, variance and mean square scatter of a joint likelihood; (scatter, figure)."""
    joint = joint / joint.sum()
    of_figure, of_scatter = joint.sum(axis=0), joint.sum(axis=1)
    mean = float(of_figure @ _GRID)
    variance = float(of_figure @ (_GRID - mean) ** 2)
    return min(max(mean, 0.0), 1.0), variance, float(of_scatter @ _BETWEEN_REFILLS**2)


@cache
def _kernels(level: str) -> _Array:
    """How likely each figure of a child is for each of its parent; (scatter, parent, child)."""
    scatters = _BETWEEN_SIZES if level == _SIZES else _BETWEEN_WAYS
    away = (_GRID[None, None, :] - _GRID[None, :, None]) / scatters[:, None, None]
    bells = np.exp(-0.5 * away * away)
    return np.asarray(bells / bells.sum(axis=2, keepdims=True))


@cache
def _hyper() -> _Array:
    """Logarithm of how likely each scatter is held beforehand; (refills, sizes, ways, 1)."""
    # The grid of scatters between refills is even in the logarithm: hence the second term.
    refills = -0.5 * (_BETWEEN_REFILLS / _REFILLS_BELL) ** 2 + np.log(_BETWEEN_REFILLS)
    sizes = -0.5 * (_BETWEEN_SIZES / _SIZES_BELL) ** 2 + np.log(np.gradient(_BETWEEN_SIZES))
    ways = -0.5 * (_BETWEEN_WAYS / _WAYS_BELL) ** 2 + np.log(np.gradient(_BETWEEN_WAYS))
    return np.asarray(refills[:, None, None, None] + sizes[None, :, None, None] + ways[None, None, :, None])


def _below(away: _Array) -> _Array:
    """The normal bell's share below so many deviations, from a table: its errors are below 1e-5."""
    steps, shares = _bell()
    return np.asarray(np.interp(away, steps, shares))


@cache
def _bell() -> tuple[_Array, _Array]:
    """A table of the normal bell's share below."""
    steps = np.linspace(-8.0, 8.0, 3201)
    return steps, np.array([0.5 * erfc(-step / sqrt(2.0)) for step in steps])
