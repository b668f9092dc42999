"""Contradictions that are caught while a bottle is registered, and a capacity inferred.

A contradiction refuses nothing by itself: a bottle may be registered with what is really
stamped on it. It is shown at once, because it is easiest to read the metal again while
the bottle lies there. What refuses a *fill* is judged by ``fitness.py``.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from fractions import Fraction

from bottles.physics.filling import P200_WATER, US_WATER, capacity_of_water_ml, inferred_capacity_ml
from bottles.rules.edition import Cited, RuleEdition
from bottles.rules.facts import Facts
from bottles.rules.fitness_checks import mark_reasons
from bottles.rules.limit import fill_limit
from bottles.rules.policy import Policy
from bottles.rules.requalification import requalify
from bottles.rules.specifications import Wall
from bottles.rules.words import say
from shop.rules import month as months
from shop.rules.reason import Reason, in_order

# What bottles with their valve weigh for each litre of water (g/mL), from light to heavy.
# Common practice, no source: wide enough that only a misread unit falls outside.
_TARE_PER_ML: dict[Wall | None, tuple[Fraction, Fraction]] = {
    "aluminium": (Fraction(6, 10), Fraction(3)),
    "steel": (Fraction(7, 10), Fraction(4)),
    "composite": (Fraction(2, 10), Fraction(2)),
    None: (Fraction(2, 10), Fraction(4)),
}
# Valve, gauge and bracket weigh something however small the bottle is.
_FITTINGS_G = 1500
_STAR_LARGEST_WATER_G = 56_700


@dataclass(frozen=True, slots=True)
class InferredCapacity:
    """A capacity that nobody read: the least that holds the labelled charge."""

    capacity_ml: int
    reason: Reason


def infer_capacity(charge_g: int, facts: Facts, edition: RuleEdition) -> InferredCapacity | None:
    """The least capacity that may hold the labelled charge; None without a filling ratio.

    The label is taken to keep the rule. The true capacity may be larger, never is the
    limit by this one above the label.
    """
    filling = edition.filling_row(facts.mark)
    if filling is None or charge_g <= 0:
        return None
    water = US_WATER if edition.water == "us" else P200_WATER
    capacity = inferred_capacity_ml(charge_g, Fraction(filling.per_mille, 1000), water)
    reason = say("capacity-inferred", "warns", filling.source, capacity=capacity, charge=charge_g)
    return InferredCapacity(capacity, reason)


def contradictions(
    facts: Facts,
    edition: RuleEdition,
    on: datetime.date,
    *,
    tare_g: int | None = None,
) -> tuple[Reason, ...]:
    """What contradicts itself or the rules in the facts entered; the gravest first."""
    dates = requalify(facts.history(on), facts.mark, edition, Policy(), on, wall=facts.wall)
    known = {"test-before-manufacture", "test-after-day", "stamp-without-month", "mark-unknown"}
    known |= {"no-row-for-mark", "star-not-for-mark", "star-too-old", "service-life-over", "wall-needed"}
    found = [reason for reason in dates.reasons if reason.code in known]
    found += mark_reasons(edition, dates.row)
    found += _charge(facts, edition)
    found += _wall(facts)
    found += _star(facts, edition)
    found += _life(facts, edition)
    found += _permit(facts, edition)
    if tare_g is not None:
        found += _tare(facts, tare_g)
    return in_order(found)


def _charge(facts: Facts, edition: RuleEdition) -> list[Reason]:
    row = edition.row_for(facts.mark, facts.wall)
    limit = fill_limit(facts, row, edition, Policy())
    by_density = next((each for each in limit.candidates if each.code == "filling density"), None)
    if by_density is None or facts.charge_g is None or facts.charge_g <= by_density.grams:
        return []
    values = {"charge": facts.charge_g, "limit": by_density.grams}
    return [say("charge-above-capacity", "first", by_density.source, **values)]


def _wall(facts: Facts) -> list[Reason]:
    known = facts.mark.specification if facts.mark else None
    if known is None or known.wall is None or facts.wall in (None, known.wall):
        return []
    source = Cited(known.citation, known.basis)
    values = {"mark": known.code, "expected": known.wall, "wall": facts.wall}
    return [say("wall-contradicts-mark", "first", source, **values)]


def _star(facts: Facts, edition: RuleEdition) -> list[Reason]:
    stamps = (*(facts.tests or ()), *((facts.made,) if facts.made else ()))
    if not any(stamp.star for stamp in stamps):
        return []
    found = []
    known = facts.mark.specification if facts.mark else None
    wall = facts.wall or (known.wall if known else None)
    if wall == "aluminium":
        found.append(say("star-on-aluminium", "first", edition.rule("star")))
    if facts.capacity_ml is not None:
        largest = capacity_of_water_ml(_STAR_LARGEST_WATER_G, US_WATER)
        if facts.capacity_ml > largest:
            found.append(say("star-too-large", "first", edition.rule("star")))
    return found


def _life(facts: Facts, edition: RuleEdition) -> list[Reason]:
    known = facts.mark.specification if facts.mark else None
    wall = facts.wall or (known.wall if known else None)
    source = edition.rule("service life")
    if facts.service_life_end is None:
        return [say("composite-without-life", "first", source)] if wall == "composite" else []
    if facts.made is not None and facts.service_life_end < facts.made.at:
        values = {"end": months.slashed(facts.service_life_end), "made": facts.made.text}
        return [say("life-before-manufacture", "first", source, **values)]
    return []


def _permit(facts: Facts, edition: RuleEdition) -> list[Reason]:
    marked = edition.row_for(facts.mark, facts.wall)
    if marked is None or marked.row.receiver != "per permit" or facts.permit is not None:
        return []
    return [say("permit-missing", "first", edition.rule("permit"), mark=marked.mark.typed)]


def _tare(facts: Facts, tare_g: int) -> list[Reason]:
    if facts.capacity_ml is None or facts.capacity_ml <= 0:
        return []
    known = facts.mark.specification if facts.mark else None
    light, heavy = _TARE_PER_ML[facts.wall or (known.wall if known else None)]
    least, most = int(light * facts.capacity_ml), int(heavy * facts.capacity_ml) + _FITTINGS_G
    if least <= tare_g <= most:
        return []
    values = {"tare": tare_g, "capacity": facts.capacity_ml, "least": least, "most": most}
    return [say("tare-implausible", "first", Cited("Common practice", "common practice"), **values)]
