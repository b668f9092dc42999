"""The bottles' work in the background."""

from __future__ import annotations

import logging
from typing import Any

from bottles.selectors.ledger import balance_differences, standing_differences
from shop.base.jobs import Running, job_kind

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
