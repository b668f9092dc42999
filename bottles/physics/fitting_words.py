"""Words for fitted condensation figures: where one comes from, and why there is none yet."""

from __future__ import annotations

from collections.abc import Mapping

from bottles.physics.fitting import ENOUGH

WAYS: Mapping[str, str] = {
    "dip": "under the vapour, through a dip tube",
    "spray": "sprayed through the vapour, without a dip tube",
    "": "tube not known",
}
_SHORT: Mapping[str, str] = {"dip": " through a dip tube", "spray": " without a dip tube", "": ""}
_NO_END_ML = 1_000_000  # an upper end that stands for none


def origin(informative: int, way: str, size_span_ml: tuple[int, int] | None, since: str) -> str:
    """Say where a fitted figure comes from.

    Parameters
    ----------
    informative : int, refills whose flow ceased [-]
    way : str, dip, spray, or nothing where it isn't known [-]
    size_span_ml : tuple of int or None, ends of the class of sizes [mL]
    since : str, since when the figure holds: year and month [-]

    Returns
    -------
    str, a phrase [-]

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any fitted figure.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    None: wording.
    """
    tube = _SHORT[way]
    if size_span_ml:
        between = size_span_ml[0] and size_span_ml[1] < _NO_END_ML
        said = litres(size_span_ml).removeprefix("over ") if between else litres(size_span_ml)
        tube = f", bottles of {said}{',' if tube else ''}{tube}"
    refills = "1 refill" if informative == 1 else f"{informative} refills"
    return f"{refills} of this shop{tube}, since {since}"


def litres(size_span_ml: tuple[int, int]) -> str:
    """Write a class of sizes by its ends.

    Parameters
    ----------
    size_span_ml : tuple of int, both ends [mL]

    Returns
    -------
    str, words [-]

    Assumptions
    -----------
    The lower end isn't of the class, the upper one is; above 50 L there is no upper end.

    Valid for
    ---------
    Any class.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    None: wording.
    """
    low, high = (f"{end / 1000:g}" for end in size_span_ml)
    if not size_span_ml[0]:
        return f"up to {high} L"
    return f"over {low} L" if size_span_ml[1] >= _NO_END_ML else f"over {low} to {high} L"


def why_untold(informative: int, bounds: int) -> str:
    """Say why refills don't tell a figure yet; nothing where they do.

    Parameters
    ----------
    informative : int, refills whose flow ceased [-]
    bounds : int, refills stopped before [-]

    Returns
    -------
    str, a sentence or nothing [-]

    Assumptions
    -----------
    None.

    Valid for
    ---------
    Any counts.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    None: wording.
    """
    if informative >= ENOUGH:
        return ""
    if not informative and bounds:
        return (
            "Every refill was stopped before its flow ceased: they say how much condenses at least, not how much. "
            "Until some are left until the flow ceases, it's taken as midway (common practice, no source)."
        )
    told = "No refill" if not informative else "Only 1 refill" if informative == 1 else f"Only {informative} refills"
    return f"{told} told it so far, {ENOUGH} are needed: until then it's taken as midway (common practice, no source)."
