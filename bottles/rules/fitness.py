"""May this bottle be filled, and may it be emptied into another?

One function answers both, for the counter, the reminders, the sheet and the command
line alike. It knows four answers. *No*: something refuses, whatever else is true.
*Unknown*: nobody here can answer, because the rules have no row for its mark or its
stamps contradict each other. *Only after*: everything that could be judged allows it,
and something is still to be read, weighed, asked or done. *Yes*: nothing is left open.

- Neither filled nor emptied: condemned, past its service life, leak or damage, last
  contents unknown.
- Emptied only: past its test month, visual inspection overdue, no consent of its owner,
  at its limit.
- Never filled: not refillable or a mark that isn't allowed, no legible stamp, no tare or
  capacity, the supplier's bottle, service pressure too low.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from typing import Literal

from bottles.rules.edition import RuleEdition
from bottles.rules.facts import Facts
from bottles.rules.fitness_checks import Asked, all_checks
from bottles.rules.history import Requalification, Status
from bottles.rules.limit import FillLimit, fill_limit
from bottles.rules.policy import Policy
from bottles.rules.requalification import requalify
from shop.rules.month import Month
from shop.rules.reason import Reason, in_order

Verdict = Literal["yes", "only after", "no", "unknown"]


@dataclass(frozen=True, slots=True)
class Judgement:
    """The answer, with everything it rests on; refusing reasons stand first."""

    may_be_filled: Verdict
    may_be_emptied: Verdict
    limit: FillLimit
    dates: Requalification
    reasons: tuple[Reason, ...]
    not_judged: tuple[str, ...]
    edition: str

    @property
    def due(self) -> Month | None:
        """The month in which its test falls due."""
        return self.dates.due

    @property
    def status(self) -> Status:
        """Its status by its dates."""
        return self.dates.status

    @property
    def only_the_look_is_left(self) -> bool:
        """Whether nothing but the filler's look stands between it and a fill."""
        left = {reason.code for reason in self.reasons if reason.severity == "first" and "filling" in reason.about}
        return self.may_be_filled == "only after" and left <= {"look-owed", "star-check-owed"}

    @property
    def fillable_on_what_is_given(self) -> bool:
        """Whether nothing given forbids a fill; what isn't given doesn't count.

        For scripts, which list what wasn't judged. A person at the counter goes by
        ``may_be_filled``.
        """
        return self.status != "cannot be judged" and self.may_be_filled in ("yes", "only after")

    @property
    def emptiable_on_what_is_given(self) -> bool:
        """Whether nothing given forbids emptying it into another."""
        return self.may_be_emptied in ("yes", "only after")


def judge(
    facts: Facts,
    edition: RuleEdition,
    policy: Policy,
    on: datetime.date,
    *,
    at_counter: bool = True,
) -> Judgement:
    """The judgement of a bottle on a day.

    ``at_counter`` False is for scripts: a tare or capacity that isn't given is then
    listed as not judged, where the counter refuses to fill.
    """
    dates = requalify(facts.history(on), facts.mark, edition, policy, on, wall=_wall(facts))
    limit = fill_limit(facts, dates.row, edition, policy)
    asked = Asked(facts, edition, policy, on, dates, limit, at_counter)
    checks = all_checks(asked)
    reasons = in_order((*dates.reasons, *checks.reasons))
    return Judgement(
        may_be_filled=_verdict(reasons, "filling"),
        may_be_emptied=_verdict(reasons, "emptying"),
        limit=limit,
        dates=dates,
        reasons=reasons,
        not_judged=checks.not_judged,
        edition=edition.code,
    )


def _wall(facts: Facts) -> Literal["steel", "aluminium", "composite"] | None:
    if facts.wall is not None:
        return facts.wall
    known = facts.mark.specification if facts.mark is not None else None
    return known.wall if known is not None else None


def _verdict(reasons: tuple[Reason, ...], question: str) -> Verdict:
    """The worst that any reason says about a question."""
    said = {reason.severity for reason in reasons if question in reason.about}
    if "refuses" in said:
        return "no"
    if "unknown" in said:
        return "unknown"
    if "first" in said:
        return "only after"
    return "yes"
