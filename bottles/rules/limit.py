"""How much a bottle may hold: the least of several figures, and which of them binds.

- filling density × water capacity, by the rule set's own definition of water
- the stamped or labelled charge
- the permit's figure
- the shop's own, for this bottle or for all

Without the first there is no limit at all: a label alone doesn't say that the bottle
behind it is large enough, and a specification that isn't on the nitrous oxide row has
no filling density.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from bottles.physics.filling import P200_WATER, US_WATER, filling_limit_g
from bottles.rules.edition import Cited, MarkedRow, RuleEdition
from bottles.rules.facts import Facts
from bottles.rules.policy import Policy
from shop.rules.origin import Origin

_WATER = {"us": US_WATER, "p200": P200_WATER}


@dataclass(frozen=True, slots=True)
class Candidate:
    """One figure that the limit may come from, with its origin and what it rests on."""

    code: str
    label: str
    grams: int
    origin: Origin
    source: Cited


@dataclass(frozen=True, slots=True)
class FillLimit:
    """The limit in grams (None: there is none to be had), what binds, and all figures."""

    grams: int | None
    binds: str | None
    candidates: tuple[Candidate, ...]


def fill_limit(facts: Facts, row: MarkedRow | None, edition: RuleEdition, policy: Policy) -> FillLimit:
    """The least of the figures that a bottle's limit may come from."""
    density = _by_density(facts, row, edition)
    found = [] if density is None else [density]
    if facts.charge_g is not None:
        found.append(
            Candidate(
                "charge",
                "stamped or labelled charge",
                facts.charge_g,
                facts.charge_origin,
                Cited("Stamp or label of the bottle", "entered"),
            )
        )
    if facts.permit is not None and facts.permit.charge_g is not None:
        found.append(
            Candidate(
                "permit",
                "figure of its permit",
                facts.permit.charge_g,
                "entered",
                Cited("The permit itself", "entered"),
            )
        )
    found.extend(_shops_own(facts, density, policy))
    if density is None:
        return FillLimit(None, None, tuple(found))
    least = min(found, key=lambda candidate: candidate.grams)
    return FillLimit(least.grams, least.code, tuple(found))


def _by_density(facts: Facts, row: MarkedRow | None, edition: RuleEdition) -> Candidate | None:
    if facts.capacity_ml is None or facts.capacity_ml <= 0:
        return None
    if row is None or row.row.receiver == "no":
        return None
    filling = edition.filling_row(row.mark)
    if filling is None:
        return None
    grams = filling_limit_g(facts.capacity_ml, Fraction(filling.per_mille, 1000), _WATER[edition.water])
    percent = f"{Fraction(filling.per_mille, 10).__float__():g}"
    return Candidate("filling density", f"{percent} % of water capacity", grams, "computed", filling.source)


def _shops_own(facts: Facts, density: Candidate | None, policy: Policy) -> list[Candidate]:
    source = Cited("Setting of this shop", "entered")
    found = []
    if facts.own_limit_g is not None:
        found.append(Candidate("own", "the shop's own for this bottle", facts.own_limit_g, "entered", source))
    if policy.own_limit_per_mille is not None and density is not None:
        grams = density.grams * policy.own_limit_per_mille // 1000
        found.append(Candidate("shop", "the shop's own", grams, "entered", source))
    return found
