"""The single checks that a judgement is made of, each a few lines, each citing its rule.

A check adds reasons; it never takes back what another has said. A fact that isn't known
is named in ``not_judged`` and, where it decides, asks to be found out first.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass, field

from bottles.rules.conditions import effect_of, label_of
from bottles.rules.edition import Cited, MarkedRow, RuleEdition
from bottles.rules.facts import Facts
from bottles.rules.history import Requalification
from bottles.rules.limit import FillLimit
from bottles.rules.policy import Policy
from bottles.rules.words import not_given, say
from shop.rules import month as months
from shop.rules.month import Month
from shop.rules.reason import Reason

_SHOP_RULE = Cited("Shop rule", "common practice")
_BOTH = ("filling", "emptying")
_REFUSAL_CODES = {
    "not refillable": "not-refillable",
    "not on the row": "not-on-the-row",
    "foreign": "foreign-mark",
    "aircraft use only": "aircraft-only",
}


@dataclass(frozen=True, slots=True)
class Asked:
    """What a judgement asks about."""

    facts: Facts
    edition: RuleEdition
    policy: Policy
    on: datetime.date
    dates: Requalification
    limit: FillLimit
    at_counter: bool


@dataclass(slots=True)
class Checks:
    """Reasons found so far, and what couldn't be judged."""

    house: str
    reasons: list[Reason] = field(default_factory=list)
    unknown: list[str] = field(default_factory=list)

    @property
    def not_judged(self) -> tuple[str, ...]:
        """The facts that weren't given, each once."""
        return tuple(dict.fromkeys(self.unknown))

    def add(self, reason: Reason) -> None:
        """Keep a reason."""
        self.reasons.append(reason)

    def ask(self, what: str, source: Cited, *about: str) -> None:
        """A fact isn't given: list it, and have it found out first where it decides."""
        self.unknown.append(what)
        if about:
            self.add(not_given(what, source, *about))


def all_checks(asked: Asked) -> Checks:
    """Every check in turn."""
    checks = Checks(asked.edition.words["house"])
    _for_good(asked, checks)
    _conditions(asked, checks)
    _contents(asked, checks)
    _mark(asked, checks)
    _permit(asked, checks)
    _stamps(asked, checks)
    _owner(asked, checks)
    _measures(asked, checks)
    _room(asked, checks)
    _at_hand(asked, checks)
    _shop_dates(asked, checks)
    return checks


def _for_good(asked: Asked, checks: Checks) -> None:
    facts, edition = asked.facts, asked.edition
    source = edition.rule("condemned")
    if facts.condemned is None:
        checks.ask("condemned", source, *_BOTH)
    elif facts.condemned:
        checks.add(say("condemned", "refuses", source, *_BOTH))
    marked = asked.dates.row
    if marked and marked.row.service_life_is_marked and facts.service_life_end is None:
        checks.ask("service life", edition.rule("service life"), *_BOTH)


def _conditions(asked: Asked, checks: Checks) -> None:
    facts, edition = asked.facts, asked.edition
    source = edition.rule("condition")
    if facts.conditions is None:
        checks.ask("conditions", source, *_BOTH)
        return
    known = facts.mark.specification if facts.mark else None
    wall = facts.wall or (known.wall if known else None)
    for condition in facts.conditions:
        effect, label = effect_of(condition.code), label_of(condition.code)
        if effect == "clean first":
            checks.add(say("clean-first", "first", source, "filling", condition=label))
        elif effect == "dry and purge":
            if facts.dried_and_purged is not True:
                checks.add(say("dry-and-purge", "first", _SHOP_RULE, "filling"))
        elif effect == "illegible":
            checks.add(
                say(
                    "marks-illegible",
                    "refuses",
                    edition.rule("legible"),
                    "filling",
                    house=checks.house,
                )
            )
        elif effect == "contents unknown":
            checks.add(say("contents-unknown", "refuses", edition.rule("contents"), *_BOTH))
        else:
            checks.add(say("condition", "refuses", source, *_BOTH, condition=label, house=checks.house))
            if condition.code == "heat" and wall == "aluminium":
                over = edition.rule("overheated aluminium")
                checks.add(say("heat-aluminium", "refuses", over, *_BOTH, house=checks.house))


def _contents(asked: Asked, checks: Checks) -> None:
    source = asked.edition.rule("contents")
    contents = asked.facts.contents
    if contents is None:
        checks.ask("contents", source, *_BOTH)
    elif contents == "unknown":
        checks.add(say("contents-unknown", "refuses", source, *_BOTH))
    elif contents == "other":
        checks.add(say("contents-other", "refuses", source, *_BOTH, house=checks.house))
    elif contents == "nothing yet":
        checks.add(say("nothing-inside", "refuses", source, "emptying"))


def _mark(asked: Asked, checks: Checks) -> None:
    """Whether the mark may be filled at all; its absence from the rules is in the dates."""
    if asked.facts.mark is None:
        checks.ask("mark", asked.edition.rule("legible"), "filling")
        return
    for reason in mark_reasons(asked.edition, asked.dates.row):
        checks.add(reason)


def mark_reasons(edition: RuleEdition, marked: MarkedRow | None) -> list[Reason]:
    """What a row says against its mark: never a receiver, or too low a pressure."""
    if marked is None:
        return []
    found: list[Reason] = []
    row, mark = marked.row, marked.mark
    if row.refused_because is not None:
        code = _REFUSAL_CODES[row.refused_because]
        values = {"edition": edition.title} if code == "foreign-mark" else {}
        found.append(say(code, "refuses", row.source, "filling", mark=mark.spec, **values))
        return found
    source = edition.rule("service pressure")
    if row.least_service_pressure is not None:
        stamped = mark.service or row.deemed_service_pressure
        if stamped is None:
            found.append(say("pressure-not-read", "first", source, "filling", mark=mark.typed))
        elif stamped.pascals() < row.least_service_pressure.pascals():
            values = {"stamped": str(stamped), "least": str(row.least_service_pressure)}
            found.append(say("service-pressure-too-low", "refuses", source, "filling", **values))
    if row.least_test_pressure_bar is not None:
        if mark.test_pressure is None:
            found.append(say("pressure-not-read", "first", source, "filling", mark=mark.typed))
        elif mark.test_pressure.number < row.least_test_pressure_bar:
            values = {
                "stamped": str(mark.test_pressure),
                "least": f"{row.least_test_pressure_bar} bar",
            }
            found.append(say("test-pressure-too-low", "refuses", source, "filling", **values))
    return found


def _permit(asked: Asked, checks: Checks) -> None:
    marked = asked.dates.row
    if marked is None or marked.row.receiver != "per permit":
        return
    source = asked.edition.rule("permit")
    permit = asked.facts.permit
    if permit is None or permit.lists_nitrous is None:
        checks.ask("permit", source, "filling")
    elif not permit.lists_nitrous:
        checks.add(say("permit-excludes-nitrous", "refuses", source, "filling", mark=marked.mark.typed))
    if permit is None or permit.expires is None:
        checks.ask("permit expiry", source, "filling")
    elif permit.expires < asked.on:
        checks.add(say("permit-expired", "refuses", source, "filling", expired=permit.expires.isoformat()))


def _stamps(asked: Asked, checks: Checks) -> None:
    facts, edition = asked.facts, asked.edition
    if facts.marks_legible is None:
        checks.ask("marks", edition.rule("legible"), "filling")
    elif not facts.marks_legible:
        source = edition.rule("legible")
        checks.add(say("marks-illegible", "refuses", source, "filling", house=checks.house))
    if asked.dates.kept is not None and facts.star_kept is None:
        # The shorter of its two dates was taken, so this needs no asking before a fill.
        checks.unknown.append("star kept")
    if asked.dates.kept is not None and facts.star_kept and facts.star_check_done is not True:
        checks.add(say("star-check-owed", "first", edition.rule("star"), "filling"))
    if facts.alloy_6351:
        source = edition.rule("alloy 6351")
        checks.add(say("alloy-6351", "warns", source, house=checks.house))


def _owner(asked: Asked, checks: Checks) -> None:
    facts, edition = asked.facts, asked.edition
    source = edition.rule("consent")
    if facts.owner is None:
        checks.ask("owner", source, "filling")
    elif facts.owner == "supplier":
        checks.add(say("suppliers-bottle", "refuses", edition.rule("supplier"), "filling"))
    elif facts.owner == "customer":
        if facts.consent is None:
            checks.ask("consent", source, "filling")
        elif not facts.consent:
            checks.add(say("no-consent", "refuses", source, "filling"))
        if not facts.consent:
            checks.add(say("customers-contents", "warns", _SHOP_RULE, "emptying"))


def _measures(asked: Asked, checks: Checks) -> None:
    facts = asked.facts
    source = asked.edition.rule("filling by weight")
    if facts.tare_known is False or (facts.tare_known is None and asked.at_counter):
        checks.add(say("no-tare", "refuses", source, "filling"))
    elif facts.tare_known is None:
        checks.add(not_given("tare", source, "filling"))
    if facts.tare_known is None:
        checks.unknown.append("tare")
    if facts.capacity_ml is None:
        checks.unknown.append("capacity")
        if asked.at_counter:
            checks.add(say("no-capacity", "refuses", source, "filling"))
        else:
            checks.add(not_given("capacity", source, "filling"))
    elif facts.capacity_ml <= 0:
        checks.add(say("no-capacity", "refuses", source, "filling"))


def _room(asked: Asked, checks: Checks) -> None:
    """What it holds against its limit; only a scale knows, never the books."""
    facts = asked.facts
    limit = asked.limit.grams
    source = asked.edition.rule("filling by weight")
    net = facts.net_g
    if net is None:
        checks.ask("net", source, "filling")
        return
    if net <= 0 and facts.contents != "nothing yet":
        checks.add(say("nothing-inside", "refuses", _SHOP_RULE, "emptying"))
    if limit is None:
        return
    if net > limit:
        checks.add(say("over-its-limit", "refuses", source, "filling", net=net, limit=limit))
    elif net == limit:
        checks.add(say("at-its-limit", "refuses", source, "filling", net=net, limit=limit))
    elif net + facts.net_plus_minus_g >= limit:
        values = {"net": net, "plus_minus": facts.net_plus_minus_g, "limit": limit}
        checks.add(say("within-plus-minus", "warns", source, "filling", **values))


def _at_hand(asked: Asked, checks: Checks) -> None:
    """What is seen and done at the counter itself."""
    facts, edition = asked.facts, asked.edition
    if facts.in_open_refill is None:
        checks.ask("open refill", _SHOP_RULE, *_BOTH)
    elif facts.in_open_refill:
        checks.add(say("in-open-refill", "refuses", _SHOP_RULE, *_BOTH))
    if facts.pressure_kept is None:
        checks.ask("pressure kept", _SHOP_RULE, "filling")
    elif not facts.pressure_kept and facts.dried_and_purged is not True:
        checks.add(say("dry-and-purge", "first", _SHOP_RULE, "filling"))
    if facts.look_done is None:
        checks.unknown.append("look")
    if facts.look_done is not True:
        checks.add(say("look-owed", "first", edition.rule("look"), "filling"))


def _shop_dates(asked: Asked, checks: Checks) -> None:
    """The shop's own dates: visual inspection and safety disc."""
    facts, policy, now = asked.facts, asked.policy, months.of_date(asked.on)
    if policy.visual_interval_months is not None:
        seen = _last_seen_inside(asked)
        if seen is None:
            checks.ask("visual", _SHOP_RULE, "filling")
        elif now > seen + policy.visual_interval_months:
            due = months.slashed(seen + policy.visual_interval_months)
            checks.add(say("visual-overdue", "refuses", _SHOP_RULE, "filling", due=due))
    if policy.disc_interval_months is not None:
        if facts.disc is None:
            # A disc's date isn't among what stops a fill: the look finds a bad disc.
            checks.unknown.append("disc")
        elif now > facts.disc + policy.disc_interval_months:
            due = months.slashed(facts.disc + policy.disc_interval_months)
            checks.add(say("disc-overdue", "warns", _SHOP_RULE, "filling", due=due))


def _last_seen_inside(asked: Asked) -> Month | None:
    """The last visual inspection; a test and the manufacture include one."""
    facts = asked.facts
    seen = [facts.visual] if facts.visual is not None else []
    if asked.dates.last is not None:
        seen.append(asked.dates.last.at)
    now = months.of_date(asked.on)
    return max((month for month in seen if month <= now), default=None)
