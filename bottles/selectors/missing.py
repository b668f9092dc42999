"""What isn't known of a bottle yet, and what can't be judged without it."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

from bottles.models import Bottle, Standing
from bottles.rules.marks import read_mark


@dataclass(frozen=True, slots=True)
class Missing:
    """One thing to complete: what, what waits for it, on which page it's told."""

    what: str
    why: str
    page: str  # name of the page
    stops: bool = False  # without it the bottle can't be judged at all


def what_is_missing(bottle: Bottle, standing: Standing, stamped: Collection[str]) -> list[Missing]:
    """List what is missing, what stops a judgement first; `stamped` are the kinds of stamps read."""
    mark = read_mark(bottle.mark) if bottle.mark else None
    made_of = mark.specification.wall if mark and mark.specification else None
    composite = "composite" in (bottle.wall, made_of)
    found = [
        (not bottle.mark, Missing("mark with pressure", "whether it may hold nitrous at all, and its test interval", "edit", True)),
        (
            bool(mark and mark.spec is None),
            Missing("a mark that the list knows", f"“{bottle.mark}” isn't in the list of specifications", "edit", True),
        ),
        (
            bool(mark and mark.spec and not (mark.service or mark.test_pressure)),
            Missing("the mark's pressure", "whether it's strong enough for nitrous", "edit", True),
        ),
        (not {"test", "made"} & set(stamped), Missing("last test", "when its next test is due", "stamps", True)),
        (
            bottle.capacity_ml is None,
            Missing("water capacity or labelled size", "how much may go in", "edit", True),
        ),
        (standing.tare is None, Missing("tare", "what it holds: a weight alone doesn't tell", "tare", True)),
        (standing.ownership is None, Missing("owner", "whose word lets it be filled", "owner", True)),
        (composite and "end" not in stamped, Missing("end of service life", "a composite bottle has one", "stamps", True)),
        (not bottle.serial, Missing("serial number", "which bottle it is: without one it goes to a test house", "edit", True)),
        (
            bottle.capacity_basis == "inferred",
            Missing("stamped water capacity", "the fill limit rests on the labelled size for now", "edit"),
        ),
        ("made" not in stamped, Missing("month made", "whether the other stamps can be right", "stamps")),
        (bottle.wall == "unknown" and made_of is None, Missing("wall", "how cold and warm it gets while filling", "edit")),
        (bottle.dip_tube == "unknown", Missing("dip (siphon) tube or none", "how it must lie to give liquid", "edit")),
        (not bottle.disc, Missing("safety disc", "at which pressure it opens", "edit")),
        ("disc" not in stamped, Missing("safety disc's date", "how old it is", "stamps")),
        (
            bottle.last_held == "" and standing.weighing is None,
            Missing("what it last held", "whether it may be filled without being cleaned first", "edit"),
        ),
        (not bottle.maker, Missing("maker", "which bottle it is, beside its serial number", "edit")),
        (not bottle.outlet, Missing("outlet", "which hose fits", "edit")),
    ]
    return sorted((missing for is_missing, missing in found if is_missing), key=lambda missing: not missing.stops)
