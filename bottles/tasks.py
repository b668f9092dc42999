"""The bottles' work in the background."""

from __future__ import annotations

import logging
from contextlib import suppress
from typing import Any

import bottles.tasks_plan  # noqa: F401  # its handler registers itself
from bottles.selectors.ledger import balance_differences, standing_differences
from bottles.services.learning import gather, learn
from shop.base.errors import AlreadyDone
from shop.base.jobs import Running, job_kind
from shop.base.models import Shop

NAMED = 50  # differences that a result names; more are only counted
log = logging.getLogger(__name__)


@job_kind("ledger.check", daily_from_hour=2)
def check_ledger(job: Running) -> dict[str, Any]:
    """Compare each balance with its lines, all balances with nothing, each standing with its facts."""
    job.progress(0, 2, "balances")
    found = balance_differences()
    job.progress(1, 2, "standings")
    found += standing_differences()
    if found:
        log.error("The nightly check of the books found %s differences: %s", len(found), "; ".join(found[:5]))
    return {"differences": found[:NAMED], "count": len(found)}


@job_kind("learning.fit", daily_from_hour=3)
def learn_from_refills(job: Running) -> dict[str, Any]:
    """Fit the condensation figure anew from the refills that are closed."""
    shop = Shop.objects.first()
    if shop is None:
        return {"refills": 0, "new": 0}
    gathered = gather(shop, lambda done, total: job.progress(done, total + 1, "reading refills"))
    with suppress(AlreadyDone):  # an attempt before this one had come to its end
        new = learn(key=job.act_key("fit"), shop=shop, gathered=gathered)
        return {"refills": len(gathered.observations), "new": len(new)}
    return {"refills": len(gathered.observations), "new": 0}
