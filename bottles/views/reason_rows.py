"""Reasons as a page shows them: figures in the person's own units, the way to what is to be done."""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import Any

from django.urls import reverse

from bottles.models import Bottle, Refill, Standing
from bottles.views.wording import Words
from shop.rules.reason import Reason

# Where what a reason asks for is done: the page of the bottle that takes it.
WHERE: dict[str, str] = {
    "contents-not-given": "edit",
    "mark-not-given": "edit",
    "mark-unknown": "edit",
    "marks-not-given": "edit",
    "pressure-not-read": "edit",
    "wall-needed": "edit",
    "capacity-not-given": "edit",
    "no-capacity": "edit",
    "permit-not-given": "edit",
    "permit-expiry-not-given": "edit",
    "permit-expired": "edit",
    "tare-not-given": "tare",
    "no-tare": "tare",
    "net-not-given": "weigh",
    "over-its-limit": "weigh",
    "within-plus-minus": "weigh",
    "owner-not-given": "owner",
    "conditions-not-given": "condition",
    "no-stamp-read": "stamps",
    "stamp-without-month": "stamps",
    "test-before-manufacture": "stamps",
    "visual-not-given": "stamps",
    "visual-overdue": "stamps",
    "disc-not-given": "stamps",
    "disc-overdue": "stamps",
    "service-life-not-given": "stamps",
}
IN_THE_SHOP: dict[str, str] = dict.fromkeys(("pressure-kept-not-given", "dry-and-purge", "look-owed", "star-check-owed"), "fill")
CONSENT = frozenset({"consent-not-given", "no-consent"})

_GRAMS = re.compile(r"\b(\d+)(?: ± (\d+))? g\b")


def reason_rows(reasons: Iterable[Reason], bottle: Bottle, standing: Standing, words: Words) -> list[dict[str, Any]]:
    """Reasons with the page on which each is answered, where there is one."""
    return [
        {
            "code": reason.code,
            "severity": reason.severity,
            "sentence": in_own_units(reason.sentence, words),
            "next_step": reason.next_step,
            "citation": reason.citation,
            "basis": reason.basis,
            "caution": reason.caution,
            "url": "" if bottle.retired_at else _where(reason.code, bottle, standing),
        }
        for reason in reasons
    ]


def in_own_units(sentence: str, words: Words) -> str:
    """Write the grams of a rule's sentence in the person's own units.

    >>> from shop.physics.formatting import unit_system
    >>> in_own_units("It holds 4821 g, more than its limit of 4536 g: overfull.", Words(unit_system("us")))
    'It holds 10.6 lb, more than its limit of 10.0 lb: overfull.'
    """

    def own(found: re.Match[str]) -> str:
        return words.mass(int(found[1]), plus_minus_g=int(found[2]) if found[2] else None)

    return _GRAMS.sub(own, sentence)


def _where(code: str, bottle: Bottle, standing: Standing) -> str:
    if code == "in-open-refill":
        refill = Refill.objects.filter(bottle=bottle, closed_at=None).order_by("-id").first()
        return reverse("bottles:refill", args=[refill.pk]) if refill else ""
    if code in CONSENT:
        owner = standing.ownership
        if owner is None or not owner.customer_id:
            return ""
        return reverse("people:consent_new", args=[owner.customer_id]) + "?purpose=fill"
    page = WHERE.get(code) or (IN_THE_SHOP.get(code) if standing.is_in else None)
    return reverse(f"bottles:{page}", args=[bottle.code]) if page else ""
