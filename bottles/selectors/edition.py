"""Which rule set and which of the shop's own settings hold on a day."""

from __future__ import annotations

import datetime
from typing import Any

from django.db.models import QuerySet

from bottles.rules.edition import RuleEdition, entered_by_hand
from bottles.rules.edition_files import edition_on
from bottles.rules.policy import Overlay, Policy
from shop.base import models
from shop.base.composed import composed
from shop.base.models import Shop

LIKE = "ADR"  # whose look and wording a rule set entered by hand borrows


def policy_row(on: datetime.date) -> models.Policy | None:
    """Return the shop's policy in force on a day: the latest that had begun."""
    return next(iter(_policies(on)), None)


@composed
def _policies(on: datetime.date) -> QuerySet[models.Policy]:
    return models.Policy.objects.filter(effective_from__lte=on).order_by("-effective_from", "-id")[:1]


def policy_of(row: models.Policy | None) -> Policy:
    """Return a policy's values as the rules take them."""
    values: dict[str, Any] = row.values if row else {}
    return Policy(
        month_rule=values.get("month_rule"),
        visual_interval_months=values.get("visual_interval_months"),
        disc_interval_months=values.get("disc_interval_months"),
        own_limit_per_mille=values.get("own_limit_per_mille"),
        overlays=tuple(
            Overlay(
                interval_months=each["interval_months"],
                specifications=tuple(each["specifications"]) if each.get("specifications") else None,
                authority=each.get("authority", ""),
            )
            for each in values.get("overlays", ())
        ),
    )


def edition_in_force(shop: Shop, on: datetime.date) -> RuleEdition:
    """Return the rule set that holds in the shop on a day; the policy is read only where it's entered by hand."""
    return edition_on(shop.country, on) or edition_for(shop, on, policy_row(on))


def edition_for(shop: Shop, on: datetime.date, row: models.Policy | None) -> RuleEdition:
    """Return the rule set of the shop's country on a day, or the one its manager entered by hand.

    Where nothing was entered yet it has no rows, so that no bottle can be judged by another
    country's.
    """
    shipped = edition_on(shop.country, on)
    if shipped is not None:
        return shipped
    like = edition_on(LIKE, on)
    if like is None:
        raise RuntimeError(f"the rule set {LIKE} isn't shipped")
    by_hand: dict[str, Any] = (row.values.get("by_hand") if row else None) or {}
    return entered_by_hand(
        country=shop.country,
        authority=shop.authority or "the authority having jurisdiction",
        citation=by_hand.get("citation", ""),
        in_force_from=row.effective_from if row else on,
        intervals=by_hand.get("intervals", {}),
        per_mille=by_hand.get("per_mille", 0),
        water=by_hand.get("water", "p200"),
        stamp_order=by_hand.get("stamp_order", "year first"),
        like=like,
    )
